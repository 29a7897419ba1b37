package ooxml

import (
	"bytes"
	"errors"
	"io"
)

const adviceEncrypted = "open it with its password, save it without a password, and use that file"

// compoundMagic starts an OLE compound file ([MS-CFB] 2.2): the shell around an
// encrypted workbook, and the format of workbooks before 2007.
var compoundMagic = []byte{0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1}

// notZip says what a file is that has no zip directory.
func notZip(r io.ReaderAt, size int64, cause error) error {
	var refusal *Error
	if errors.As(cause, &refusal) {
		return refusal
	}
	head := make([]byte, 512)
	n, _ := r.ReadAt(head, 0)
	head = head[:n]
	switch {
	case size == 0:
		return &Error{Kind: ErrNotWorkbook, Reason: "the file is empty", Advice: "name a workbook (.xlsx or .xlsm)"}
	case bytes.HasPrefix(head, compoundMagic):
		// [MS-OFFCRYPTO] 2.3.4.4 names the stream with the encrypted package.
		if holdsUTF16(r, size, "EncryptedPackage") {
			return &Error{Kind: ErrEncrypted, Reason: "the file is encrypted", Advice: adviceEncrypted}
		}
		return &Error{Kind: ErrNotWorkbook, Reason: "the file is in an older binary format", Advice: "open it in a spreadsheet program and save it as .xlsx"}
	case bytes.HasPrefix(head, []byte("PK\x03\x04")):
		e := damaged("the file is cut short: its zip directory is missing or unreadable")
		e.Advice = "copy or download it again; if the original is no better, " + adviceDamaged
		e.Err = cause
		return e
	}
	e := &Error{Kind: ErrNotWorkbook, Reason: "the file is not a zip file, as workbooks are", Advice: "name a workbook (.xlsx or .xlsm)", Err: cause}
	if what := textForm(head); what != "" {
		e.Reason, e.Advice = e.Reason+", but "+what, "open it in a spreadsheet program and save it as .xlsx"
	}
	return e
}

// textForm says what a file is that begins as text does; "" for other files.
// Programs export tables as web pages, XML or separated text and name them as
// workbooks, which spreadsheet programs open all the same.
func textForm(head []byte) string {
	head = bytes.TrimPrefix(head, []byte("\xEF\xBB\xBF"))
	if bytes.HasPrefix(head, []byte{0xFF, 0xFE}) || bytes.HasPrefix(head, []byte{0xFE, 0xFF}) {
		return "text"
	}
	start := bytes.ToLower(trimSpace(head))
	switch {
	case len(start) == 0 || bytes.IndexByte(head, 0) >= 0:
		return ""
	case bytes.HasPrefix(start, []byte("<?xml")) && !bytes.Contains(start, []byte("<html")):
		return "XML"
	case start[0] == '<':
		return "a web page"
	}
	for _, c := range head {
		if c < ' ' && !isXMLSpace(c) {
			return ""
		}
	}
	return "text"
}

// holdsUTF16 looks for an ASCII text written in UTF-16, little endian, as the
// directory of a compound file writes names.
func holdsUTF16(r io.ReaderAt, size int64, text string) bool {
	wanted := make([]byte, 0, 2*len(text))
	for i := 0; i < len(text); i++ {
		wanted = append(wanted, text[i], 0)
	}
	block := make([]byte, 256<<10)
	for at := int64(0); at < size; at += int64(len(block) - len(wanted)) {
		n, err := r.ReadAt(block, at)
		if bytes.Contains(block[:n], wanted) {
			return true
		}
		if err != nil {
			break
		}
	}
	return false
}
