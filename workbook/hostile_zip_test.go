package workbook

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"strings"
	"testing"
	"unicode/utf16"
)

// hostileZips are books whose zip file is made to do harm.
func hostileZips(t *testing.T) []hostile {
	plain := plainBook()
	whole := plain.zip(t, "")
	padded := func(size int) parts {
		return plain.with(tripsPart, worksheetA+strings.Repeat(" ", size)+`<sheetData>`+tripRows+`</sheetData></worksheet>`)
	}
	lied := func(name string, lie func(local, central *zipHeader)) parts {
		return plain.change(name, func(e *entry) { e.lie = lie })
	}
	media := func(e entry) parts { return append(plain[:len(plain):len(plain)], e) }
	overlaps := func(count int) parts {
		list := plain[:len(plain):len(plain)]
		list = append(list, entry{name: "xl/worksheets/x0.xml", data: worksheetA + `<sheetData/>` + strings.Repeat(" ", 15<<20) + `</worksheet>`})
		sheets, relations := bookSheets, bookRels
		for i := range count {
			if i > 0 {
				list = append(list, entry{name: fmt.Sprintf("xl/worksheets/x%d.xml", i), over: i})
			}
			sheets = strings.Replace(sheets, "</sheets>", fmt.Sprintf(`<sheet name="x%d" sheetId="%d" r:id="x%d"/></sheets>`, i, i+9, i), 1)
			relations += relation(fmt.Sprintf("x%d", i), "worksheet", fmt.Sprintf("worksheets/x%d.xml", i))
		}
		return list.with(workbookPart, workbookA+sheets+`</workbook>`).with(workbookRels, relsA+relations+`</Relationships>`)
	}
	names := func(count int, name func(int) string) parts {
		list := plain[:len(plain):len(plain)]
		for i := range count {
			list = append(list, entry{name: name(i), store: true})
		}
		return list
	}
	sharesHeaders := func(count int) []byte {
		list := names(1, func(int) string { return "xl/x" })
		for range count - 1 {
			list = append(list, entry{name: "xl/x", over: 1})
		}
		return list.zip(t, "")
	}
	compound := func(stream string) []byte {
		b := append([]byte("\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1"), make([]byte, 4<<10)...)
		for _, u := range utf16.Encode([]rune(stream)) {
			b = binary.LittleEndian.AppendUint16(b, u)
		}
		return append(b, make([]byte, 20<<20)...)
	}
	return []hostile{
		{name: "as it is", parts: plain},
		{name: "sheet inflated a thousandfold", parts: padded(90 << 20), refused: "to 1"},
		{name: "sheet inflated a thousandfold to less than the ratio counts from", parts: padded(15 << 20)},
		{name: "90 KB of shared strings", parts: plain.with(stringsPart, sstA+strings.Repeat("<si><t>a</t></si>", 90<<20/17)+`</sst>`), refused: "to 1"},
		{name: "millions of empty shared strings", parts: plain.with(stringsPart, sstA+tripStrings+strings.Repeat("<si/>", 15<<20/5)+`</sst>`)},
		{name: "millions of short shared strings", parts: plain.with(stringsPart, sstA+tripStrings+strings.Repeat("<si><t>&#97;</t></si>", 15<<20/21)+`</sst>`)},
		{name: "a bomb in a part that nothing reads", parts: media(entry{name: "xl/media/image1.emf", data: strings.Repeat("\x00", 100<<20)})},
		{name: "a zip file within", parts: media(entry{name: "xl/embeddings/inner.zip", data: string(padded(90<<20).zip(t, "")), store: true})},
		{name: "one sheet's bytes for a thousand sheets", parts: overlaps(1000), refused: "another name where it lies"},
		{name: "huge declared size of a sheet", parts: lied(tripsPart, func(local, central *zipHeader) { local.size, central.size = 0xFFFFFFF0, 0xFFFFFFF0 }), refused: "part " + tripsPart},
		{name: "huge declared size of the shared strings", parts: plain.with(stringsPart, sstA+tripStrings+`</sst>`+strings.Repeat("\n", 1<<10)).change(stringsPart, func(e *entry) {
			e.store = true
			e.lie = func(local, central *zipHeader) { local.size, central.size = 15<<20, 15<<20 }
		}), refused: "part " + stringsPart},
		{name: "sizes of 2^63 in zip64 fields", parts: plain.change(tripsPart, func(e *entry) {
			e.zip64 = true
			e.lie = func(_, central *zipHeader) { central.size = 1 << 63 }
		}), refused: "part " + tripsPart},
		{name: "a packed size longer than the file", parts: lied(tripsPart, func(local, central *zipHeader) { local.packed, central.packed = 1<<31, 1<<31 }), refused: "longer than the file"},
		{name: "an entry that starts beyond the file", parts: lied(tripsPart, func(_, central *zipHeader) { central.at = 1 << 30 }), refused: "part " + tripsPart},
		{name: "quoted entries that overlap", data: quoted(t), refused: "overlaps"},
		{name: "an unread entry that starts beyond the file", parts: lied(typesPart, func(_, central *zipHeader) { central.at = 1 << 30 }), refused: "part " + typesPart},
		{name: "another name in the local header", parts: lied(tripsPart, func(local, _ *zipHeader) { local.name = questionPart }), refused: "part " + tripsPart},
		{name: "another method in the local header", parts: lied(tripsPart, func(local, _ *zipHeader) { local.method = 0 })},
		{name: "another checksum in the local header", parts: lied(tripsPart, func(local, _ *zipHeader) { local.sum = 1 })},
		{name: "a wrong checksum", parts: lied(tripsPart, func(_, central *zipHeader) { central.sum = 1 }), refused: "checksum"},
		{name: "a length too short by one", parts: lied(tripsPart, func(_, central *zipHeader) { central.size-- }), refused: "part " + tripsPart},
		{name: "a length too long by one", parts: lied(tripsPart, func(_, central *zipHeader) { central.size++ }), refused: "part " + tripsPart},
		{name: "a packed length too short by one", parts: lied(tripsPart, func(_, central *zipHeader) { central.packed-- }), refused: "part " + tripsPart},
		{name: "a wrong checksum of a part that nothing reads", parts: media(entry{name: "xl/media/image1.png", data: "dots", lie: func(_, central *zipHeader) { central.sum = 1 }})},
		{name: "an encrypted entry", parts: lied(tripsPart, func(local, central *zipHeader) { local.flags, central.flags = 1, 1 }), refused: "encrypted"},
		{name: "an encrypted workbook", data: compound("EncryptedPackage"), refused: "encrypted"},
		{name: "an older workbook", data: compound("Workbook"), refused: "older binary format"},
		{name: "data descriptors", parts: plain.change(tripsPart, func(e *entry) { e.descriptor = 16 }).change(stringsPart, func(e *entry) { e.descriptor = 12 })},
		{name: "zip64", parts: plain.change(tripsPart, func(e *entry) { e.zip64 = true }).change(stringsPart, func(e *entry) { e.zip64 = true })},
		{name: "a comment after the end", data: plain.zip(t, strings.Repeat("PK\x01\x02", 16_000))},
		{name: "an end record in the comment", data: plain.zip(t, "PK\x05\x06"+strings.Repeat("\x00", 18)), refused: "no workbook"},
		{name: "bytes before the start", data: append(bytes.Repeat([]byte("#!junk\n"), 999), whole...)},
		{name: "bytes after the end", data: append(whole[:len(whole):len(whole)], strings.Repeat("\n", 999)...)},
		{name: "two books one after the other", data: append(plain.with(tripsPart, worksheetA+"</worksheet>").zip(t, ""), whole...)},
		{name: "paths that lead out", parts: append(media(entry{name: "../../x", data: "1"}), entry{name: `..\..\y`}, entry{name: "/etc/passwd"}, entry{name: `C:\z`}, entry{name: "nul"}, entry{name: "a\x00b"}, entry{name: "\xFF\xFE"})},
		{name: "two parts of one name", parts: media(entry{name: tripsPart, data: worksheetA + `</worksheet>`}), refused: "two parts have this name"},
		{name: "two parts of one name but for case", parts: media(entry{name: strings.ToUpper(tripsPart), data: worksheetA + `</worksheet>`}), refused: "two parts have this name"},
		{name: "two parts of one name but for a dot", parts: media(entry{name: "xl/./worksheets/sheet1.xml"}), refused: "two parts have this name"},
		{name: "two parts of one name that nothing reads", parts: append(media(entry{name: "a.bin"}), entry{name: "A.bin"}), refused: "two parts have this name"},
		{name: "entries for folders", parts: append(media(entry{name: "xl/", store: true}), entry{name: "xl/worksheets/", store: true})},
		{name: "a folder of a sheet's name", parts: media(entry{name: tripsPart + "/", data: "1"}), refused: "named as a folder and holds data"},
		{name: "a sheet's part is a folder", parts: plain.change(tripsPart, func(e *entry) { e.name, e.data = e.name+"/", "" }), refused: "no part for this sheet"},
		{name: "too many entries", parts: names(10_001, func(i int) string { return fmt.Sprint("x/", i) }), refused: "the limit is 10000"},
		{name: "entries without names", parts: names(2, func(int) string { return "" }), refused: "two parts have this name"},
		{name: "a million directory entries", data: sharesHeaders(1_000_000), refused: "10000"},
		{name: "an empty file", data: []byte{}, refused: "empty"},
		{name: "an end record alone", data: []byte("PK\x05\x06" + strings.Repeat("\x00", 18)), refused: "no workbook"},
		{name: "an end record that promises 65535 entries", data: []byte("PK\x05\x06\x00\x00\x00\x00\xFF\xFF\xFF\xFF" + strings.Repeat("\x00", 10)), refused: "zip"},
	}
}

