package workbook

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"halfwidth/workbook/calculation"
)

// besideFolder makes a folder with a sheet's folder below it:
// root/depot/{trips.csv, old/trips.csv, x.calculations.csv}, root/secret.csv.
func besideFolder(t *testing.T) (root, sheet string) {
	t.Helper()
	root = t.TempDir()
	for _, name := range []string{"secret.csv", "depot/trips.csv", "depot/old/trips.csv", "depot/x.calculations.csv", "depot/.hidden/a.csv", "depot/~$book.xlsx", "depot/notes.txt"} {
		path := filepath.Join(root, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte("minutes\n12\n"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return root, filepath.Join(root, "depot", "x.calculations.csv")
}

func TestFilesAreReadBesideTheSheetAndBelowOnly(t *testing.T) {
	root, sheet := besideFolder(t)
	links := os.Symlink(filepath.Join(root, "secret.csv"), filepath.Join(root, "depot", "link.csv")) == nil
	b := OpenBeside(sheet, []string{root})
	defer b.Close()
	for file, want := range map[string]string{
		"trips.csv": "", "old/trips.csv": "", `old\trips.csv`: "",
		"../secret.csv": "leads out", "missing.csv": "is not there", "old": "is not there", "link.csv": "is a link that leads out",
		filepath.Join(root, "secret.csv"): "leads out",
	} {
		if file == "link.csv" && !links {
			continue // a system on which links are not for everyone
		}
		_, err := b.Open(file, calculation.FileOptions{})
		if _, again := b.Find(file); (again == nil) != (err == nil) {
			t.Errorf("%s: opened %v, found %v", file, err, again)
		}
		if want == "" && err != nil || want != "" && (err == nil || !strings.Contains(err.Error(), want)) {
			t.Errorf("%s: %v, want %q", file, err, want)
		}
	}
	if files := b.Files(); !slices.Equal(files, []string{"old/trips.csv", "trips.csv"}) {
		t.Errorf("the files are %q", files)
	}
}

func TestNothingIsReadOutsideTheAllowedFolders(t *testing.T) {
	root, sheet := besideFolder(t)
	for _, allowed := range [][]string{nil, {filepath.Join(root, "depot", "old")}, {filepath.Join(root, "dep")}, {filepath.Join(root, "none")}} {
		b := OpenBeside(sheet, allowed)
		if _, err := b.Open("trips.csv", calculation.FileOptions{}); err == nil || !strings.Contains(err.Error(), "open in the editor") {
			t.Errorf("with %q allowed: %v", allowed, err)
		}
		if files := b.Files(); files != nil {
			t.Errorf("with %q allowed the files are %q", allowed, files)
		}
		b.Close()
	}
	for _, sheet := range []string{"x.calculations.csv", filepath.Join(root, "none", "x.calculations.csv")} {
		if _, err := OpenBeside(sheet, []string{root, "."}).Find("trips.csv"); err == nil {
			t.Errorf("%s lies nowhere, and a file beside it is found", sheet)
		}
	}
}

// A link to the folder is the folder, on both sides.
func TestAllowedFoldersAreComparedBehindLinks(t *testing.T) {
	root, sheet := besideFolder(t)
	link := filepath.Join(t.TempDir(), "link")
	if err := os.Symlink(root, link); err != nil {
		t.Logf("no links here: %v", err)
		return
	}
	for _, c := range [][2]string{{sheet, link}, {filepath.Join(link, "depot", "x.calculations.csv"), root}} {
		if _, err := OpenBeside(c[0], []string{c[1]}).Find("trips.csv"); err != nil {
			t.Errorf("%s in %s: %v", c[0], c[1], err)
		}
	}
}

func TestAChangedFileIsFoundAsAnother(t *testing.T) {
	root, sheet := besideFolder(t)
	b := OpenBeside(sheet, []string{root})
	before, err := b.Find("trips.csv")
	if err != nil {
		t.Fatal(err)
	}
	if again, _ := b.Find("trips.csv"); again != before {
		t.Errorf("unchanged: %v, then %v", before, again)
	}
	if err := os.Chtimes(before.Path, time.Time{}, before.Modified.Add(time.Second)); err != nil {
		t.Fatal(err)
	}
	if after, _ := b.Find("trips.csv"); after == before {
		t.Errorf("changed: still %v", after)
	}
}
