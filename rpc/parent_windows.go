package rpc

import (
	"errors"
	"syscall"
)

// alive reports whether a process runs. One that may not be opened does.
func alive(process int) bool {
	const invalidParameter = syscall.Errno(87) // what OpenProcess says of a number that no process has
	handle, err := syscall.OpenProcess(syscall.SYNCHRONIZE, false, uint32(process))
	if err != nil {
		return !errors.Is(err, invalidParameter)
	}
	defer syscall.CloseHandle(handle)
	state, err := syscall.WaitForSingleObject(handle, 0)
	return err != nil || state == syscall.WAIT_TIMEOUT
}
