package rpc

import (
	"io"
	"os"
	"syscall"
)

// writableNow gives a function that says whether an output takes a page
// without waiting, or nil where that cannot be asked.
func writableNow(out io.Writer) func() bool {
	file, ok := out.(*os.File)
	if !ok {
		return nil
	}
	// Not file.Fd, which would change the mode of an output shared with others.
	conn, err := file.SyscallConn()
	if err != nil {
		return nil
	}
	fd := -1
	if err := conn.Control(func(n uintptr) { fd = int(n) }); err != nil {
		return nil
	}
	var zero syscall.FdSet
	bits := 1024 / len(zero.Bits)
	if fd < 0 || fd >= 1024 {
		return nil
	}
	return func() bool {
		var set syscall.FdSet
		set.Bits[fd/bits] |= 1 << (fd % bits)
		n, err := syscall.Select(fd+1, nil, &set, nil, &syscall.Timeval{})
		return err == nil && n == 1
	}
}
