//go:build linux || darwin

package main

import (
	"os"
	"runtime"
	"syscall"
)

// peakMiB is the largest resident memory of a process that has ended.
func peakMiB(p *os.ProcessState) float64 {
	use, ok := p.SysUsage().(*syscall.Rusage)
	if !ok {
		return 0
	}
	if runtime.GOOS == "darwin" { // which counts bytes, not KiB
		return float64(use.Maxrss) / (1 << 20)
	}
	return float64(use.Maxrss) / (1 << 10)
}
