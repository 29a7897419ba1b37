package ooxml

import (
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// File is a file that is open for reading, with what the system said of it when
// it was opened. What is made of it can be saved under another name or in its
// place.
type File struct {
	*os.File
	info fs.FileInfo
}

// OpenFile opens a file. The caller closes it.
func OpenFile(path string) (*File, error) {
	f, err := OpenToRead(path)
	if err != nil {
		return nil, &Error{File: path, Kind: ErrUnreadable, Reason: "the file cannot be opened: " + plainCause(err), Advice: "check its name and that you may read it", Err: err}
	}
	info, err := f.Stat()
	if err == nil && !info.Mode().IsRegular() {
		err = &Error{File: path, Kind: ErrNotWorkbook, Reason: "this is not a file", Advice: "name a workbook (.xlsx or .xlsm)"}
	}
	if err != nil {
		f.Close()
		return nil, err
	}
	return &File{f, info}, nil
}

// Size is how long the file was when it was opened.
func (f *File) Size() int64 { return f.info.Size() }

// SaveAs writes another file, through a temporary file in the same folder, so
// that it is always whole. A file of that name is replaced; f itself is refused,
// and so is a save after another program changed f. A nil f stands for data that
// is in no file. What may still refuse it is called last, when all is written
// and before the file takes its place.
func (f *File) SaveAs(path string, write func(io.Writer) error, last ...func() error) error {
	if info, err := os.Stat(path); err == nil {
		switch {
		case !info.Mode().IsRegular():
			return target(path, "this is not a file", "name a file to write", nil)
		case f != nil && os.SameFile(info, f.info):
			return target(path, "this is the workbook itself", "give the output another name, or save in place", nil)
		}
	}
	mode := fs.FileMode(0o644)
	if f != nil {
		mode = f.info.Mode().Perm() | 0o200 // a copy of a read-only file can be written
	}
	return replace(path, mode, write, func() error {
		for _, refuse := range append([]func() error{f.unchanged}, last...) {
			if err := refuse(); err != nil {
				return err
			}
		}
		return nil
	})
}

// SaveInPlace writes over the file itself, through a temporary file in the same
// folder, with the same permissions; behind a link, over the file that it leads
// to. A file that changed since it was opened is refused. Once it is written,
// f is closed. It gives the path that was written.
func (f *File) SaveInPlace(write func(io.Writer) error) (string, error) {
	if f.info.Mode().Perm()&0o200 == 0 {
		return "", target(f.Name(), "the file is read-only", "make it writable, or write to another file", nil)
	}
	// A rename would put the new file in the place of a link to the old one.
	path, err := filepath.EvalSymlinks(f.Name())
	if err != nil {
		return "", target(f.Name(), "the file cannot be found any more: "+plainCause(err), "check its name", err)
	}
	return path, replace(path, f.info.Mode().Perm(), write, func() error {
		if err := f.unchanged(); err != nil {
			return err
		}
		// Some systems do not replace a file that is open.
		if err := f.Close(); err != nil {
			return writeError(path, err)
		}
		return nil
	})
}

// SaveAs writes the book with its changes to another file; see File.SaveAs.
// Without changes it is an exact copy.
func (b *Book) SaveAs(path string, changes Changes, last ...func() error) (Saved, error) {
	j, err := b.prepare(changes)
	if err != nil {
		return Saved{}, err
	}
	if err := b.disk.SaveAs(path, func(w io.Writer) error { return b.write(w, j) }, last...); err != nil {
		return Saved{}, err
	}
	j.saved.Path = path
	return j.saved, nil
}

// SaveInPlace writes the book over its own file; see File.SaveInPlace. Without
// changes nothing is written. A signed book is refused. Once it has written,
// the book is closed.
func (b *Book) SaveInPlace(changes Changes) (Saved, error) {
	if b.disk == nil {
		return Saved{}, target(b.file, "the book is not an open file", "save it under a name", nil)
	}
	j, err := b.prepare(changes)
	if err != nil || len(j.rewrite) == 0 && len(j.add) == 0 {
		return Saved{}, err
	}
	if b.signed {
		return Saved{}, &Error{File: b.file, Kind: ErrSigned, Reason: "the book is signed, and any change breaks the signature", Advice: "write to another file, or remove the signature first"}
	}
	path, err := b.disk.SaveInPlace(func(w io.Writer) error { return b.write(w, j) })
	if err != nil {
		return Saved{}, err
	}
	b.disk = nil
	j.saved.Path = path
	return j.saved, nil
}

// unchanged refuses a file that another program has changed or replaced since
// it was opened.
func (f *File) unchanged() error {
	if f == nil {
		return nil
	}
	info, err := os.Stat(f.Name())
	if err == nil && info.Size() == f.info.Size() && info.ModTime().Equal(f.info.ModTime()) && os.SameFile(info, f.info) {
		return nil
	}
	return &Error{File: f.Name(), Kind: ErrChanged, Reason: "the file was changed while it was being worked on", Advice: "close it in other programs, then run this again", Err: err}
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
