//go:build unix

package rpc

import (
	"errors"
	"syscall"
)

// alive reports whether a process exists. One that may not be signalled does.
func alive(process int) bool {
	return !errors.Is(syscall.Kill(process, 0), syscall.ESRCH)
}
