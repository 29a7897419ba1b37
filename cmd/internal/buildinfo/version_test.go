package buildinfo

import (
	"runtime"
	"runtime/debug"
	"strings"
	"testing"
)

func TestAVersionNamesReleaseRevisionAndGo(t *testing.T) {
	revision := debug.BuildSetting{Key: "vcs.revision", Value: "0123456789abcdef0123456789abcdef01234567"}
	for _, test := range []struct {
		info debug.BuildInfo
		want string
	}{
		{debug.BuildInfo{GoVersion: "go1.26.0", Main: debug.Module{Version: "v1.2.0"}}, "v1.2.0 go1.26.0"},
		{debug.BuildInfo{GoVersion: "go1.26.0", Main: debug.Module{Version: "(devel)"}}, "development go1.26.0"},
		{debug.BuildInfo{GoVersion: "go1.26.0", Settings: []debug.BuildSetting{revision}}, "development (0123456789ab) go1.26.0"},
		{debug.BuildInfo{GoVersion: "go1.26.0", Main: debug.Module{Version: "v1.2.0"}, Settings: []debug.BuildSetting{revision}}, "v1.2.0 (0123456789ab) go1.26.0"},
		{debug.BuildInfo{GoVersion: "go1.26.0", Main: debug.Module{Version: "v0.0.0-20261201161631-0123456789ab+dirty"}, Settings: []debug.BuildSetting{revision}}, "v0.0.0-20261201161631-0123456789ab+dirty go1.26.0"},
		{debug.BuildInfo{GoVersion: "go1.26.0", Settings: []debug.BuildSetting{{Key: "vcs.revision", Value: "0123"}}}, "development go1.26.0"},
	} {
		if got := describe(&test.info); got != test.want {
			t.Errorf("got %q, want %q", got, test.want)
		}
	}
}

func TestTheVersionOfThisBuild(t *testing.T) {
	if got := Version(); !strings.HasSuffix(got, runtime.Version()) {
		t.Errorf("got %q, which does not end with %s", got, runtime.Version())
	}
}
