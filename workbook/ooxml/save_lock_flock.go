//go:build darwin || dragonfly || freebsd || linux || netbsd || openbsd

package ooxml

import (
	"errors"
	"os"
	"syscall"
)

// renamesOpenFiles: a file keeps its lock until it has its final name.
const renamesOpenFiles = true

// tryLock takes the lock of a file. The system lets go of it when the file is
// closed or the process ends, however it ends. known is false where the file
// system has no locks.
func tryLock(f *os.File) (locked, known bool) {
	for {
		switch err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB); {
		case err == nil:
			return true, true
		case errors.Is(err, syscall.EINTR):
		default:
			return false, errors.Is(err, syscall.EWOULDBLOCK)
		}
	}
}
