package ooxml

import (
	"archive/zip"
	"bytes"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/klauspost/compress/flate"
)

const xmlHead = `<?xml version="1.0" encoding="UTF-8" standalone="yes"?>` + "\n"

const contentTypes = xmlHead + `<Types xmlns="` + packageTypes + `"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/xml"/><Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/><Override PartName="/xl/sharedStrings.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sharedStrings+xml"/></Types>`

const packageRels = xmlHead + `<Relationships xmlns="` + packageRelations + `"><Relationship Id="rId1" Type="` + relTransitional + `/officeDocument" Target="xl/workbook.xml"/></Relationships>`

const workbookXML = xmlHead + `<workbook xmlns="` + mainTransitional + `" xmlns:r="` + relTransitional + `"><sheets><sheet name="Trips" sheetId="1" r:id="rId1"/></sheets></workbook>`

const workbookRels = xmlHead + `<Relationships xmlns="` + packageRelations + `"><Relationship Id="rId1" Type="` + relTransitional + `/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="rId2" Type="` + relTransitional + `/sharedStrings" Target="sharedStrings.xml"/></Relationships>`

const stringsXML = xmlHead + `<sst xmlns="` + mainTransitional + `" count="9" uniqueCount="4"><si><t>North</t></si><si><t>Quay &amp; Mill</t></si><si><t></t></si><si><t xml:space="preserve"> Fell </t></si></sst>`

// worksheet wraps rows, or whatever stands in a worksheet, as the root does.
func worksheet(content string) string {
	return xmlHead + `<worksheet xmlns="` + mainTransitional + `">` + content + `</worksheet>`
}

func rows(content string) string { return worksheet("<sheetData>" + content + "</sheetData>") }

// file is one entry of a test book.
type file struct {
	name, data string
	store      bool
	descriptor bool // its sizes follow it in a data descriptor
	sum        *uint32
	size       *uint64
	flags      uint16
	method     uint16
}

// book is the list of entries of a test book, in order.
type book []file

func smallBook(sheet string) book {
	return book{
		{name: "[Content_Types].xml", data: contentTypes},
		{name: "_rels/.rels", data: packageRels},
		{name: "xl/workbook.xml", data: workbookXML},
		{name: "xl/_rels/workbook.xml.rels", data: workbookRels},
		{name: "xl/worksheets/sheet1.xml", data: sheet},
		{name: "xl/sharedStrings.xml", data: stringsXML},
	}
}

// with gives the book with an entry replaced or added.
func (b book) with(name, data string) book {
	b = slices.Clone(b)
	for i := range b {
		if b[i].name == name {
			b[i].data = data
			return b
		}
	}
	return append(b, file{name: name, data: data})
}

func (b book) without(name string) book {
	return slices.DeleteFunc(slices.Clone(b), func(f file) bool { return f.name == name })
}

// change gives the book with an entry's other fields changed.
func (b book) change(name string, change func(f *file)) book {
	b = slices.Clone(b)
	for i := range b {
		if b[i].name == name {
			change(&b[i])
		}
	}
	return b
}

