package ooxml

import (
	"bytes"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"strings"
	"testing"
	"time"
)

var oneEdit = Changes{Edits: map[int][]Edit{0: {cellEdit("B1", NumberValue(2))}}}

// fileBook writes a book to a folder of its own and opens it.
func fileBook(t *testing.T, data []byte) (*Book, string) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "Trips.xlsx")
	if err := os.WriteFile(path, data, 0o640); err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(path, 0o640); err != nil {
		t.Fatal(err)
	}
	b, err := Open(path, Limits{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { b.Close() })
	return b, path
}

// onlyFiles fails if the folder holds other files than these.
func onlyFiles(t *testing.T, dir string, names ...string) {
	t.Helper()
	list, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, f := range list {
		got = append(got, f.Name())
	}
	if !reflect.DeepEqual(got, names) {
		t.Errorf("the folder holds %q, want %q", got, names)
	}
}

func fileBytes(t *testing.T, path string) []byte {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

func TestSaveAs(t *testing.T) {
	data := richBook(t)
	b, path := fileBook(t, data)
	out := filepath.Join(filepath.Dir(path), "Trips-filled.xlsx")
	if err := os.WriteFile(out, []byte("older"), 0o600); err != nil {
		t.Fatal(err)
	}
	saved, err := b.SaveAs(out, oneEdit)
	if err != nil {
		t.Fatal(err)
	}
	if want := (Saved{Path: out, Cells: 1, Parts: []string{"xl/worksheets/sheet1.xml"}}); !reflect.DeepEqual(saved, want) {
		t.Errorf("saved %+v, want %+v", saved, want)
	}
	var want bytes.Buffer
	if _, err := b.Write(&want, oneEdit); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(fileBytes(t, out), want.Bytes()) || !bytes.Equal(fileBytes(t, path), data) {
		t.Error("the output is not what Write gives, or the input changed")
	}
	if info, err := os.Stat(out); err != nil || runtime.GOOS != "windows" && info.Mode().Perm() != 0o640 {
		t.Errorf("permissions %v (%v), want those of the input", info.Mode(), err)
	}
	onlyFiles(t, filepath.Dir(path), "Trips-filled.xlsx", "Trips.xlsx")
	// Without changes the copy is exact.
	saved, err = b.SaveAs(out, Changes{})
	if err != nil || saved.Path != out || saved.Cells != 0 || !bytes.Equal(fileBytes(t, out), data) {
		t.Errorf("saved %+v (%v), want an exact copy", saved, err)
	}
}

func TestSaveAsRefuses(t *testing.T) {
	// Large enough not to be held in memory.
	b, path := fileBook(t, smallBook(rows("")).with("xl/media/image1.png", strings.Repeat("dots", 1<<16)).
		change("xl/media/image1.png", func(f *file) { f.store = true }).bytes(t))
	dir := filepath.Dir(path)
	_, err := b.SaveAs(filepath.Join(dir, ".", "Trips.xlsx"), oneEdit)
	wantError(t, err, ErrTarget, path+": this is the workbook itself; give the output another name, or save in place")
	_, err = b.SaveAs(dir, oneEdit)
	wantError(t, err, ErrTarget, dir+": this is not a file; name a file to write")
	_, err = b.SaveAs(filepath.Join(dir, "none", "x.xlsx"), oneEdit)
	if !errors.Is(err, ErrTarget) || !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("error %v", err)
	}
	// What cannot be finished leaves nothing behind: here the source is closed.
	b.Close()
	if _, err = b.SaveAs(filepath.Join(dir, "x.xlsx"), Changes{}); err == nil {
		t.Error("a closed book is saved")
	}
	onlyFiles(t, dir, "Trips.xlsx")
}

func TestSaveInPlace(t *testing.T) {
	data := richBook(t)
	b, path := fileBook(t, data)
	link := filepath.Join(filepath.Dir(path), "link.xlsx")
	before, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	saved, err := b.SaveInPlace(Changes{Recalculate: true})
	after, err2 := os.Stat(path)
	if err != nil || err2 != nil || !reflect.DeepEqual(saved, Saved{}) || !os.SameFile(before, after) || !before.ModTime().Equal(after.ModTime()) {
		t.Errorf("saved %+v (%v, %v): something was written without a change", saved, err, err2)
	}
	var want bytes.Buffer
	if _, err := b.Write(&want, oneEdit); err != nil {
		t.Fatal(err)
	}
	linked := os.Symlink("Trips.xlsx", link) == nil
	if linked {
		// Through a link the file itself is replaced, and the link stays one.
		b.Close()
		if b, err = Open(link, Limits{}); err != nil {
			t.Fatal(err)
		}
	}
	saved, err = b.SaveInPlace(oneEdit)
	if err != nil || saved.Cells != 1 || !bytes.Equal(fileBytes(t, path), want.Bytes()) {
		t.Errorf("saved %+v (%v)", saved, err)
	}
	if info, err := os.Stat(path); err != nil || runtime.GOOS != "windows" && info.Mode().Perm() != 0o640 {
		t.Errorf("permissions %v (%v), want those that the file had", info.Mode(), err)
	}
	if linked {
		if info, err := os.Lstat(link); err != nil || info.Mode()&fs.ModeSymlink == 0 {
			t.Errorf("the link is %v (%v)", info.Mode(), err)
		}
		onlyFiles(t, filepath.Dir(path), "Trips.xlsx", "link.xlsx")
	}
	if _, err := b.SaveInPlace(oneEdit); !errors.Is(err, ErrTarget) {
		t.Errorf("error %v for a book that is closed", err)
	}
}

