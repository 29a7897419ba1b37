package workbook

import (
	"fmt"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"strings"
	"testing"
)

// makeFiles makes empty files below a new folder.
func makeFiles(t *testing.T, names ...string) string {
	t.Helper()
	dir := t.TempDir()
	for _, name := range names {
		path := filepath.Join(dir, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, nil, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	return dir
}

// told writes what was found, one line each, paths seen from dir.
func told(dir string, files Files) []string {
	var lines []string
	for _, f := range files.Found {
		line := strings.ReplaceAll(filepath.ToSlash(f.Path), filepath.ToSlash(dir)+"/", "")
		if f.LeftOut != "" {
			line += ": " + strings.ReplaceAll(filepath.ToSlash(f.LeftOut), filepath.ToSlash(dir)+"/", "")
		}
		if f.Err != nil {
			line += "! " + f.Err.Error()
		}
		lines = append(lines, line)
	}
	return lines
}

func TestAFolderIsSearchedForBooksAndSaysWhatIsLeftOut(t *testing.T) {
	dir := makeFiles(t, "b.xlsx", "a/C.XLSX", "a/d.xlsm", "a/e.calculations.csv", "a/f.calculations.tsv", "a/trips.csv", "a/note.txt", "a/old.xls",
		"b-filled.xlsx", "a/e-filled.calculations.csv", "~$b.xlsx", ".~lock.b.xlsx#", "._b.xlsx", ".cache/x.xlsx", ".saving-00-1.tmp")
	files := Find([]string{dir}, false)
	want := []string{
		"._b.xlsx: a hidden file",
		".cache: a hidden folder",
		".saving-00-1.tmp: a temporary file of a save that is under way or was cut off",
		".~lock.b.xlsx#: a lock file of another program",
		"a/C.XLSX",
		"a/d.xlsm",
		"a/e-filled.calculations.csv: an earlier output",
		"a/e.calculations.csv",
		"a/f.calculations.tsv",
		"b-filled.xlsx: an earlier output",
		"b.xlsx",
		"~$b.xlsx: a lock file of another program",
	}
	if got := told(dir, files); !reflect.DeepEqual(got, want) || !files.Batch {
		t.Errorf("found\n%s\nwant\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
	for _, f := range files.Found {
		if f.LeftOut == "" && (!f.InFolder || f.Key != filepath.ToSlash(filepath.Join(f.Below, filepath.Base(f.Path)))) {
			t.Errorf("%+v", f)
		}
	}
	if got := Find([]string{filepath.Join(dir, "b.xlsx")}, false); got.Batch || len(got.Found) != 1 {
		t.Errorf("a book named alone: %+v", got)
	}
}

func TestWithFilledTheOutputsAreLookedFor(t *testing.T) {
	dir := makeFiles(t, "a.xlsx", "a-filled.xlsx", "b.xlsx", "c-filled.xlsx", "d.calculations.csv", "d-filled.calculations.csv")
	want := []string{"a-filled.xlsx", "a.xlsx: its output is there: a-filled.xlsx", "b.xlsx", "c-filled.xlsx",
		"d-filled.calculations.csv", "d.calculations.csv: its output is there: d-filled.calculations.csv"}
	if got := told(dir, Find([]string{dir}, true)); !reflect.DeepEqual(got, want) {
		t.Errorf("found %q, want %q", got, want)
	}
}

// What a pattern of ours finds and what a shell makes of it come to the same.
func TestAPatternFindsWhatAShellWouldName(t *testing.T) {
	dir := makeFiles(t, "a.xlsx", "a-filled.xlsx", "b-filled.xlsx", "~$a.xlsx", ".hidden.xlsx", "c.csv")
	want := []string{"a-filled.xlsx: an earlier output", "a.xlsx", "b-filled.xlsx", "~$a.xlsx: a lock file of another program"}
	ours := Find([]string{filepath.Join(dir, "*.xlsx")}, false)
	if got := told(dir, ours); !reflect.DeepEqual(got, want) {
		t.Errorf("found %q, want %q", got, want)
	}
	var words []string
	for _, name := range []string{"a-filled.xlsx", "a.xlsx", "b-filled.xlsx", "~$a.xlsx"} {
		words = append(words, filepath.Join(dir, name))
	}
	if theirs := Find(words, false); !reflect.DeepEqual(ours, theirs) {
		t.Errorf("a pattern gives\n%+v\nthe names give\n%+v", ours, theirs)
	}
	for pattern, want := range map[string]string{"*.xlsm": "nothing has a name like this", "[.xlsx": "the pattern has no meaning"} {
		got := Find([]string{filepath.Join(dir, pattern)}, false)
		if len(got.Found) != 1 || got.Found[0].Err == nil || !strings.Contains(got.Found[0].Err.Error(), want) {
			t.Errorf("%s: %+v", pattern, got)
		}
	}
}

func TestAFileIsTakenOnceUnderWhateverNames(t *testing.T) {
	dir := makeFiles(t, "a/b.xlsx", "a/c.xlsx")
	a := filepath.Join(dir, "a")
	want := []string{"a/b.xlsx", "a/b.xlsx: the same file as a/b.xlsx", "a/c.xlsx"}
	if got := told(dir, Find([]string{a, filepath.Join(a, "b.xlsx")}, false)); !reflect.DeepEqual(got, want) {
		t.Errorf("found %q, want %q", got, want)
	}
	if runtime.GOOS == "windows" {
		return // links need rights there
	}
	for link, to := range map[string]string{"a/z.xlsx": "b.xlsx", "a/link": "."} {
		if err := os.Symlink(to, filepath.Join(dir, link)); err != nil {
			t.Fatal(err)
		}
	}
	want = []string{"a/b.xlsx", "a/c.xlsx", "a/link: a link to a folder; name the folder itself", "a/z.xlsx: the same file as a/b.xlsx"}
	if got := told(dir, Find([]string{dir}, false)); !reflect.DeepEqual(got, want) {
		t.Errorf("found %q, want %q", got, want)
	}
}

func TestKeysDoNotRestOnWhereTheFolderLies(t *testing.T) {
	keys := func() string {
		var list []string
		for _, f := range Find([]string{makeFiles(t, "a/b.xlsx", "c.xlsx")}, false).Found {
			list = append(list, f.Key)
		}
		return fmt.Sprint(list)
	}
	if first, second := keys(), keys(); first != second || first != "[a/b.xlsx c.xlsx]" {
		t.Errorf("keys %s and %s", first, second)
	}
}