// bytes writes the zip file. Sizes and checksums may be told wrongly.
func (b book) bytes(t testing.TB) []byte {
	t.Helper()
	var out bytes.Buffer
	z := zip.NewWriter(&out)
	for _, f := range b {
		header := &zip.FileHeader{Name: f.name, Method: zip.Deflate, Flags: f.flags, Modified: time.Date(2024, 3, 5, 8, 15, 0, 0, time.UTC),
			CRC32: crc32.ChecksumIEEE([]byte(f.data)), UncompressedSize64: uint64(len(f.data))}
		raw := []byte(f.data)
		if f.store {
			header.Method = zip.Store
		} else {
			var packed bytes.Buffer
			w, err := flate.NewWriter(&packed, 6)
			if err != nil {
				t.Fatal(err)
			}
			if _, err := w.Write(raw); err != nil {
				t.Fatal(err)
			}
			if err := w.Close(); err != nil {
				t.Fatal(err)
			}
			raw = packed.Bytes()
		}
		header.CompressedSize64 = uint64(len(raw))
		if f.descriptor {
			header.Flags |= 8
		}
		if f.sum != nil {
			header.CRC32 = *f.sum
		}
		if f.size != nil {
			header.UncompressedSize64 = *f.size
		}
		if f.method != 0 {
			header.Method = f.method
		}
		w, err := z.CreateRaw(header)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write(raw); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

func openBytes(data []byte, limits Limits) (*Book, error) {
	return OpenReaderAt("Trips.xlsx", bytes.NewReader(data), int64(len(data)), limits)
}

func (b book) open(t testing.TB) *Book {
	t.Helper()
	opened, err := openBytes(b.bytes(t), Limits{})
	if err != nil {
		t.Fatal(err)
	}
	return opened
}

// part gives the bytes of one part.
func part(t testing.TB, b *Book, name string) string {
	t.Helper()
	entry := b.find(name)
	if entry < 0 {
		t.Fatalf("no part %s", name)
	}
	data, err := b.load(entry)
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

// render writes rows as text, to compare them: "2 hidden: A=1.5 B='North'".
func render(texts func(c *Cell) (string, error), r *Row) string {
	var s strings.Builder
	fmt.Fprint(&s, r.Number)
	if r.Hidden {
		s.WriteString(" hidden")
	}
	if !r.Filled {
		s.WriteString(" blank")
	}
	if r.Class != 0 {
		fmt.Fprintf(&s, " class %d", r.Class)
	}
	s.WriteString(":")
	for i := range r.Cells {
		c := &r.Cells[i]
		fmt.Fprintf(&s, " %s", ColumnName(int(c.Col)))
		if c.Style != 0 {
			fmt.Fprintf(&s, "/%d", c.Style)
		}
		if c.Formula {
			s.WriteString("=f")
		}
		s.WriteString("=")
		if !c.Saved {
			s.WriteString("unsaved")
			continue
		}
		text, err := texts(c)
		if err != nil {
			fmt.Fprintf(&s, "[%v]", err)
			continue
		}
		switch c.Type {
		case TypeNumber:
			s.WriteString(strconv.FormatFloat(c.Number, 'g', -1, 64))
		case TypeShared:
			fmt.Fprintf(&s, "%d'%s'", c.Index, text)
		case TypeInline, TypeString:
			fmt.Fprintf(&s, "'%s'", text)
		case TypeBool:
			fmt.Fprintf(&s, "bool %g", c.Number)
		case TypeError:
			fmt.Fprintf(&s, "error %s", text)
		case TypeDate:
			fmt.Fprintf(&s, "date %s", strconv.FormatFloat(c.Number, 'g', -1, 64))
		case TypeTime:
			fmt.Fprintf(&s, "time %s", strconv.FormatFloat(c.Number, 'g', -1, 64))
		}
	}
	return s.String()
}

// scanWith scans a sheet's XML with blocks of a size, with the fast paths or
// without, and gives its rows, its facts and its error as text.
func scanWith(data []byte, size int, careful bool, options ScanOptions, table *stringTable) (string, SheetFacts, error) {
	r, _, err := xmlReader(bytes.NewReader(data))
	if err != nil {
		return "", SheetFacts{}, err
	}
	var lines []string
	texts := func(c *Cell) (string, error) {
		if c.Type == TypeShared {
			return table.string(int(c.Index)), nil
		}
		return string(c.Text), nil
	}
	s := newScanner(newLexer(r, size, Limits{}.WithDefaults()), options, func(r *Row) error {
		lines = append(lines, render(texts, r))
		return nil
	})
	s.careful = careful
	s.styles = 5
	s.table = func() (*stringTable, error) { return table, nil }
	err = s.run()
	return strings.Join(lines, "\n"), s.facts, err
}

func testStrings(t testing.TB) *stringTable {
	t.Helper()
	table, err := newStringTable([]byte(stringsXML), Limits{}.WithDefaults())
	if err != nil {
		t.Fatal(err)
	}
	return table
}

// scanAlike scans in several ways and fails if they differ.
func scanAlike(t testing.TB, data []byte, options ScanOptions) (string, SheetFacts, error) {
	t.Helper()
	table := testStrings(t)
	text, facts, err := scanWith(data, blockSize, false, options, table)
	for _, size := range []int{1, 7, 100, blockSize} {
		for _, careful := range []bool{false, true} {
			text2, facts2, err2 := scanWith(data, size, careful, options, table)
			if fmt.Sprint(err) != fmt.Sprint(err2) {
				t.Fatalf("block size %d, careful %v: error\n%v\nelse\n%v", size, careful, err2, err)
			}
			if err == nil && (text != text2 || fmt.Sprint(facts) != fmt.Sprint(facts2)) {
				t.Fatalf("block size %d, careful %v:\n%s\n%+v\nelse\n%s\n%+v", size, careful, text2, facts2, text, facts)
			}
		}
	}
	return text, facts, err
}

// wantError checks an error's kind and text.
func wantError(t testing.TB, err error, kind error, want string) {
	t.Helper()
	if err == nil {
		t.Fatalf("no error, want %q", want)
	}
	if !errors.Is(err, kind) {
		t.Errorf("error %v is not of the kind %v", err, kind)
	}
	got := strings.TrimSuffix(err.Error(), "; "+adviceDamaged)
	if got != want {
		t.Errorf("error\n%s\nwant\n%s", got, want)
	}
}

func readAll(t testing.TB, r io.Reader) []byte {
	t.Helper()
	data, err := io.ReadAll(r)
	if err != nil {
		t.Fatal(err)
	}
	return data
}
