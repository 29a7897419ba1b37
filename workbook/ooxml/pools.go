package ooxml

import (
	"bufio"
	"io"
	"sync"

	"github.com/klauspost/compress/flate"
)

// A small workbook is opened and saved in less time than it takes to make, and
// to clear away, the windows and tables of inflate and deflate and the buffers
// between them. They are lent here from one part to the next. What is written
// is the same with a fresh and with a lent one; a test holds them together.

// inflater reads deflated bytes.
type inflater struct {
	raw *bufio.Reader
	io.ReadCloser
}

var inflaters = sync.Pool{New: func() any {
	raw := bufio.NewReaderSize(nil, 32<<10)
	return &inflater{raw, flate.NewReader(raw)}
}}

func newInflater(raw io.Reader) *inflater {
	f := inflaters.Get().(*inflater)
	f.raw.Reset(raw)
	// Reset of a reader by this package reports no error.
	_ = f.ReadCloser.(flate.Resetter).Reset(f.raw, nil)
	return f
}

// release gives the inflater back. It must not be used any more.
func (f *inflater) release() {
	f.raw.Reset(nil)
	inflaters.Put(f)
}

// deflater writes deflated bytes. Close gives it back.
type deflater struct{ *flate.Writer }

var deflaters = sync.Pool{New: func() any {
	w, err := flate.NewWriter(nil, compression)
	if err != nil {
		panic(err) // the level is a constant of this package
	}
	return w
}}

func newDeflater(w io.Writer) (io.WriteCloser, error) {
	f := deflaters.Get().(*flate.Writer)
	f.Reset(w)
	return &deflater{f}, nil
}

func (d *deflater) Close() error {
	err := d.Writer.Close()
	d.Writer.Reset(nil)
	deflaters.Put(d.Writer)
	d.Writer = nil
	return err
}

// blocks are the buffers of lexers that read large parts.
var blocks = sync.Pool{New: func() any {
	b := make([]byte, blockSize+padding)
	return &b
}}

// copies are buffers to copy entries through.
var copies = sync.Pool{New: func() any {
	b := make([]byte, 32<<10)
	return &b
}}

func copyLent(w io.Writer, r io.Reader) (int64, error) {
	b := copies.Get().(*[]byte)
	defer copies.Put(b)
	return io.CopyBuffer(w, r, *b)
}

// writers are buffers before the parts of a file that is written.
var writers = sync.Pool{New: func() any { return bufio.NewWriterSize(nil, 64<<10) }}
