//go:build !unix && !windows

package rpc

// alive cannot ask on this system; the end of the input ends the server.
func alive(int) bool { return true }
