package ooxml

import (
	"archive/zip"
	"errors"
	"fmt"
	"hash"
	"hash/crc32"
	"io"
	"net/url"
	"path"
	"strings"
	"sync"

	"github.com/klauspost/compress/flate"
)

// container is the zip file that holds the parts.
type container struct {
	zip    *zip.Reader
	size   int64
	limits Limits
	index  map[string]int // entry by partKey

	mu    sync.Mutex
	read  map[int]bool // entries that count in total
	total int64        // inflated bytes of the entries read so far
}

// partKey makes names comparable: parts are the same whose names differ in
// ASCII case only (ECMA-376 part 2, 6.2.2.3). Backslashes and names with . or ..
// come from careless writers; no name is ever used as a path.
func partKey(name string) string {
	name = path.Clean("/" + slashes(name))
	return strings.Map(func(c rune) rune {
		if 'A' <= c && c <= 'Z' {
			return c + 'a' - 'A'
		}
		return c
	}, name[1:])
}

// openContainer reads the directory of the zip file, and holds it against what
// stands before the entries themselves.
func openContainer(r io.ReaderAt, size int64, limits Limits) (*container, error) {
	watch := newWatch(r, limits)
	zr, err := zip.NewReader(watch, size)
	if err != nil && !errors.Is(err, zip.ErrInsecurePath) {
		return nil, notZip(r, size, err)
	}
	c := &container{zip: zr, size: size, limits: limits, index: make(map[string]int), read: make(map[int]bool)}
	if len(zr.File) > limits.Entries {
		return nil, beyond(fmt.Sprintf("the file holds %d parts, the limit is %d", len(zr.File), limits.Entries), "Entries")
	}
	if err := watch.check(zr.File, size); err != nil {
		return nil, err
	}
	for i, f := range zr.File {
		if strings.HasSuffix(f.Name, "/") {
			if f.UncompressedSize64 > 0 {
				e := damaged("the entry is named as a folder and holds data")
				e.Part = f.Name
				return nil, e
			}
			continue
		}
		key := partKey(f.Name)
		if first, ok := c.index[key]; ok {
			e := damaged(fmt.Sprintf("two parts have this name, %s and %s", zr.File[first].Name, f.Name))
			e.Part = f.Name
			return nil, e
		}
		c.index[key] = i
	}
	return c, nil
}

// find gives the entry of a part, or -1. A name taken from a relationship may
// be percent-encoded where the entry's name is not.
func (c *container) find(name string) int {
	if i, ok := c.index[partKey(name)]; ok {
		return i
	}
	if plain, err := url.PathUnescape(name); err == nil {
		if i, ok := c.index[partKey(plain)]; ok {
			return i
		}
	}
	return -1
}

func (c *container) name(entry int) string { return c.zip.File[entry].Name }

// open starts to read an entry. The reader's last Read reports a wrong length or
// checksum instead of the end.
func (c *container) open(entry int) (io.Reader, error) {
	f := c.zip.File[entry]
	fail := func(e *Error) (io.Reader, error) {
		e.Part = f.Name
		return nil, e
	}
	if f.Flags&1 != 0 {
		return fail(&Error{Kind: ErrEncrypted, Reason: "the part is encrypted", Advice: adviceEncrypted})
	}
	size := int64(f.UncompressedSize64)
	switch {
	case size < 0 || size > c.limits.PartBytes:
		return fail(beyond(fmt.Sprintf("the part inflates to %d bytes, the limit is %d", f.UncompressedSize64, c.limits.PartBytes), "PartBytes"))
	case size > c.limits.RatioFrom && size/c.limits.Ratio > int64(f.CompressedSize64):
		return fail(beyond(fmt.Sprintf("the part inflates from %d to %d bytes, more than %d to 1", f.CompressedSize64, size, c.limits.Ratio), "Ratio"))
	}
	if err := c.count(entry, size); err != nil {
		return fail(err)
	}
	raw, err := f.OpenRaw()
	if err != nil {
		return fail(sourceError(err))
	}
	p := &partReader{size: size, sum: f.CRC32, hash: crc32.NewIEEE()}
	switch f.Method {
	case zip.Store:
		p.src = raw
	case zip.Deflate:
		p.src = newInflater(raw)
	default:
		return fail(damaged(fmt.Sprintf("the part is compressed by method %d; only stored and deflated parts can be read", f.Method)))
	}
	return p, nil
}

