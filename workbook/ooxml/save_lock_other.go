//go:build !(darwin || dragonfly || freebsd || linux || netbsd || openbsd)

package ooxml

import "os"

// renamesOpenFiles is false where an open file cannot be renamed.
const renamesOpenFiles = false

// tryLock knows of no locks here. Windows removes no file that a process has
// open; elsewhere age tells a file left over.
func tryLock(*os.File) (locked, known bool) { return false, false }
