package ooxml

import (
	"bufio"
	"io"
)

// patch replaces remove bytes at a place of a part.
type patch struct {
	at, remove int64
	insert     []byte
}

// applyPatches copies src to dst with the patches made, which are in order and
// do not overlap. It reads src to its end.
func applyPatches(dst io.Writer, src io.Reader, patches []patch) error {
	w := writers.Get().(*bufio.Writer)
	w.Reset(dst)
	defer func() {
		w.Reset(nil)
		writers.Put(w)
	}()
	var at int64
	for _, p := range patches {
		if _, err := io.CopyN(w, src, p.at-at); err != nil {
			return err
		}
		if _, err := io.CopyN(io.Discard, src, p.remove); err != nil {
			return err
		}
		if _, err := w.Write(p.insert); err != nil {
			return err
		}
		at = p.at + p.remove
	}
	if _, err := io.Copy(w, src); err != nil {
		return err
	}
	return w.Flush()
}