func (c *container) count(entry int, size int64) *Error {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.read[entry] {
		return nil
	}
	total := c.total + size
	switch {
	case total > c.limits.TotalBytes:
		return beyond(fmt.Sprintf("the parts read inflate to more than %d bytes", c.limits.TotalBytes), "TotalBytes")
	case total > c.limits.RatioFrom && total/c.limits.Ratio > c.size:
		return beyond(fmt.Sprintf("the parts read inflate from %d to %d bytes, more than %d to 1", c.size, total, c.limits.Ratio), "Ratio")
	}
	c.read[entry] = true
	c.total += size
	return nil
}

// load reads a whole entry.
func (c *container) load(entry int) ([]byte, error) {
	r, err := c.open(entry)
	if err != nil {
		return nil, err
	}
	f := c.zip.File[entry]
	if int64(f.UncompressedSize64) > c.limits.HeldBytes {
		e := beyond(fmt.Sprintf("the part inflates to %d bytes, the limit for parts kept in memory is %d", f.UncompressedSize64, c.limits.HeldBytes), "HeldBytes")
		e.Part = f.Name
		return nil, e
	}
	// Memory grows with what is there, not with what the directory promises.
	size := int(f.UncompressedSize64)
	data := make([]byte, 0, min(size, loadStep)+padding)
	for err == nil {
		if len(data) == cap(data)-padding && len(data) < size {
			larger := make([]byte, len(data), min(size, 2*len(data))+padding)
			copy(larger, data)
			data = larger
		}
		// At the end one more read fetches the verdict on length and checksum.
		var n int
		n, err = r.Read(data[len(data):max(len(data)+1, cap(data)-padding)])
		data = data[:len(data)+n]
	}
	if err == io.EOF {
		return data, nil
	}
	return nil, place(err, "", f.Name, "")
}

// loadStep is how much memory a part gets before its first byte is read.
const loadStep = 16 << 20

// partReader inflates one part and holds it against its length and checksum. It
// gives what was read up to where it finds fault, however the reads fall, so that
// the fault is told at the same place each time.
type partReader struct {
	src  io.Reader
	hash hash.Hash32
	sum  uint32
	size int64
	n    int64
	err  error
}

func (p *partReader) Read(b []byte) (int, error) {
	if p.err != nil {
		return 0, p.err
	}
	n, err := p.src.Read(b)
	p.hash.Write(b[:n])
	p.n += int64(n)
	switch {
	case p.n > p.size:
		n -= int(min(p.n-p.size, int64(n)))
		err = damaged(fmt.Sprintf("the part is longer than the %d bytes that the file's directory gives", p.size))
	case err == nil:
	case err == io.EOF || errors.Is(err, io.ErrUnexpectedEOF):
		if p.n != p.size || err != io.EOF {
			err = damaged(fmt.Sprintf("the part is cut short: %d of %d bytes", p.n, p.size))
		} else if p.hash.Sum32() != p.sum {
			err = damaged("the part's checksum is wrong: some of its bytes changed after it was saved")
		}
	default:
		cause := err
		var corrupt flate.CorruptInputError
		var internal flate.InternalError
		if errors.As(err, &corrupt) || errors.As(err, &internal) {
			e := damaged(fmt.Sprintf("the part cannot be inflated after %d of %d bytes", p.n, p.size))
			e.Err = cause
			err = e
		} else {
			err = unreadable(cause)
		}
		n = 0
	}
	if p.err = err; err != nil {
		if f, ok := p.src.(*inflater); ok {
			p.src = nil
			f.release()
		}
	}
	return n, err
}

func unreadable(cause error) *Error {
	return &Error{Kind: ErrUnreadable, Reason: "the part cannot be read: " + plainCause(cause), Advice: "check the disk or the connection, then try again", Err: cause}
}
