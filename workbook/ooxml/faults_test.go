package ooxml

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"syscall"
	"testing"
)

// fullAfter is a disk that has room for so many bytes.
type fullAfter struct {
	io.Writer
	room int
}

func (w *fullAfter) Write(p []byte) (int, error) {
	if len(p) <= w.room {
		w.room -= len(p)
		return w.Writer.Write(p)
	}
	n, _ := w.Writer.Write(p[:w.room])
	w.room = 0
	return n, syscall.ENOSPC
}

// A disk that becomes full at any byte leaves the old file, no other, and says
// so.
func TestADiskThatBecomesFullAtAnyByteLeavesTheOldFile(t *testing.T) {
	b, path := fileBook(t, richBook(t))
	changes := Changes{Edits: oneEdit.Edits, Sheets: newSheets, Recalculate: true}
	j, err := b.prepare(changes)
	if err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(filepath.Dir(path), "out.xlsx")
	if err := os.WriteFile(out, []byte("older"), 0o600); err != nil {
		t.Fatal(err)
	}
	whole := 0
	if err := b.write(writerFunc(func(p []byte) (int, error) { whole += len(p); return len(p), nil }), j); err != nil {
		t.Fatal(err)
	}
	step := max(1, whole/500)
	for room := 0; room < whole; room += step {
		j, err := b.prepare(changes)
		if err != nil {
			t.Fatal(err)
		}
		err = b.disk.SaveAs(out, func(w io.Writer) error { return b.write(&fullAfter{w, room}, j) })
		if !errors.Is(err, ErrTarget) || !errors.Is(err, syscall.ENOSPC) || !strings.HasPrefix(err.Error(), out+": the file cannot be written: ") || !strings.HasSuffix(err.Error(), "check that the disk has room") {
			t.Fatalf("room for %d of %d bytes: %v", room, whole, err)
		}
		if got := fileBytes(t, out); string(got) != "older" {
			t.Fatalf("room for %d of %d bytes: it holds %d others", room, whole, len(got))
		}
	}
	onlyFiles(t, filepath.Dir(path), "Trips.xlsx", "out.xlsx")
}

type writerFunc func([]byte) (int, error)

func (f writerFunc) Write(p []byte) (int, error) { return f(p) }

// replacements are what can come into the place of a file while another is
// written: each gives what must stand there when the save was refused.
func replacements(dir string) map[string]func(path string) error {
	return map[string]func(path string) error{
		"another file": func(path string) error {
			_ = os.Remove(path)
			return os.WriteFile(path, []byte("another"), 0o600)
		},
		"a file renamed": func(path string) error {
			other := filepath.Join(dir, "other")
			if err := os.WriteFile(other, []byte("another"), 0o600); err != nil {
				return err
			}
			return os.Rename(other, path)
		},
		"a link to another file": func(path string) error {
			other := filepath.Join(dir, "other")
			_ = os.Remove(path)
			return errors.Join(os.WriteFile(other, []byte("another"), 0o600), os.Symlink("other", path))
		},
		"a folder": func(path string) error {
			_ = os.Remove(path)
			return errors.Join(os.Mkdir(path, 0o700), os.WriteFile(filepath.Join(path, "in"), []byte("another"), 0o600))
		},
		"nothing": os.Remove,
	}
}

// What is put in the place of a book while a save in place writes stays there.
func TestASaveInPlaceLeavesWhatCameIntoThePlaceOfTheBook(t *testing.T) {
	if runtime.GOOS == "windows" {
		return // there an open file cannot be replaced
	}
	for name := range replacements("") {
		t.Run(name, func(t *testing.T) {
			b, path := fileBook(t, richBook(t))
			dir := filepath.Dir(path)
			come := replacements(dir)[name]
			_, err := b.disk.SaveInPlace(func(w io.Writer) error {
				if err := come(path); err != nil {
					t.Fatal(err)
				}
				return writeText("new")(w)
			})
			wantError(t, err, ErrChanged, path+": the file was changed while it was being worked on; close it in other programs, then run this again")
			at := path
			if info, err := os.Stat(path); err == nil && info.IsDir() {
				at = filepath.Join(path, "in")
			}
			if got, err := os.ReadFile(at); string(got) != "another" && (name != "nothing" || !errors.Is(err, os.ErrNotExist)) {
				t.Errorf("it holds %q (%v)", got, err)
			}
			noTemporaryFile(t, dir)
		})
	}
}

// A save under another name asks once more, when all is written, whether it may.
func TestASaveThatMayNoLongerLeavesWhatStandsThere(t *testing.T) {
	b, path := fileBook(t, richBook(t))
	out := filepath.Join(filepath.Dir(path), "out.xlsx")
	refusal := errors.New("somebody changed it")
	_, err := b.SaveAs(out, oneEdit, func() error { return errors.Join(os.WriteFile(out, []byte("another"), 0o600), refusal) })
	if !errors.Is(err, refusal) || string(fileBytes(t, out)) != "another" {
		t.Errorf("error %v, it holds %q", err, fileBytes(t, out))
	}
	onlyFiles(t, filepath.Dir(path), "Trips.xlsx", "out.xlsx")
	// A folder in its place is not replaced, whoever allows it.
	err = b.disk.SaveAs(out, func(w io.Writer) error {
		return errors.Join(os.Remove(out), os.Mkdir(out, 0o700), writeText("new")(w))
	})
	if !errors.Is(err, ErrTarget) || !strings.HasPrefix(err.Error(), out+": the finished file cannot be put in its place: ") {
		t.Errorf("error %v", err)
	}
	onlyFiles(t, filepath.Dir(path), "Trips.xlsx", "out.xlsx")
}

// A link in the place of an output is replaced, and what it leads to stays: a
// save must not reach out of its folder.
func TestALinkInThePlaceOfAnOutputIsReplaced(t *testing.T) {
	b, path := fileBook(t, richBook(t))
	dir := filepath.Dir(path)
	far := filepath.Join(t.TempDir(), "far.xlsx")
	if err := os.WriteFile(far, []byte("far"), 0o600); err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(dir, "out.xlsx")
	if os.Symlink(far, out) != nil {
		return // this system makes no links for this user
	}
	if _, err := b.SaveAs(out, oneEdit); err != nil {
		t.Fatal(err)
	}
	if info, err := os.Lstat(out); err != nil || !info.Mode().IsRegular() || string(fileBytes(t, far)) != "far" {
		t.Errorf("the output is %v (%v), what the link led to holds %q", info.Mode(), err, fileBytes(t, far))
	}
	onlyFiles(t, dir, "Trips.xlsx", "out.xlsx")
}

func TestANameThatIsTooLongIsRefused(t *testing.T) {
	b, path := fileBook(t, richBook(t))
	out := filepath.Join(filepath.Dir(path), strings.Repeat("x", 300)+".xlsx")
	_, err := b.SaveAs(out, oneEdit)
	if !errors.Is(err, ErrTarget) || runtime.GOOS != "windows" && !strings.HasSuffix(err.Error(), "name too long; give it a shorter name") {
		t.Errorf("error %v", err)
	}
	onlyFiles(t, filepath.Dir(path), "Trips.xlsx")
}

func noTemporaryFile(t *testing.T, dir string) {
	t.Helper()
	if left, err := filepath.Glob(filepath.Join(dir, ".saving-*")); err != nil || len(left) > 0 {
		t.Errorf("left over: %v (%v)", left, err)
	}
}
