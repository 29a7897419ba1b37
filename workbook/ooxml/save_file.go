package ooxml

import (
	"errors"
	"fmt"
	"hash/fnv"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"syscall"
	"time"
)

// replace writes a file through a temporary one in the same folder, so that the
// target is always whole: as it was, or as it is to be, also where the process
// is killed. last is called when all is written; its error leaves the target as
// it was.
func replace(path string, mode fs.FileMode, write func(io.Writer) error, last func() error) (err error) {
	dir := filepath.Dir(path)
	temp, err := createTemp(path)
	if err != nil {
		return target(path, "no file can be made in its folder: "+plainCause(err), "check the folder, and that you may write there", err)
	}
	name, done := temp.Name(), false
	defer func() {
		if !done {
			temp.Close()
			os.Remove(name)
		}
	}()
	if err = write(temp); err != nil {
		return writeError(path, err)
	}
	if err = errors.Join(temp.Chmod(mode), temp.Sync()); err != nil {
		return writeError(path, err)
	}
	if err = last(); err != nil {
		return err
	}
	if err = rename(name, path); err != nil {
		return target(path, "the finished file cannot be put in its place: "+plainCause(err), "close programs that have it open, then try again", err)
	}
	done = true
	temp.Close() // it is written and synced; this lets go of its lock
	syncDir(dir)
	return nil
}

func target(path, reason, advice string, cause error) *Error {
	if errors.Is(cause, syscall.ENAMETOOLONG) {
		advice = "give it a shorter name"
	}
	return &Error{File: path, Kind: ErrTarget, Reason: reason, Advice: advice, Err: cause}
}

// writeError leaves refusals as they are and explains failures of the disk.
func writeError(path string, err error) error {
	var e *Error
	if errors.As(err, &e) {
		return err
	}
	return target(path, "the file cannot be written: "+plainCause(err), "check that the disk has room", err)
}

// syncDir makes the rename last through a power cut, where the system lets a
// folder be synced; where not, the rename still stands in order.
func syncDir(dir string) {
	if d, err := os.Open(dir); err == nil {
		_ = d.Sync()
		d.Close()
	}
}

// A target has a few names for temporary files. Each writer takes the first that
// is free and holds a lock on it, which ends with its process; a file that
// nobody holds is left over from a process that was killed. So the next save of
// a target finds what is to be removed without reading the whole folder.
const tempNames = 4

// tries is how often all names are tried: one may be held for a moment by a
// process that looks whether it is left over.
const tries = 10

// staleAfter is the age from which a temporary file counts as left over where
// files cannot be locked. A file that is being written is never that old.
const staleAfter = time.Hour

func tempName(path string, i int) string {
	h := fnv.New64a()
	io.WriteString(h, filepath.Base(path))
	return filepath.Join(filepath.Dir(path), fmt.Sprintf(".saving-%016x-%d.tmp", h.Sum64(), i))
}

// IsTempFile tells whether a file's name is that of a temporary file of a save.
func IsTempFile(path string) bool {
	ok, err := filepath.Match(".saving-*.tmp", filepath.Base(path))
	return ok && err == nil
}

// createTemp makes the temporary file of a target, and removes those that were
// left over.
func createTemp(path string) (temp *os.File, err error) {
	for range tries {
		for i := range tempNames {
			name := tempName(path, i+1)
			if temp != nil {
				removeStale(name)
				continue
			}
			made, err := makeHeld(name)
			if errors.Is(err, fs.ErrExist) && removeStale(name) {
				made, err = makeHeld(name)
			}
			switch {
			case err == nil:
				temp = made
			case !errors.Is(err, fs.ErrExist):
				return nil, err
			}
		}
		if temp != nil {
			return temp, nil
		}
	}
	return nil, fmt.Errorf("%d other programs are writing it", tempNames)
}

// makeHeld makes a new file and locks it. Where another process took it for left
// over before it was locked, the name is not to be had.
func makeHeld(name string) (*os.File, error) {
	f, err := openTemp(name, os.O_RDWR|os.O_CREATE|os.O_EXCL)
	if err != nil {
		return nil, err
	}
	if locked, known := tryLock(f); known && (!locked || !stands(f, name)) {
		f.Close()
		return nil, fs.ErrExist
	}
	return f, nil
}

// removeStale removes a temporary file that no process holds. It tells whether
// the name is free.
func removeStale(name string) bool {
	if _, err := os.Lstat(name); err != nil {
		return errors.Is(err, fs.ErrNotExist)
	}
	f, err := openTemp(name, os.O_RDWR)
	if err != nil {
		return errors.Is(err, fs.ErrNotExist)
	}
	defer f.Close()
	switch locked, known := tryLock(f); {
	case known && !locked:
		return false
	case known && !stands(f, name):
		return true // another process was quicker
	case !known:
		if info, err := f.Stat(); err != nil || time.Since(info.ModTime()) < staleAfter {
			return false
		}
	}
	err = os.Remove(name)
	return err == nil || errors.Is(err, fs.ErrNotExist)
}

// stands tells whether the name still stands for the open file.
func stands(f *os.File, name string) bool {
	here, err1 := f.Stat()
	there, err2 := os.Lstat(name)
	return err1 == nil && err2 == nil && os.SameFile(here, there)
}
