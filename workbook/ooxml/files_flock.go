//go:build darwin || dragonfly || freebsd || linux || netbsd || openbsd

package ooxml

import (
	"errors"
	"os"
	"syscall"
)

// openTemp opens or makes a temporary file, which can be renamed while it is open.
func openTemp(name string, flag int) (*os.File, error) { return os.OpenFile(name, flag, 0o600) }

func rename(from, to string) error { return os.Rename(from, to) }

// OpenToRead opens a file to read.
func OpenToRead(path string) (*os.File, error) { return os.Open(path) }

// tryLock takes the lock of a file. The system lets go of it when the file is
// closed or the process ends, however it ends. known is false where the file
// system has no locks.
func tryLock(f *os.File) (locked, known bool) {
	raw, err := f.SyscallConn()
	if err != nil {
		return false, false
	}
	if failure := raw.Control(func(fd uintptr) {
		for err = syscall.EINTR; errors.Is(err, syscall.EINTR); {
			err = syscall.Flock(int(fd), syscall.LOCK_EX|syscall.LOCK_NB)
		}
	}); failure != nil {
		return false, false
	}
	return err == nil, err == nil || errors.Is(err, syscall.EWOULDBLOCK)
}
