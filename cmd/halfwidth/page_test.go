package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestPageWritesOnePageABook(t *testing.T) {
	dir := t.TempDir()
	first, second := copyTo(t, demo, dir, "first.xlsx"), copyTo(t, demo, dir, "second.xlsx")
	pages := filepath.Join(dir, "pages")
	if err := os.Mkdir(pages, 0o700); err != nil {
		t.Fatal(err)
	}
	stdout, stderr, code := run(t, "page", first, second, "-o", pages)
	if code != exitOK || stderr != "" {
		t.Fatalf("code %d, stderr %q", code, stderr)
	}
	for _, name := range []string{"first", "second"} {
		target := filepath.Join(pages, name+".html")
		if !strings.Contains(stdout, "Wrote "+target+": 31 rows ok, 12 caution, 0 refused.\n") {
			t.Errorf("it printed %q", stdout)
		}
		page, err := os.ReadFile(target)
		if err != nil || !strings.Contains(string(page), "<h1>"+name+".xlsx</h1>") {
			t.Errorf("%s is no page of its book (%v)", target, err)
		}
	}
	if before, err := os.ReadFile(demo); err != nil {
		t.Error(err)
	} else if after, err := os.ReadFile(first); err != nil || string(after) != string(before) {
		t.Errorf("the workbook was written to (%v)", err)
	}
	if _, _, code := run(t, "page", first); code != exitOK {
		t.Errorf("code %d without --output", code)
	}
	if _, err := os.Stat(filepath.Join(dir, "first.html")); err != nil {
		t.Error(err)
	}
}

func TestPageSaysWhatIsWrong(t *testing.T) {
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "trips.xlsx")
	empty, other := filepath.Join(dir, "empty"), filepath.Join(dir, "other")
	for _, folder := range []string{empty, other} {
		if err := os.Mkdir(folder, 0o700); err != nil {
			t.Fatal(err)
		}
	}
	twin := copyTo(t, demo, other, "trips.xlsx")
	notes := filepath.Join(dir, "notes.html")
	if err := os.WriteFile(notes, []byte("<p>mine"), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"page"}, "no workbook named"},
		{[]string{"page", book, "-o", notes}, "notes.html is there already and is no page that halfwidth wrote; name another, or add --replace"},
		{[]string{"page", book, "-o", filepath.Join(dir, "trips.pdf")}, "must end in .html"},
		{[]string{"page", book, demo, "-o", notes}, "is one file, but there may be several workbooks"},
		{[]string{"page", book, twin, "-o", dir}, "would both be written to"},
		{[]string{"page", empty}, "there was no workbook to make a page of"},
		{[]string{"page", book, "-o", filepath.Join(dir, "none") + "/"}, "make it first"},
		{[]string{"page", filepath.Join(dir, "none.xlsx")}, "none.xlsx"},
	} {
		stdout, stderr, code := run(t, c.args...)
		if code != exitFailed || stdout != "" || !strings.Contains(stderr, c.want) {
			t.Errorf("%v: code %d, stdout %q, stderr %q; want %q", c.args, code, stdout, stderr, c.want)
		}
	}
	if kept, err := os.ReadFile(notes); err != nil || string(kept) != "<p>mine" {
		t.Errorf("the notes now read %q (%v)", kept, err)
	}
}

func TestPagesOfAFolderLieAsItsWorkbooksDo(t *testing.T) {
	dir, out := t.TempDir(), t.TempDir()
	below := filepath.Join(dir, "north")
	if err := os.Mkdir(below, 0o700); err != nil {
		t.Fatal(err)
	}
	copyTo(t, demo, dir, "a.xlsx")
	copyTo(t, demo, below, "b.xlsx")
	copyTo(t, demo, below, "b-filled.xlsx")
	if err := os.WriteFile(filepath.Join(dir, "broken.xlsx"), []byte("PK"), 0o600); err != nil {
		t.Fatal(err)
	}
	stdout, stderr, code := run(t, "page", dir, "-o", out)
	if code != exitRefused || !strings.Contains(stderr, "broken.xlsx") || !strings.Contains(stderr, "Left out "+filepath.Join(below, "b-filled.xlsx")) {
		t.Errorf("code %d, stderr %q", code, stderr)
	}
	for _, page := range []string{"a.html", filepath.Join("north", "b.html")} {
		if _, err := os.Stat(filepath.Join(out, page)); err != nil || !strings.Contains(stdout, filepath.Join(out, page)) {
			t.Errorf("%v; it printed %q", err, stdout)
		}
	}
}
