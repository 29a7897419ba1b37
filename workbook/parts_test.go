package workbook

import (
	"bytes"
	"compress/flate"
	"encoding/binary"
	"hash/crc32"
	"slices"
	"testing"
)

// entry is one entry of a zip file that a test writes byte by byte, so that it
// can also be written as no library would.
type entry struct {
	name, data string
	comment    string
	extra      string // of its directory entry
	localExtra string
	store      bool
	descriptor int       // bytes of its data descriptor: 0 for none, 12 without and 16 with a signature
	zip64      bool      // its sizes stand in a zip64 field
	time       [2]uint16 // time and date, as MS-DOS has them
	lie        func(local, central *zipHeader)
	over       int // the header of the entry so many places before is used again
}

// zipHeader is what a local header and a directory entry have in common
// (APPNOTE.TXT 4.3.7 and 4.3.12).
type zipHeader struct {
	name         string
	flags        uint16
	method       uint16
	sum          uint32
	packed, size uint64
	at           uint64
}

// parts are the entries of a book, in order.
type parts []entry

// with gives the parts with one replaced, or added at the end.
func (p parts) with(name, data string) parts {
	return p.change(name, func(e *entry) { e.data = data })
}

// change gives the parts with one changed, or added at the end.
func (p parts) change(name string, change func(*entry)) parts {
	p = slices.Clone(p)
	for i := range p {
		if p[i].name == name {
			change(&p[i])
			return p
		}
	}
	e := entry{name: name}
	change(&e)
	return append(p, e)
}

func (p parts) without(name string) parts {
	return slices.DeleteFunc(slices.Clone(p), func(e entry) bool { return e.name == name })
}