func TestSaveRefusesAChangedSource(t *testing.T) {
	changes := map[string]func(t *testing.T, path string){
		"time": func(t *testing.T, path string) {
			if err := os.Chtimes(path, time.Unix(1e9, 0), time.Unix(1e9, 0)); err != nil {
				t.Fatal(err)
			}
		},
		"size": func(t *testing.T, path string) {
			info, err := os.Stat(path)
			if err != nil {
				t.Fatal(err)
			}
			f, err := os.OpenFile(path, os.O_APPEND|os.O_WRONLY, 0)
			if err != nil {
				t.Fatal(err)
			}
			_, err = f.WriteString("x")
			if err := errors.Join(err, f.Close(), os.Chtimes(path, info.ModTime(), info.ModTime())); err != nil {
				t.Fatal(err)
			}
		},
		"removed": func(t *testing.T, path string) {
			if err := os.Remove(path); err != nil {
				t.Fatal(err)
			}
		},
	}
	if runtime.GOOS == "windows" {
		delete(changes, "removed") // there an open file cannot be
	}
	for name, change := range changes {
		t.Run(name, func(t *testing.T) {
			b, path := fileBook(t, richBook(t))
			change(t, path)
			_, err := b.SaveAs(filepath.Join(filepath.Dir(path), "out.xlsx"), oneEdit)
			wantError(t, err, ErrChanged, path+": the file was changed while it was being worked on; close it in other programs, then run this again")
			if _, err = b.SaveInPlace(oneEdit); err == nil {
				t.Error("the changed file was replaced")
			}
			if name != "removed" {
				onlyFiles(t, filepath.Dir(path), "Trips.xlsx")
			}
		})
	}
}

func TestSaveInPlaceRefuses(t *testing.T) {
	signed := smallBook(rows("")).with("_rels/.rels", relationsXML("officeDocument", "xl/workbook.xml", packageRelations+"/digital-signature/origin", "_xmlsignatures/origin.sigs")).bytes(t)
	b, path := fileBook(t, signed)
	_, err := b.SaveInPlace(oneEdit)
	wantError(t, err, ErrSigned, path+": the book is signed, and any change breaks the signature; write to another file, or remove the signature first")
	if saved, err := b.SaveInPlace(Changes{}); err != nil || saved.Path != "" {
		t.Errorf("saved %+v (%v): no change breaks no signature", saved, err)
	}
	if !bytes.Equal(fileBytes(t, path), signed) {
		t.Error("the signed book changed")
	}
	b, path = fileBook(t, richBook(t))
	if err := os.Chmod(path, 0o444); err != nil {
		t.Fatal(err)
	}
	b.Close()
	if b, err = Open(path, Limits{}); err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	_, err = b.SaveInPlace(oneEdit)
	wantError(t, err, ErrTarget, path+": the file is read-only; make it writable, or write to another file")
	if err := os.Chmod(path, 0o644); err != nil {
		t.Fatal(err)
	}
	_, err = open(t, signed).SaveInPlace(oneEdit)
	wantError(t, err, ErrTarget, "Trips.xlsx: the book is not an open file; save it under a name")
}

// A failure after the temporary file was begun removes it: here a part that a
// save copies is overwritten while the book is open.
func TestSaveRemovesItsTemporaryFile(t *testing.T) {
	// Large enough not to be held in memory.
	data := smallBook(rows("")).with("xl/media/image1.png", strings.Repeat("dots", 1<<16)).
		change("xl/media/image1.png", func(f *file) { f.store = true }).bytes(t)
	at := bytes.Index(data, []byte("dots")) - len("PK\x03\x04") - 26 - len("xl/media/image1.png")
	b, path := fileBook(t, data)
	info, err1 := os.Stat(path)
	f, err2 := os.OpenFile(path, os.O_WRONLY, 0)
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	_, err := f.WriteAt([]byte("XXXX"), int64(at))
	if err := errors.Join(err, f.Close(), os.Chtimes(path, info.ModTime(), info.ModTime())); err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(filepath.Dir(path), "out.xlsx")
	_, err = b.SaveAs(out, oneEdit)
	if !errors.Is(err, ErrDamaged) || !strings.Contains(err.Error(), "the part does not lie where the file's directory says") {
		t.Errorf("error %v", err)
	}
	onlyFiles(t, filepath.Dir(path), "Trips.xlsx")
}

func TestLockFiles(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "Trips.xlsx")
	if lock, found := LockFile(path); found {
		t.Errorf("lock file %s", lock)
	}
	for _, name := range []string{"~$Trips.xlsx", ".~lock.Trips.xlsx#"} {
		lock := filepath.Join(dir, name)
		if err := os.WriteFile(lock, nil, 0o600); err != nil {
			t.Fatal(err)
		}
		if got, found := LockFile(path); got != lock || !found || !IsLockFile(got) {
			t.Errorf("lock file %q (%v), want %s", got, found, lock)
		}
		if err := os.Remove(lock); err != nil {
			t.Fatal(err)
		}
	}
	if IsLockFile(path) {
		t.Errorf("%s counts as a lock file", path)
	}
}
