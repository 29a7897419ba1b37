package ooxml

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// SaveAs writes the book with its changes to another file, through a temporary
// file in the same folder. A file of that name is replaced; the book's own file
// is refused. Without changes it is an exact copy.
func (b *Book) SaveAs(path string, changes Changes) (Saved, error) {
	if info, err := os.Stat(path); err == nil {
		switch {
		case !info.Mode().IsRegular():
			return Saved{}, b.target(path, "this is not a file", "name a file to write", nil)
		case b.info != nil && os.SameFile(info, b.info):
			return Saved{}, b.target(path, "this is the workbook itself", "give the output another name, or save in place", nil)
		}
	}
	j, err := b.prepare(changes)
	if err != nil {
		return Saved{}, err
	}
	mode := fs.FileMode(0o644)
	if b.info != nil {
		mode = b.info.Mode().Perm() | 0o200 // a copy of a read-only book can be written
	}
	if err := b.replace(path, mode, j, false); err != nil {
		return Saved{}, err
	}
	j.saved.Path = path
	return j.saved, nil
}

// SaveInPlace writes the book over its own file, through a temporary file in
// the same folder, with the same permissions. Without changes nothing is
// written. A signed book is refused, and a file that changed since it was
// opened. Once it has written, the book is closed.
func (b *Book) SaveInPlace(changes Changes) (Saved, error) {
	if b.disk == nil {
		return Saved{}, b.target(b.file, "the book is not an open file", "save it under a name", nil)
	}
	j, err := b.prepare(changes)
	if err != nil || len(j.rewrite) == 0 && len(j.add) == 0 {
		return Saved{}, err
	}
	switch {
	case b.signed:
		return Saved{}, &Error{File: b.file, Kind: ErrSigned, Reason: "the book is signed, and any change breaks the signature", Advice: "write to another file, or remove the signature first"}
	case b.info.Mode().Perm()&0o200 == 0:
		return Saved{}, b.target(b.file, "the file is read-only", "make it writable, or write to another file", nil)
	}
	// A rename would put the new file in the place of a link to the old one.
	path, err := filepath.EvalSymlinks(b.file)
	if err != nil {
		return Saved{}, b.target(b.file, "the file cannot be found any more: "+plainCause(err), "check its name", err)
	}
	if err := b.replace(path, b.info.Mode().Perm(), j, true); err != nil {
		return Saved{}, err
	}
	j.saved.Path = path
	return j.saved, nil
}

func (b *Book) target(path, reason, advice string, cause error) *Error {
	return &Error{File: path, Kind: ErrTarget, Reason: reason, Advice: advice, Err: cause}
}

// replace writes a temporary file and renames it, so that the target is always
// whole: as it was, or as it is to be.
func (b *Book) replace(path string, mode fs.FileMode, j *job, own bool) (err error) {
	dir := filepath.Dir(path)
	temp, err := os.CreateTemp(dir, ".saving-*.tmp")
	if err != nil {
		return b.target(path, "no file can be made in its folder: "+plainCause(err), "check the folder, and that you may write there", err)
	}
	done := false
	defer func() {
		if !done {
			temp.Close()
			os.Remove(temp.Name())
		}
	}()
	if err = b.write(temp, j); err != nil {
		return b.writeError(path, err)
	}
	if err = errors.Join(temp.Chmod(mode), temp.Sync(), temp.Close()); err != nil {
		return b.writeError(path, err)
	}
	if err = b.unchanged(); err != nil {
		return err
	}
	if own {
		// Some systems do not replace a file that is open.
		if err = b.Close(); err != nil {
			return b.writeError(path, err)
		}
	}
	if err = os.Rename(temp.Name(), path); err != nil {
		return b.target(path, "the finished file cannot be put in its place: "+plainCause(err), "close programs that have it open, then try again", err)
	}
	done = true
	syncDir(dir)
	return nil
}

// writeError leaves refusals as they are and explains failures of the disk.
func (b *Book) writeError(path string, err error) error {
	var e *Error
	if errors.As(err, &e) {
		return err
	}
	return b.target(path, "the file cannot be written: "+plainCause(err), "check that the disk has room", err)
}

// unchanged refuses a book whose file another program has changed or replaced
// since it was opened.
func (b *Book) unchanged() error {
	if b.info == nil {
		return nil
	}
	info, err := os.Stat(b.file)
	if err == nil && info.Size() == b.info.Size() && info.ModTime().Equal(b.info.ModTime()) && os.SameFile(info, b.info) {
		return nil
	}
	return &Error{File: b.file, Kind: ErrChanged, Reason: "the file was changed while it was being worked on", Advice: "close it in other programs, then run this again", Err: err}
}

// syncDir makes the rename last through a power cut, where the system lets a
// folder be synced; where not, the rename still stands in order.
func syncDir(dir string) {
	if d, err := os.Open(dir); err == nil {
		_ = d.Sync()
		d.Close()
	}
}

// LockFile finds the owner or lock file that another program keeps beside a
// file that it has open: ~$NAME, or .~lock.NAME#.
func LockFile(path string) (lock string, found bool) {
	dir, base := filepath.Split(path)
	for _, name := range []string{"~$" + base, ".~lock." + base + "#"} {
		if _, err := os.Lstat(filepath.Join(dir, name)); err == nil {
			return filepath.Join(dir, name), true
		}
	}
	return "", false
}

// IsLockFile tells whether a file's name is that of an owner or lock file.
func IsLockFile(path string) bool {
	base := filepath.Base(path)
	return strings.HasPrefix(base, "~$") || strings.HasPrefix(base, ".~lock.")
}
