package rpc

import (
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// What the system does not let be read or written is an error that says so; what
// was there stays, nothing else is left, and the server goes on.
func TestAFillThatTheSystemRefusesLeavesEverything(t *testing.T) {
	inside, _ := fillFolder(t)
	book := filepath.Join(inside, "handling.calculations.csv")
	output := filepath.Join(inside, "handling-filled.calculations.csv")
	c := begin(t, Options{MayFill: []string{inside}})
	c.initialize()
	for name, fault := range map[string]struct {
		make, undo func() error
		params     string
		want       string
	}{
		"a read-only file in place": {
			func() error { return os.Chmod(book, 0o444) }, func() error { return os.Chmod(book, 0o644) },
			`{"path":%q,"inPlace":true}`, "the file is read-only",
		},
		"an output that is a folder": {
			func() error { return os.Mkdir(output, 0o755) }, func() error { return os.Remove(output) },
			`{"path":%q}`, "is a folder",
		},
		"an output of somebody's": {
			func() error { return os.WriteFile(output, []byte("x\n"), 0o644) }, func() error { return os.Remove(output) },
			`{"path":%q}`, "changed since it was filled",
		},
		"an output with a name too long": {
			nil, nil,
			`{"path":%q,"output":"` + filepath.ToSlash(filepath.Join(inside, strings.Repeat("x", 300)+".csv")) + `"}`, "shorter name",
		},
		"a book cut to nothing": {
			func() error { return os.Truncate(book, 0) }, func() error { return os.WriteFile(book, []byte(someCalculations), 0o644) },
			`{"path":%q}`, "",
		},
	} {
		if fault.make != nil {
			if err := fault.make(); err != nil {
				t.Fatal(err)
			}
		}
		before := listing(t, inside)
		r := c.fill(fmt.Sprintf(fault.params, book))
		switch {
		case r.Error == nil:
			t.Errorf("%s: it was filled: %s", name, r.Result)
		case r.Error.Code != CodeRequestFailed && r.Error.Code != CodeInvalidParams || !strings.Contains(r.Error.Message, fault.want) || strings.Contains(r.Error.Message, "--"):
			t.Errorf("%s: %d %s", name, r.Error.Code, r.Error.Message)
		}
		if after := listing(t, inside); after != before {
			t.Errorf("%s: the folder holds\n%s\nbefore it held\n%s", name, after, before)
		}
		if fault.undo != nil {
			if err := fault.undo(); err != nil {
				t.Fatal(err)
			}
		}
	}
	// Names of any characters are filled.
	for _, name := range []string{"two words", "📦", "two\nlines", `"quoted"`, "-dash"} {
		path := filepath.Join(inside, name+".calculations.csv")
		if err := os.WriteFile(path, []byte(someCalculations), 0o644); err != nil {
			if runtime.GOOS == "linux" {
				t.Error(err)
			}
			continue
		}
		params, err := json.Marshal(map[string]string{"path": path})
		if err != nil {
			t.Fatal(err)
		}
		if r := c.fill(string(params)); r.Error != nil || !strings.Contains(read(t, filepath.Join(inside, name+"-filled.calculations.csv")), "trips.csv,14,ok") {
			t.Errorf("%q: %+v", name, r.Error)
		}
	}
	c.leave()
}

// listing gives the files of a folder with their contents.
func listing(t *testing.T, dir string) string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	for _, e := range entries {
		fmt.Fprintf(&b, "%s", e.Name())
		if e.Type().IsRegular() {
			fmt.Fprintf(&b, ": %q", read(t, filepath.Join(dir, e.Name())))
		}
		b.WriteByte('\n')
	}
	return b.String()
}
