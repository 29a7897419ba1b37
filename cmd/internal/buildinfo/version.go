// Package buildinfo says which build of the programs this is.
package buildinfo

import (
	"runtime/debug"
	"strings"
)

// Version is the module's version, with the revision it was built from where
// the build recorded one that the version does not name, and the Go release that
// built it.
func Version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	return describe(info)
}

func describe(info *debug.BuildInfo) string {
	v := info.Main.Version
	if v == "" || v == "(devel)" {
		v = "development"
	}
	for _, s := range info.Settings {
		if s.Key == "vcs.revision" && len(s.Value) >= 12 && !strings.Contains(v, s.Value[:12]) {
			v += " (" + s.Value[:12] + ")"
		}
	}
	return v + " " + info.GoVersion
}
