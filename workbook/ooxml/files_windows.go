package ooxml

import (
	"errors"
	"io/fs"
	"os"
	"slices"
	"syscall"
	"time"
)

// sharingViolation is the error of opening, or renaming, what another process
// has open in a way that does not allow it.
const sharingViolation syscall.Errno = 32

// openTemp opens or makes a temporary file. As long as it is open, no other
// process can open it to write, which is its lock; it can be renamed and removed,
// which files that package os opens here cannot.
func openTemp(name string, flag int) (*os.File, error) {
	path, err := syscall.UTF16PtrFromString(name)
	if err != nil {
		return nil, &fs.PathError{Op: "open", Path: name, Err: err}
	}
	how := uint32(syscall.OPEN_EXISTING)
	if flag&os.O_EXCL != 0 {
		how = syscall.CREATE_NEW
	}
	h, err := syscall.CreateFile(path, syscall.GENERIC_READ|syscall.GENERIC_WRITE, syscall.FILE_SHARE_READ|syscall.FILE_SHARE_DELETE,
		nil, how, syscall.FILE_ATTRIBUTE_NORMAL, 0)
	if err != nil {
		return nil, &fs.PathError{Op: "open", Path: name, Err: err}
	}
	return os.NewFile(uintptr(h), name), nil
}

// tryLock: a file that openTemp has opened is locked.
func tryLock(*os.File) (locked, known bool) { return true, true }

// patience is how long to wait for another program that has a file open for a
// moment, such as one that looks it through for malware.
const patience = 2 * time.Second

// patiently does what may fail for that reason, again and again.
func patiently(do func() error, passing ...error) error {
	for since := time.Now(); ; time.Sleep(10 * time.Millisecond) {
		err := do()
		if time.Since(since) > patience || !slices.ContainsFunc(passing, func(p error) bool { return errors.Is(err, p) }) {
			return err
		}
	}
}

func rename(from, to string) error {
	return patiently(func() error { return os.Rename(from, to) }, sharingViolation, syscall.ERROR_ACCESS_DENIED)
}

// OpenToRead opens a file to read, and waits for a program that holds it for a moment,
// as one does that puts a new file in its place.
func OpenToRead(path string) (f *os.File, err error) {
	err = patiently(func() error { f, err = os.Open(path); return err }, sharingViolation)
	return f, err
}
