package ooxml

import (
	"archive/zip"
	"cmp"
	"encoding/binary"
	"fmt"
	"io"
	"slices"
)

// watch passes a file on to archive/zip. While that reads the directory it holds
// it to a length that the limit of entries allows; and it notes where the last
// read began, since archive/zip does not tell where the header of an entry lies.
type watch struct {
	io.ReaderAt
	limits Limits
	left   int64 // bytes of the directory that may still be read
	last   int64
	done   bool // read only, from then on by several goroutines at once
}

// entryBytes is more than a directory has for an entry: 46 bytes, its name and
// some extra fields.
const entryBytes = 512

func newWatch(r io.ReaderAt, limits Limits) *watch {
	// The end of the directory is looked for in 66 KiB; the rest is for reading
	// ahead.
	return &watch{ReaderAt: r, limits: limits, left: 128<<10 + int64(limits.Entries)*entryBytes}
}

func (w *watch) ReadAt(b []byte, at int64) (int, error) {
	if !w.done {
		if w.last, w.left = at, w.left-int64(len(b)); w.left < 0 {
			return 0, beyond(fmt.Sprintf("the file's directory is longer than %d parts need, which is the limit", w.limits.Entries), "Entries")
		}
	}
	return w.ReaderAt.ReadAt(b, at)
}

// check refuses entries whose header does not lie where the directory says or
// bears another name, so that other programs would see other parts, and entries
// that overlap, as no program but one that means harm writes them.
func (w *watch) check(files []*zip.File, size int64) error {
	defer func() { w.done = true }()
	type span struct {
		from, to int64
		name     string
	}
	spans := make([]span, 0, len(files))
	for _, f := range files {
		w.left = 1 << 20 // no more than a header is read
		body, err := f.DataOffset()
		if err != nil {
			return place(sourceError(err), "", f.Name, "")
		}
		head := w.last
		name, err := w.localName(head)
		var e *Error
		switch {
		case err != nil:
			e = sourceError(err)
		case name != f.Name && partKey(name) != partKey(f.Name):
			e = damaged("the part has another name where it lies than in the file's directory")
		case f.CompressedSize64 > uint64(size-body):
			e = damaged("the part is longer than the file")
		}
		if e != nil {
			e.Part = f.Name
			return e
		}
		spans = append(spans, span{head, body + int64(f.CompressedSize64), f.Name})
	}
	slices.SortFunc(spans, func(a, b span) int { return cmp.Compare(a.from, b.from) })
	for i := 1; i < len(spans); i++ {
		if before := spans[i-1]; spans[i].from < before.to {
			e := damaged(fmt.Sprintf("the part overlaps the part %s in the file", before.name))
			e.Part = spans[i].name
			return e
		}
	}
	return nil
}

// localName reads the name in the local header at a place, which archive/zip has
// found to be one (APPNOTE.TXT 4.3.7: its length 26 bytes on, the name 30).
func (w *watch) localName(head int64) (string, error) {
	var length [2]byte
	if _, err := w.ReaderAt.ReadAt(length[:], head+26); err != nil {
		return "", err
	}
	name := make([]byte, binary.LittleEndian.Uint16(length[:]))
	if n, err := w.ReaderAt.ReadAt(name, head+30); n < len(name) {
		return "", err
	}
	return string(name), nil
}