// packed deflates data. What is written again and again is packed once.
func packed(t testing.TB, data string) []byte {
	t.Helper()
	var out bytes.Buffer
	w, err := flate.NewWriter(&out, flate.DefaultCompression)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := w.Write([]byte(data)); err != nil {
		t.Fatal(err)
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// zip writes the zip file with a comment.
func (p parts) zip(t testing.TB, comment string) []byte {
	t.Helper()
	var out, directory []byte
	headers := make([]zipHeader, len(p))
	for i, e := range p {
		h := zipHeader{name: e.name, method: 8, sum: crc32.ChecksumIEEE([]byte(e.data)), size: uint64(len(e.data)), at: uint64(len(out))}
		var body []byte
		if e.store {
			h.method, body = 0, []byte(e.data)
		} else if e.over == 0 {
			body = packed(t, e.data)
		}
		h.packed = uint64(len(body))
		if e.descriptor > 0 {
			h.flags |= 8
		}
		if e.over > 0 {
			first := headers[i-e.over]
			h.at, h.packed, h.sum, h.size, h.method = first.at, first.packed, first.sum, first.size, first.method
		}
		local, central := h, h
		if e.descriptor > 0 {
			local.sum, local.packed, local.size = 0, 0, 0
		}
		if e.lie != nil {
			e.lie(&local, &central)
		}
		headers[i] = central
		if e.over == 0 {
			out = append(out, "PK\x03\x04"...)
			out = e.fields(out, local, e.localExtra, false)
			out = append(out, local.name...)
			out = append(out, e.localExtra...)
			out = append(out, body...)
			if e.descriptor == 16 {
				out = append(out, "PK\x07\x08"...)
			}
			if e.descriptor > 0 {
				out = binary.LittleEndian.AppendUint32(out, h.sum)
				out = binary.LittleEndian.AppendUint32(out, uint32(h.packed))
				out = binary.LittleEndian.AppendUint32(out, uint32(h.size))
			}
		}
		directory = append(directory, "PK\x01\x02\x14\x00"...)
		extra := e.extra
		if e.zip64 {
			field := binary.LittleEndian.AppendUint64([]byte{1, 0, 24, 0}, central.size)
			field = binary.LittleEndian.AppendUint64(field, central.packed)
			extra += string(binary.LittleEndian.AppendUint64(field, central.at))
		}
		directory = e.fields(directory, central, extra, e.zip64)
		directory = binary.LittleEndian.AppendUint16(directory, uint16(len(e.comment)))
		directory = append(directory, make([]byte, 8)...) // disk and attributes
		at := uint32(central.at)
		if e.zip64 {
			at = 0xFFFFFFFF
		}
		directory = binary.LittleEndian.AppendUint32(directory, at)
		directory = append(directory, central.name+extra+e.comment...)
	}
	at := len(out)
	out = append(out, directory...)
	if slices.ContainsFunc(p, func(e entry) bool { return e.zip64 }) {
		return append(appendEnd64(out, len(p), at), comment...)
	}
	out = append(out, "PK\x05\x06\x00\x00\x00\x00"...)
	out = binary.LittleEndian.AppendUint16(out, uint16(len(p)))
	out = binary.LittleEndian.AppendUint16(out, uint16(len(p)))
	out = binary.LittleEndian.AppendUint32(out, uint32(len(directory)))
	out = binary.LittleEndian.AppendUint32(out, uint32(at))
	out = binary.LittleEndian.AppendUint16(out, uint16(len(comment)))
	return append(out, comment...)
}

// appendEnd64 ends a zip file with a zip64 end record, its locator, and the end
// record that points to them (APPNOTE.TXT 4.3.14 to 4.3.16).
func appendEnd64(out []byte, count, directory int) []byte {
	end := len(out)
	out = append(out, "PK\x06\x06"...)
	out = binary.LittleEndian.AppendUint64(out, 44)
	out = append(out, 45, 0, 45, 0)
	out = append(out, make([]byte, 8)...) // disks
	for _, x := range []int{count, count, end - directory, directory} {
		out = binary.LittleEndian.AppendUint64(out, uint64(x))
	}
	out = append(out, "PK\x06\x07\x00\x00\x00\x00"...)
	out = binary.LittleEndian.AppendUint64(out, uint64(end))
	out = append(out, 1, 0, 0, 0)
	out = append(out, "PK\x05\x06\x00\x00\x00\x00\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF"...)
	return append(out, 0, 0)
}

// fields appends what stands in a header from the version to the lengths of name
// and extra fields.
func (e entry) fields(b []byte, h zipHeader, extra string, zip64 bool) []byte {
	b = binary.LittleEndian.AppendUint16(b, 20)
	b = binary.LittleEndian.AppendUint16(b, h.flags)
	b = binary.LittleEndian.AppendUint16(b, h.method)
	b = binary.LittleEndian.AppendUint16(b, e.time[0])
	b = binary.LittleEndian.AppendUint16(b, e.time[1])
	b = binary.LittleEndian.AppendUint32(b, h.sum)
	if zip64 {
		b = append(b, "\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF"...)
	} else {
		b = binary.LittleEndian.AppendUint32(b, uint32(h.packed))
		b = binary.LittleEndian.AppendUint32(b, uint32(h.size))
	}
	b = binary.LittleEndian.AppendUint16(b, uint16(len(h.name)))
	return binary.LittleEndian.AppendUint16(b, uint16(len(extra)))
}

// The namespaces and the beginnings of parts (ECMA-376 part 1, annex A; part 2).
const (
	xmlHead     = `<?xml version="1.0" encoding="UTF-8" standalone="yes"?>` + "\n"
	mainSpace   = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
	officeSpace = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
	packSpace   = "http://schemas.openxmlformats.org/package/2006/"
	worksheetA  = xmlHead + `<worksheet xmlns="` + mainSpace + `">`
	sstA        = xmlHead + `<sst xmlns="` + mainSpace + `">`
	relsA       = xmlHead + `<Relationships xmlns="` + packSpace + `relationships">`
	workbookA   = xmlHead + `<workbook xmlns="` + mainSpace + `" xmlns:r="` + officeSpace + `">`
	stylesA     = xmlHead + `<styleSheet xmlns="` + mainSpace + `">`
)

// The parts of the small book.
const (
	typesPart    = "[Content_Types].xml"
	rootRels     = "_rels/.rels"
	workbookPart = "xl/workbook.xml"
	workbookRels = "xl/_rels/workbook.xml.rels"
	tripsPart    = "xl/worksheets/sheet1.xml"
	questionPart = "xl/worksheets/sheet2.xml"
	stringsPart  = "xl/sharedStrings.xml"
	stylesPart   = "xl/styles.xml"
)

// tripRows are the rows of the small book's data sheet: minutes of six trips,
// whose mean is 194/6.
const tripRows = `<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="s"><v>1</v></c></row>` +
	`<row r="2"><c r="A2" t="s"><v>2</v></c><c r="B2"><v>31.5</v></c></row><row r="3"><c r="A3" t="s"><v>2</v></c><c r="B3"><v>28</v></c></row>` +
	`<row r="4"><c r="A4" t="s"><v>3</v></c><c r="B4"><v>35.5</v></c></row><row r="5"><c r="A5" t="s"><v>3</v></c><c r="B5"><v>30</v></c></row>` +
	`<row r="6"><c r="A6" t="s"><v>2</v></c><c r="B6"><v>33</v></c></row><row r="7"><c r="A7" t="s"><v>3</v></c><c r="B7"><v>36</v></c></row>`

const tripStrings = `<si><t>depot</t></si><si><t>minutes</t></si><si><t>North</t></si><si><t>Quay</t></si>`

// question is the small book's calculation sheet for a sample.
func question(sample string) string {
	text := func(cell, s string) string {
		return `<c r="` + cell + `" t="inlineStr"><is><t>` + s + `</t></is></c>`
	}
	return worksheetA + `<sheetData><row r="1">` + text("A1", "work out") + text("B1", "sample") + text("C1", "&gt; mean") + text("D1", "&gt; n") + text("E1", "&gt; status") +
		`</row><row r="2">` + text("A2", "mean-interval") + text("B2", sample) + `</row></sheetData></worksheet>`
}

const bookTypes = xmlHead + `<Types xmlns="` + packSpace + `content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>` +
	`<Default Extension="xml" ContentType="application/xml"/>` +
	`<Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/>` +
	`<Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/>` +
	`<Override PartName="/xl/worksheets/sheet2.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/>` +
	`<Override PartName="/xl/sharedStrings.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sharedStrings+xml"/>` +
	`<Override PartName="/xl/styles.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml"/></Types>`

// relation writes a relationship of the office document's own types.
func relation(id, kind, target string) string {
	return `<Relationship Id="` + id + `" Type="` + officeSpace + `/` + kind + `" Target="` + target + `"/>`
}

var bookRels = relation("rId1", "worksheet", "worksheets/sheet1.xml") + relation("rId2", "worksheet", "worksheets/sheet2.xml") +
	relation("rId3", "sharedStrings", "sharedStrings.xml") + relation("rId4", "styles", "styles.xml")

const bookSheets = `<sheets><sheet name="Trips" sheetId="1" r:id="rId1"/><sheet name="Calculations" sheetId="2" r:id="rId2"/></sheets>`

const bookStyles = `<cellXfs count="2"><xf numFmtId="0"/><xf numFmtId="14"/></cellXfs>`

// plainBook is a small book with one calculation: the mean of six trips.
func plainBook() parts {
	return parts{
		{name: typesPart, data: bookTypes},
		{name: rootRels, data: relsA + relation("rId1", "officeDocument", "xl/workbook.xml") + `</Relationships>`},
		{name: workbookPart, data: workbookA + bookSheets + `</workbook>`},
		{name: workbookRels, data: relsA + bookRels + `</Relationships>`},
		{name: tripsPart, data: worksheetA + `<sheetData>` + tripRows + `</sheetData></worksheet>`},
		{name: questionPart, data: question("minutes in Trips")},
		{name: stringsPart, data: sstA + tripStrings + `</sst>`},
		{name: stylesPart, data: stylesA + bookStyles + `</styleSheet>`},
	}
}
