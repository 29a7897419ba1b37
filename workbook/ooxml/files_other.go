//go:build !(darwin || dragonfly || freebsd || linux || netbsd || openbsd || windows)

package ooxml

import "os"

func openTemp(name string, flag int) (*os.File, error) { return os.OpenFile(name, flag, 0o600) }

func rename(from, to string) error { return os.Rename(from, to) }

// OpenToRead opens a file to read.
func OpenToRead(path string) (*os.File, error) { return os.Open(path) }

// tryLock knows of no locks here: age tells a file left over.
func tryLock(*os.File) (locked, known bool) { return false, false }
