package rpc

import (
	"net/url"
	"path"
	"path/filepath"
	"runtime"
	"strings"
)

// onWindows says that paths have drive letters and backslashes.
const onWindows = runtime.GOOS == "windows"

// pathOf gives the path that a file URI (RFC 8089) names; "" for other URIs and
// for files of another machine that the system cannot name by a path. Clients
// encode more than they need to: file:///c%3A/a%20b.csv is c:\a b.csv.
func pathOf(uri string, windows bool) string {
	u, err := url.Parse(uri)
	if err != nil || !strings.EqualFold(u.Scheme, "file") || u.Path == "" || strings.ContainsRune(u.Path, 0) {
		return ""
	}
	host := u.Host
	if strings.EqualFold(host, "localhost") {
		host = ""
	}
	p := path.Clean("/" + u.Path)
	switch {
	case !windows && host != "":
		return ""
	case !windows:
		return p
	case host != "":
		return `\\` + host + strings.ReplaceAll(p, "/", `\`)
	case len(p) > 2 && p[2] == ':' && isLetter(p[1]):
		p = strings.ReplaceAll(p[1:], "/", `\`)
		if len(p) == 2 {
			p += `\`
		}
		return p
	}
	return ""
}

func isLetter(c byte) bool { return 'a' <= c|0x20 && c|0x20 <= 'z' }

// uriOf gives the file URI of an absolute path.
func uriOf(file string) string {
	p := filepath.ToSlash(file)
	u := url.URL{Scheme: "file"}
	switch {
	case strings.HasPrefix(p, "//"): // a share of another machine
		host, rest, _ := strings.Cut(p[2:], "/")
		u.Host, u.Path = host, "/"+rest
	case !strings.HasPrefix(p, "/"):
		u.Path = "/" + p
	default:
		u.Path = p
	}
	return u.String()
}

// sheetName gives the name of the file that a URI of any scheme names, and
// whether it is that of a text calculation sheet. Other documents are none of
// ours.
func sheetName(uri string) (string, bool) {
	name := uri
	if u, err := url.Parse(uri); err == nil {
		if name = u.Path; name == "" {
			name = u.Opaque
		}
		if plain, err := url.PathUnescape(name); err == nil && u.Opaque != "" {
			name = plain
		}
	}
	name = name[strings.LastIndexAny(name, `/\`)+1:]
	return name, isTextSheet(name)
}
