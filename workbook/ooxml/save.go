package ooxml

import (
	"archive/zip"
	"bytes"
	"cmp"
	"errors"
	"hash/crc32"
	"io"
	"maps"
	"slices"
	"strings"
	"time"
)

// Changes is what a save is to change.
type Changes struct {
	// Edits of cells, by the index of their sheet.
	Edits map[int][]Edit
	// Sheets to add, after the last.
	Sheets []NewSheet
	// Recalculate asks that the formulas be worked out again when the book is
	// opened next. It takes effect only where a cell changes or a sheet is added.
	Recalculate bool
}

// Saved is what a save did.
type Saved struct {
	Path        string   // the file written; empty if nothing was
	Cells       int      // cells changed, those of new sheets left out
	Parts       []string // parts changed or added, in the order of the file
	Recalculate bool     // recalculation on load was asked for
}

// job is a save made ready: the parts to write anew, by entry, and those to add.
type job struct {
	saved   Saved
	rewrite map[int]func(w io.Writer) error
	add     []newPart
}

type newPart struct {
	name string
	data []byte
}

// Write writes the book with its changes. Without changes it is an exact copy of
// the file.
func (b *Book) Write(w io.Writer, changes Changes) (Saved, error) {
	j, err := b.prepare(changes)
	if err != nil {
		return Saved{}, err
	}
	return j.saved, b.write(w, j)
}

// prepare finds out which parts change, before anything is written.
func (b *Book) prepare(changes Changes) (*job, error) {
	j := &job{rewrite: make(map[int]func(io.Writer) error)}
	for _, sheet := range slices.Sorted(maps.Keys(changes.Edits)) {
		p, err := b.plan(sheet, changes.Edits[sheet])
		if err != nil {
			return nil, err
		}
		if len(p.patches) == 0 {
			continue
		}
		entry := b.entries[sheet]
		j.saved.Cells += len(p.changed)
		j.rewrite[entry] = func(w io.Writer) error {
			r, err := b.open(entry)
			if err == nil {
				err = p.splice(w, r)
			}
			return place(err, b.file, b.name(entry), b.sheets[sheet].Name)
		}
	}
	if j.saved.Cells == 0 && len(changes.Sheets) == 0 {
		return j, nil
	}
	j.saved.Recalculate = changes.Recalculate
	if err := b.prepareWorkbook(j, changes); err != nil {
		return nil, place(err, b.file, "", "")
	}
	for i, f := range b.zip.File {
		if j.rewrite[i] != nil {
			j.saved.Parts = append(j.saved.Parts, f.Name)
		}
	}
	for _, p := range j.add {
		j.saved.Parts = append(j.saved.Parts, p.name)
	}
	return j, nil
}

// compression is the deflate level of changed parts: ten times as fast as the
// standard library's level 6, for an eighth more bytes, and with tables so small
// that a short part does not pay for them.
const compression = 1

// firstDay is the first day that a zip file can name. New parts bear it, so that
// the same save gives the same bytes.
var firstDay = time.Date(1980, 1, 1, 0, 0, 0, 0, time.UTC)

// write writes the zip file: entries that do not change in their compressed
// form, in order, with their times, comments and extra fields.
func (b *Book) write(w io.Writer, j *job) error {
	if len(j.rewrite) == 0 && len(j.add) == 0 {
		_, err := io.Copy(w, io.NewSectionReader(b.src, 0, b.size))
		return err
	}
	out := zip.NewWriter(w)
	out.RegisterCompressor(zip.Deflate, newDeflater)
	if err := out.SetComment(b.zip.Comment); err != nil {
		return err
	}
	var seal sealer
	for i, f := range b.zip.File {
		rewrite := j.rewrite[i]
		if rewrite == nil {
			if err := b.copyEntry(out, f); err != nil {
				return err
			}
			seal.add(f.Name, f.CRC32, f.UncompressedSize64)
			continue
		}
		header := f.FileHeader
		header.Method = zip.Deflate
		// A zero Modified keeps the entry's time as its other fields have it,
		// where a time set anew would add one more extra field.
		header.Modified = time.Time{}
		part, err := out.CreateHeader(&header)
		if err != nil {
			return err
		}
		sum := &counted{Writer: part}
		if err := rewrite(sum); err != nil {
			return err
		}
		seal.add(f.Name, sum.crc, sum.length)
		seal.headers = append(seal.headers, &header)
	}
	for _, p := range j.add {
		header := zip.FileHeader{Name: p.name, Method: zip.Deflate, Modified: firstDay}
		part, err := out.CreateHeader(&header)
		if err != nil {
			return err
		}
		if _, err := part.Write(p.data); err != nil {
			return err
		}
		seal.add(p.name, crc32.ChecksumIEEE(p.data), uint64(len(p.data)))
		seal.headers = append(seal.headers, &header)
	}
	seal.set()
	return out.Close()
}

// copyEntry copies an entry in its compressed form. Its errors tell a source that
// is damaged or cannot be read from a target that cannot be written.
func (b *Book) copyEntry(out *zip.Writer, f *zip.File) error {
	raw, err := f.OpenRaw()
	if err != nil {
		return place(sourceError(err), b.file, f.Name, "")
	}
	header := f.FileHeader
	if strings.HasSuffix(f.Name, "/") {
		// A folder holds nothing, and archive/zip writes nothing for it; some
		// programs deflate that to two bytes.
		header.Method, header.CompressedSize64, header.Flags = zip.Store, 0, header.Flags&^8
		_, err := out.CreateRaw(&header)
		return err
	}
	w, err := out.CreateRaw(&header)
	if err != nil {
		return err
	}
	n, err := copyLent(w, sourceReader{raw})
	if err == nil && uint64(n) != f.CompressedSize64 {
		err = sourceError(io.ErrUnexpectedEOF)
	}
	return place(err, b.file, f.Name, "")
}

type sourceReader struct{ io.Reader }

func (s sourceReader) Read(b []byte) (int, error) {
	n, err := s.Reader.Read(b)
	if err != nil && err != io.EOF {
		err = sourceError(err)
	}
	return n, err
}

// sourceError says what it means that an entry cannot be found or read.
func sourceError(err error) *Error {
	if !errors.Is(err, zip.ErrFormat) && !errors.Is(err, io.EOF) && !errors.Is(err, io.ErrUnexpectedEOF) {
		return unreadable(err)
	}
	e := damaged("the part does not lie where the file's directory says")
	e.Err = err
	return e
}

// rewriteData writes a part that is in memory with patches, in the encoding
// that it had.
func (j *job) rewriteData(entry int, data []byte, order byteOrder, patches []patch) {
	slices.SortStableFunc(patches, func(a, b patch) int { return cmp.Compare(a.at, b.at) })
	j.rewrite[entry] = func(w io.Writer) error {
		if order != nil {
			w = &utf16Writer{dst: w, order: order}
		}
		return applyPatches(w, bytes.NewReader(data), patches)
	}
}
