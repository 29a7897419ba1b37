package ooxml

import (
	"archive/zip"
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"io"
	"os"
)

// A written book bears a seal: an extra field at the directory entry of each
// changed part, with a digest of the names, checksums and lengths of all parts.
// Readers pass over extra fields that they do not know. A program that saves the
// book anew drops the seal or breaks it, so that a seal that holds tells that the
// file is still as it was written.

const (
	sealID     = 0x7768 // in the range that no registered field uses; the letters hw
	sealDigest = 8      // bytes of the digest
)

// sealer gathers the digest over the parts in their order.
type sealer struct {
	digest  bytes.Buffer
	headers []*zip.FileHeader // of changed parts
}

func (s *sealer) add(name string, crc uint32, length uint64) {
	s.digest.WriteString(name)
	var fixed [12]byte
	binary.LittleEndian.PutUint32(fixed[:], crc)
	binary.LittleEndian.PutUint64(fixed[4:], length)
	s.digest.Write(fixed[:])
}

// counted passes bytes on and keeps their checksum and number.
type counted struct {
	io.Writer
	crc    uint32
	length uint64
}

func (c *counted) Write(p []byte) (int, error) {
	n, err := c.Writer.Write(p)
	c.crc = crc32.Update(c.crc, crc32.IEEETable, p[:n])
	c.length += uint64(n)
	return n, err
}

// field is the extra field with the digest.
func (s *sealer) field() []byte {
	sum := sha256.Sum256(s.digest.Bytes())
	field := binary.LittleEndian.AppendUint16(nil, sealID)
	field = binary.LittleEndian.AppendUint16(field, sealDigest)
	return append(field, sum[:sealDigest]...)
}

// set puts the seal at the changed parts. It must be called after the parts
// were written and before the directory is.
func (s *sealer) set() {
	field := s.field()
	for _, h := range s.headers {
		h.Extra = append(withoutSeal(h.Extra), field...)
	}
}

// withoutSeal gives extra fields without an older seal.
func withoutSeal(extra []byte) []byte {
	var out []byte
	for len(extra) >= 4 {
		end := 4 + int(binary.LittleEndian.Uint16(extra[2:]))
		if end > len(extra) {
			break
		}
		if binary.LittleEndian.Uint16(extra) != sealID {
			out = append(out, extra[:end]...)
		}
		extra = extra[end:]
	}
	return append(out, extra...)
}

// Sealed reports whether the workbook file is still as Book.SaveAs or
// Book.SaveInPlace wrote it, by its seal; false for a file that bears none.
func Sealed(path string) (bool, error) {
	in, err := zip.OpenReader(path)
	if errors.Is(err, os.ErrNotExist) || errors.Is(err, os.ErrPermission) {
		return false, err
	}
	if err != nil {
		return false, nil // some other program's file
	}
	defer in.Close()
	var s sealer
	for _, f := range in.File {
		s.add(f.Name, f.CRC32, f.UncompressedSize64)
	}
	field := s.field()
	for _, f := range in.File {
		if bytes.Contains(f.Extra, field) {
			return true, nil
		}
	}
	return false, nil
}
