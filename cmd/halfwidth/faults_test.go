package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// oddNames are names of files that a shell, a terminal or a format could trip
// over; those that the system does not take are left out there.
var oddNames = []string{"two words", "it's", `"quoted"`, "two\nlines", "-dash", "--help", "@file", "~tilde", "$HOME", "%PATH%", "a;b&c|d", "*", "[a-z]", "?", "\x1b[31mred",
	"📦", "Zürich", "e\u0301", "\u202egnp", ".hidden", "con", "aux.", "nul ", "a:b", "bad \xff\xfe bytes", "trailing-filled.x", strings.Repeat("x", 243)}

func TestBooksOfOddNamesAreFilledVerifiedAndShown(t *testing.T) {
	content := readFile(t, demo)
	t.Chdir(t.TempDir())
	done := 0
	for _, name := range oddNames {
		book := name + ".xlsx"
		if err := os.WriteFile(book, content, 0o600); err != nil {
			if runtime.GOOS == "linux" {
				t.Errorf("%q: %v", name, err)
			}
			continue
		}
		done++
		filled := name + "-filled.xlsx"
		if stdout, _, _ := run(t, "fill", "--", book); strings.Contains(stdout, "\x1b") {
			t.Errorf("what is printed of %q steers the terminal", name)
		}
		for _, args := range [][]string{{"fill", "--", book}, {"fill", "--format", "json", "--", book}, {"verify", "--", filled}, {"preview", "--format", "json", "--", book}, {"page", "--", book}, {"fill", "--in-place", "--", book}} {
			stdout, stderr, code := run(t, args...)
			if code != exitOK || stderr != "" {
				t.Errorf("%s of %q: code %d, %s", args[0], name, code, stderr)
			}
			if args[1] == "--format" {
				var rows []struct{ Book string }
				if err := json.Unmarshal([]byte(stdout), &rows); err != nil || len(rows) == 0 || rows[0].Book != strings.NewReplacer("\xff", "\uFFFD", "\xfe", "\uFFFD").Replace(book) {
					t.Errorf("%s of %q as JSON: %v, %v", args[0], name, err, rows[:min(1, len(rows))])
				}
			}
		}
		if len(readFile(t, filled)) <= len(content) || !isFile(name+".html") {
			t.Errorf("%q: nothing was written", name)
		}
		for _, path := range []string{book, filled, name + ".html"} {
			if err := os.Remove(path); err != nil {
				t.Error(err)
			}
		}
	}
	left, err := os.ReadDir(".")
	if err != nil || len(left) > 0 {
		t.Errorf("left over: %v (%v)", left, err)
	}
	if runtime.GOOS == "linux" && done != len(oddNames) {
		t.Errorf("%d of %d names were tried", done, len(oddNames))
	}
}

// A folder with all of them is one batch, and no name steers the terminal.
func TestABatchOfOddNames(t *testing.T) {
	dir := t.TempDir()
	made := 0
	for _, name := range oddNames {
		if err := os.WriteFile(filepath.Join(dir, name+".calculations.csv"), []byte("work out,sample,> mean\nmean-interval,1; 2; 4,\n"), 0o600); err == nil && !strings.HasPrefix(name, ".") {
			made++
		}
	}
	stdout, stderr, code := run(t, "fill", dir)
	filled, err := filepath.Glob(filepath.Join(dir, "*-filled.calculations.csv"))
	if code != exitOK || err != nil || len(filled) != made {
		t.Errorf("code %d, %d of %d filled (%v)\n%s%s", code, len(filled), made, err, stdout, stderr)
	}
	if strings.Contains(stdout, "\x1b") {
		t.Errorf("what is printed steers the terminal: %q", stdout)
	}
	if stdout, stderr, code = run(t, "fill", dir); code != exitOK || strings.Contains(stdout, "\x1b") {
		t.Errorf("once more: code %d\n%q%s", code, stdout, stderr)
	}
	if stdout, stderr, code = run(t, "verify", dir); code != exitOK {
		t.Errorf("verify: code %d\n%s%s", code, stdout, stderr)
	}
}

func TestAnErrorDoesNotSteerTheTerminal(t *testing.T) {
	_, stderr, code := run(t, "fill", filepath.Join(t.TempDir(), "\x1bred.xlsx"))
	if code != exitFailed || strings.Contains(stderr, "\x1b") || !strings.Contains(stderr, "red.xlsx") {
		t.Errorf("code %d, %q", code, stderr)
	}
}

func TestNamesThatAreTooLongAreRefusedPlainly(t *testing.T) {
	if runtime.GOOS == "windows" {
		return // there other limits hold, of whole paths
	}
	dir := t.TempDir()
	long := strings.Repeat("x", 300)
	book := copyTo(t, demo, dir, "book.xlsx")
	edge := copyTo(t, demo, dir, strings.Repeat("x", 249)+".xlsx") // with -filled it is too long
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"fill", filepath.Join(dir, long+".xlsx")}, "the file cannot be opened: file name too long"},
		{[]string{"fill", edge}, "the output's name is too long"},
		{[]string{"fill", "--replace", edge}, "file name too long; give it a shorter name"},
		{[]string{"fill", book, "--output", filepath.Join(dir, long+".xlsx")}, "the output's name is too long"},
		{[]string{"page", book, "--output", filepath.Join(dir, long+".html")}, "file name too long"},
		{[]string{"starter", filepath.Join(dir, long+".xlsx"), "--for", "mean-interval"}, "file name too long"},
	} {
		stdout, stderr, code := run(t, c.args...)
		if code != exitFailed || stdout != "" || !strings.Contains(stderr, c.want) || strings.Count(stderr, "\n") != 1 {
			t.Errorf("%s: code %d, %s", c.args[0], code, stderr)
		}
	}
	if got := tree(t, dir); len(got) != 2 {
		t.Errorf("the folder holds %d files", len(got))
	}
	if stdout, stderr, code := run(t, "fill", edge, "--output", filepath.Join(dir, "short.xlsx")); code != exitOK {
		t.Errorf("a shorter name: code %d %s%s", code, stdout, stderr)
	}
}