// quoted is a zip file in which the bytes of each entry hold the header of the
// next as a stored block, and then all that is in the next, so that one deflated
// kernel serves them all.
func quoted(t *testing.T) []byte {
	sheet := worksheetA + strings.Repeat(" ", 10<<20) + `</worksheet>`
	kernel, size := packed(t, sheet), uint64(len(sheet))
	const count, outer = 100, "xl/q.bin"
	var inner []byte
	var entries parts
	for i := range count {
		body := kernel
		if i > 0 {
			block := binary.LittleEndian.AppendUint16([]byte{0}, uint16(len(inner)))
			block = binary.LittleEndian.AppendUint16(block, ^uint16(len(inner)))
			body = append(append(block, inner...), kernel...)
			size += uint64(len(inner))
		}
		h := zipHeader{name: fmt.Sprintf("xl/worksheets/q%02d.xml", i), method: 8, packed: uint64(len(body)), size: size}
		head := append(entry{}.fields([]byte("PK\x03\x04"), h, "", false), h.name...)
		// The outermost header starts the data of the entry that holds them all.
		depth := uint64(count-1-i) * uint64(len(head)+5)
		entries = append(entries, entry{name: h.name, over: i + 1, lie: func(_, central *zipHeader) {
			central.packed, central.size, central.method = h.packed, h.size, h.method
			central.at += uint64(30+len(outer)) + depth
		}})
		if i == 0 {
			inner = head
		} else {
			block := body[:5]
			inner = append(append(head, block...), inner...)
		}
	}
	p := append(plainBook(), entry{name: outer, data: string(inner) + string(kernel), store: true})
	return append(p, entries...).zip(t, "")
}
