package rpc

import "testing"

func TestPathsOfURIs(t *testing.T) {
	for _, c := range []struct{ uri, unix, windows string }{
		{"file:///home/a/x.calculations.csv", "/home/a/x.calculations.csv", ""},
		{"file:///home/a%20b/%C3%A4%23.csv", "/home/a b/ä#.csv", ""},
		{"file://localhost/home/x.csv", "/home/x.csv", ""},
		{"FILE:///home/x.csv", "/home/x.csv", ""},
		{"file:///home/a/../../etc/x.csv", "/etc/x.csv", ""},
		{"file:///home/a/%2e%2e/%2e%2e/x.csv", "/x.csv", ""},
		{"file:///c%3A/Users/a%20b/x.csv", "/c:/Users/a b/x.csv", `c:\Users\a b\x.csv`},
		{"file:///C:/x.csv", "/C:/x.csv", `C:\x.csv`},
		{"file:///c:", "/c:", ""},
		{"file:///c:/", "/c:", ""},
		{"file:///c:/a/..", "/c:", ""},
		{"file://server/share/x.csv", "", `\\server\share\x.csv`},
		{"untitled:x.calculations.csv", "", ""},
		{"https://example.com/x.csv", "", ""},
		{"file:///a%00b", "", ""},
		{"x.csv", "", ""},
		{"%zz", "", ""},
	} {
		if got := pathOf(c.uri, false); got != c.unix {
			t.Errorf("%s is %q, want %q", c.uri, got, c.unix)
		}
		want := c.windows
		if c.unix == "/c:" {
			want = `c:\`
		}
		if got := pathOf(c.uri, true); got != want {
			t.Errorf("%s on Windows is %q, want %q", c.uri, got, want)
		}
	}
	for _, path := range []string{"/home/a b/ä#.csv", "/x%y.csv"} {
		if got := pathOf(uriOf(path), false); got != path {
			t.Errorf("%s becomes %s, which is %s", path, uriOf(path), got)
		}
	}
}

func TestOnlyTextCalculationSheetsAreOurs(t *testing.T) {
	for uri, ours := range map[string]bool{
		"file:///a/x.calculations.csv": true, "file:///a/X.Calculations.TSV": true, "untitled:x.calculations.csv": true, "file:///a%2Fx.calculations%2Ecsv": true,
		"vfs://host/a/x.calculations.csv?v=1": true, `file:///a/x.calculations.csv#top`: true,
		"file:///a/x.csv": false, "file:///a/calculations.csv": false, "file:///a/x.calculations.csv/notes.txt": false, "file:///a/x.calculations.xlsx": false, "": false, "untitled:Untitled-1": false,
	} {
		if _, got := sheetName(uri); got != ours {
			t.Errorf("%s: %v, want %v", uri, got, ours)
		}
	}
}
