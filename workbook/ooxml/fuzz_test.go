package ooxml

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"testing"
)

// checkRefusal fails unless an error is one of this package, with a reason.
func checkRefusal(t *testing.T, err error) {
	t.Helper()
	var e *Error
	if err != nil && (!errors.As(err, &e) || e.Kind == nil || e.Reason == "") {
		t.Fatalf("an error without a kind or a reason: %#v", err)
	}
}

// FuzzScan holds the fast paths against the general path, at several block
// sizes, and splices into every sheet that is accepted.
func FuzzScan(f *testing.F) {
	for _, s := range []string{
		`<row r="1" spans="1:3" ht="15"><c r="A1" t="s"><v>0</v></c><c r="B1" s="2"><v>12.5</v></c><c r="C1" t="str"><f>A1&amp;"x"</f><v>x</v></c></row>`,
		`<row r="2" hidden="1"><c r="A2" t="inlineStr"><is><t xml:space="preserve"> a </t></is></c><c r="B2" t="b"><v>1</v></c><c r="D2" t="e"><v>#N/A</v></c></row>`,
		`<row><c><v>1</v></c><c t="d"><v>2024-03-05</v></c></row>`,
		`<row r="3"><c r="A3"><f t="shared" ref="A3:A4" si="0">B3</f><v>1</v></c><c r="B3"><f t="array" ref="B3:B4">1</f><v>2</v></c></row><row r="4"><c r="A4"><f t="shared" si="0"/><v>1e5</v></c></row>`,
		`<row r="5"><c r="B5"><v>1</v></c><c r="A5" s="1"/></row><row r="1"/>`,
		"<!-- a --><row r='9'\n><c r='I9' ><v>&#49;<![CDATA[2]]></v ></c></row>",
		`<x:row xmlns:x="urn:x" r="1"><c/></x:row>`,
	} {
		f.Add([]byte(rows(s)))
		f.Add([]byte(prefixed(rows(s), "x")))
	}
	f.Add([]byte(worksheet(`<dimension ref="A1:B2"/><cols><col min="1" max="3" style="2"/></cols><sheetData/><autoFilter ref="A1:B2"/><mergeCells><mergeCell ref="A1:B2"/></mergeCells>`)))
	f.Add(toUTF16(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`), binary.LittleEndian))
	table, err := newStringTable([]byte(stringsXML), Limits{}.WithDefaults())
	if err != nil {
		f.Fatal(err)
	}
	edits := []Edit{cellEdit("A1", NumberValue(1.5)), cellEdit("B3", TextValue(" x")), cellEdit("C1", EmptyValue()), cellEdit("D9", BoolValue(true))}
	f.Fuzz(func(t *testing.T, data []byte) {
		// What is wrong with the encoding shows sooner or later, as the blocks fall.
		if _, _, err := xmlBytes(data); err != nil {
			checkRefusal(t, err)
			_, err := Splice(io.Discard, bytes.NewReader(data), edits, testText)
			checkRefusal(t, err)
			return
		}
		few := new(Columns)
		few.Add(2)
		classify := func(text []byte) uint8 { return uint8(len(text)) }
		for _, options := range []ScanOptions{{}, {Columns: few, Classify: classify}} {
			want, facts, err := scanWith(data, 1000, false, options, table)
			checkRefusal(t, err)
			for _, way := range []struct {
				size    int
				careful bool
			}{{1000, true}, {5, false}, {64, true}} {
				got, facts2, err2 := scanWith(data, way.size, way.careful, options, table)
				if fmt.Sprint(err) != fmt.Sprint(err2) {
					t.Fatalf("%+v: error\n%v\nelse\n%v", way, err2, err)
				}
				if err == nil && (got != want || fmt.Sprint(facts) != fmt.Sprint(facts2)) {
					t.Fatalf("%+v:\n%s\n%+v\nelse\n%s\n%+v", way, got, facts2, want, facts)
				}
			}
		}
		_, _, scanErr := scanWith(data, 1000, false, ScanOptions{}, table)
		var out, again bytes.Buffer
		_, err := Splice(&out, bytes.NewReader(data), edits, testText)
		checkRefusal(t, err)
		if scanErr != nil || err != nil {
			return
		}
		changed, err := Splice(&again, bytes.NewReader(out.Bytes()), edits, testText)
		if err != nil || changed != 0 || !bytes.Equal(out.Bytes(), again.Bytes()) {
			t.Fatalf("the same edits again: %d cells, %v\n%s\n%s", changed, err, out.Bytes(), again.Bytes())
		}
		if _, _, err := scanWith(out.Bytes(), 1000, false, ScanOptions{}, table); err != nil {
			t.Fatalf("the result is refused: %v\n%s\n%s", err, data, out.Bytes())
		}
		var same bytes.Buffer
		if changed, err := Splice(&same, bytes.NewReader(data), nil, nil); err != nil || changed != 0 || !bytes.Equal(same.Bytes(), data) {
			t.Fatalf("no edits change %d cells (%v)", changed, err)
		}
	})
}

// useBook reads all of a book that opened, writes it with changes, and reads the
// result.
func useBook(t *testing.T, b *Book) {
	t.Helper()
	whole := true
	for i := range b.Sheets() {
		_, err := b.Scan(i, ScanOptions{}, func(r *Row) error {
			for k := range r.Cells {
				b.Format(int(r.Cells[k].Style))
				if _, err := b.CellText(&r.Cells[k]); err != nil {
					return err
				}
			}
			return nil
		})
		checkRefusal(t, err)
		whole = whole && err == nil
	}
	var out bytes.Buffer
	saved, err := b.Write(&out, Changes{Edits: map[int][]Edit{0: {cellEdit("B2", NumberValue(2)), cellEdit("A9", TextValue("x"))}}, Sheets: []NewSheet{{Name: "New \u2603 sheet", Rows: [][]Value{{NumberValue(1)}}}}, Recalculate: true})
	checkRefusal(t, err)
	if err != nil {
		return
	}
	after, err := openBytes(out.Bytes(), Limits{})
	if err != nil {
		t.Fatalf("what was written (%+v) does not open: %v", saved, err)
	}
	if len(after.Sheets()) != len(b.Sheets())+1 || !after.Calculation().OnLoad {
		t.Fatalf("the sheet or the setting is missing: %v %v", after.Sheets(), after.Calculation())
	}
	if changes, err := after.Changes(0, []Edit{cellEdit("B2", NumberValue(2)), cellEdit("A9", TextValue("x"))}); err != nil || len(changes) != 0 {
		t.Fatalf("the cells are not as written: %v %v", changes, err)
	}
	if _, err := after.Scan(len(b.Sheets()), ScanOptions{}, nil); err != nil {
		t.Fatalf("the new sheet does not read: %v", err)
	}
}

// FuzzOpen opens zip files of any bytes.
func FuzzOpen(f *testing.F) {
	small := smallBook(rows(`<row r="1"><c r="A1" t="s"><v>0</v></c></row>`))
	f.Add(small.bytes(f))
	f.Add(small.change("xl/workbook.xml", func(f *file) { f.descriptor = true }).bytes(f))
	f.Add(book{{name: "a", data: "a", store: true}}.bytes(f))
	f.Add(compoundFile("EncryptedPackage")[:600])
	f.Fuzz(func(t *testing.T, data []byte) {
		b, err := OpenReaderAt("x", bytes.NewReader(data), int64(len(data)), Limits{PartBytes: 1 << 20})
		checkRefusal(t, err)
		if err == nil {
			useBook(t, b)
		}
	})
}

// FuzzParts opens books of any parts, whose zip file is sound.
func FuzzParts(f *testing.F) {
	styles := xmlHead + `<styleSheet xmlns="` + mainTransitional + `"><numFmts><numFmt numFmtId="164" formatCode="[h]:mm"/></numFmts><cellXfs><xf numFmtId="0"/><xf numFmtId="164"/></cellXfs></styleSheet>`
	relations := relationsXML("worksheet", "worksheets/sheet1.xml", "sharedStrings", "sharedStrings.xml", "styles", "styles.xml")
	workbook := xmlHead + `<workbook xmlns="` + mainTransitional + `" xmlns:r="` + relTransitional + `"><sheets><sheet name="Trips" sheetId="1" r:id="rId1"/></sheets><definedNames><definedName name="a" localSheetId="0">1</definedName></definedNames><calcPr calcMode="manual"/></workbook>`
	f.Add(workbook, relations, rows(`<row r="1"><c r="A1" t="s" s="1"><v>0</v></c></row>`), stringsXML, styles, tableXML, contentTypes)
	f.Add(prefixed(workbookXML, "x"), prefixed(relations, "p"), worksheet(`<sheetData/>`), prefixed(stringsXML, "s"), styles, tableXML, prefixed(contentTypes, "t"))
	f.Fuzz(func(t *testing.T, workbook, relations, sheet, texts, styles, table, types string) {
		small := book{{name: "[Content_Types].xml", data: types}, {name: "_rels/.rels", data: packageRels}, {name: "xl/workbook.xml", data: workbook}, {name: "xl/_rels/workbook.xml.rels", data: relations},
			{name: "xl/worksheets/sheet1.xml", data: sheet}, {name: "xl/sharedStrings.xml", data: texts}, {name: "xl/styles.xml", data: styles},
			{name: "xl/worksheets/_rels/sheet1.xml.rels", data: relationsXML("table", "../tables/table1.xml")}, {name: "xl/tables/table1.xml", data: table}}
		for i := range small {
			small[i].store = true // to compress them would take most of the time
		}
		b, err := openBytes(small.bytes(t), Limits{})
		checkRefusal(t, err)
		if err == nil {
			useBook(t, b)
		}
	})
}

// FuzzFormat reads number format codes of any text.
func FuzzFormat(f *testing.F) {
	for _, code := range []string{"General", `[$-409]h:mm AM/PM;@`, `_-* #,##0.00\ "€"_-`, "[hh]:mm", `"`, `\`, "[", "a/p", "am/p"} {
		f.Add(code)
	}
	f.Fuzz(func(t *testing.T, code string) {
		if got := classifyFormat(code); got > FormatText {
			t.Errorf("%q has the format %v", code, got)
		}
	})
}
