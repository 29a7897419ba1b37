package ooxml

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf16"
)

const tableXML = xmlHead + `<table xmlns="` + mainTransitional + `" id="1" name="x" displayName="trips" ref="A1:B5" totalsRowCount="1"><autoFilter ref="A1:B4"/><tableColumns count="2"><tableColumn id="1" name="depot"/><tableColumn id="2" name="minutes_x000a_per trip"/></tableColumns></table>`

func relationsXML(items ...string) string {
	var s strings.Builder
	s.WriteString(xmlHead + `<Relationships xmlns="` + packageRelations + `">`)
	for i := 0; i < len(items); i += 2 {
		kind := items[i]
		if !strings.Contains(kind, "/") {
			kind = relTransitional + "/" + kind
		}
		fmt.Fprintf(&s, `<Relationship Id="rId%d" Type="%s" Target="%s"/>`, i/2+1, kind, items[i+1])
	}
	s.WriteString(`</Relationships>`)
	return s.String()
}

func TestOpenReadsTheWorkbook(t *testing.T) {
	workbook := xmlHead + `<workbook xmlns="` + mainTransitional + `" xmlns:rel="` + relTransitional + `"><workbookPr date1904="1"/><workbookProtection lockStructure="1"/>` +
		`<sheets><sheet name="Trips &amp; more" sheetId="7" rel:id="rId1"/><sheet name="Chart" sheetId="2" rel:id="rId2"/><sheet name="Old" sheetId="3" state="hidden" rel:id="rId3"/><sheet name="Macros" sheetId="4" state="veryHidden" rel:id="rId4"/></sheets>` +
		`<definedNames><definedName name="minutes">'Trips &amp; more'!$B$2:$B$5</definedName><definedName name="_xlnm.Print_Area" localSheetId="2" hidden="1">Old!$A$1</definedName></definedNames>` +
		`<calcPr calcMode="manual" fullCalcOnLoad="true"/></workbook>`
	b := smallBook(rows("")).
		with("xl/workbook.xml", workbook).
		with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml", "chartsheet", "/xl/chartsheets/sheet1.xml", "worksheet", `worksheets\sheet9.xml`,
			"http://schemas.microsoft.com/office/2006/relationships/xlMacrosheet", "macrosheets/sheet1.xml", "sharedStrings", "sharedStrings.xml", "calcChain", "calcChain.xml")).
		with("xl/chartsheets/sheet1.xml", "<chartsheet/>").
		with("xl/worksheets/sheet9.xml", rows(`<row r="1"><c r="A1"><v>9</v></c></row>`)).
		with("xl/macrosheets/sheet1.xml", "<macrosheet/>").
		with("xl/calcChain.xml", "<calcChain/>").
		with("xl/tables/table1.xml", tableXML).
		with("xl/worksheets/_rels/sheet1.xml.rels", relationsXML("table", "../tables/table1.xml", "hyperlink", "https://example.invalid/")).
		open(t)
	want := []Sheet{{"Trips & more", Visible, Worksheet, "xl/worksheets/sheet1.xml"}, {"Chart", Visible, ChartSheet, "xl/chartsheets/sheet1.xml"},
		{"Old", Hidden, Worksheet, "xl/worksheets/sheet9.xml"}, {"Macros", VeryHidden, MacroSheet, "xl/macrosheets/sheet1.xml"}}
	if fmt.Sprint(b.Sheets()) != fmt.Sprint(want) {
		t.Errorf("sheets %v, want %v", b.Sheets(), want)
	}
	if i := b.SheetIndex("OLD"); i != 2 {
		t.Errorf("sheet OLD has index %d, want 2", i)
	}
	if i := b.SheetIndex("Older"); i != -1 {
		t.Errorf("sheet Older has index %d, want -1", i)
	}
	names := []DefinedName{{"minutes", -1, "'Trips & more'!$B$2:$B$5", false}, {"_xlnm.Print_Area", 2, "Old!$A$1", true}}
	if fmt.Sprint(b.DefinedNames()) != fmt.Sprint(names) {
		t.Errorf("names %v, want %v", b.DefinedNames(), names)
	}
	tables := []Table{{Name: "trips", Sheet: 0, Range: Range{1, 1, 5, 2}, HeaderRows: 1, TotalsRows: 1, Columns: []string{"depot", "minutes\nper trip"}}}
	if fmt.Sprint(b.Tables()) != fmt.Sprint(tables) {
		t.Errorf("tables %v, want %v", b.Tables(), tables)
	}
	if !b.Date1904() || !b.StructureLocked() || !b.HasCalculationChain() || b.Signed() || b.Calculation() != (Calculation{Manual: true, OnLoad: true}) || b.Name() != "Trips.xlsx" {
		t.Errorf("settings are not as in the file: %v %v %v %v %v %q", b.Date1904(), b.StructureLocked(), b.HasCalculationChain(), b.Signed(), b.Calculation(), b.Name())
	}
	_, err := b.Scan(1, ScanOptions{}, nil)
	wantError(t, err, ErrEdit, "Trips.xlsx: part xl/chartsheets/sheet1.xml: sheet Chart: the sheet is a chart, dialog or macro sheet, without a table of cells; name a worksheet")
	_, err = b.Scan(4, ScanOptions{}, nil)
	wantError(t, err, ErrEdit, "Trips.xlsx: there is no sheet number 5; the book has 4")
}

// scanFirst scans the first sheet of a book that opens.
func scanFirst(t *testing.T, b *Book) string {
	t.Helper()
	var lines []string
	_, err := b.Scan(0, ScanOptions{}, func(r *Row) error {
		lines = append(lines, render(b.CellText, r))
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return strings.Join(lines, "\n")
}

func TestOpenAcceptsEveryPackage(t *testing.T) {
	sheet := rows(`<row r="1"><c r="A1"><v>1</v></c><c r="B1" t="s"><v>1</v></c></row>`)
	small := smallBook(sheet)
	strict := strings.NewReplacer(mainTransitional, mainStrict, relTransitional, relStrict)
	renamed := func(names ...string) book {
		list := smallBook(sheet)
		for i := range list {
			list[i].name = strings.NewReplacer(names...).Replace(list[i].name)
		}
		return list
	}
	for name, b := range map[string]book{
		"as programs write it": small,
		"strict": small.with("_rels/.rels", strict.Replace(packageRels)).with("xl/workbook.xml", strict.Replace(workbookXML)).
			with("xl/_rels/workbook.xml.rels", strict.Replace(workbookRels)).with("xl/worksheets/sheet1.xml", strict.Replace(sheet)).with("xl/sharedStrings.xml", strict.Replace(stringsXML)),
		"prefixes":          small.with("xl/workbook.xml", strings.ReplaceAll(prefixed(workbookXML, "x"), "<x:?", "<?")).with("xl/sharedStrings.xml", prefixed(stringsXML, "ss")),
		"absolute targets":  small.with("_rels/.rels", relationsXML("officeDocument", "/xl/workbook.xml")).with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "/xl/worksheets/sheet1.xml", "sharedStrings", "/xl/sharedStrings.xml")),
		"odd targets":       small.with("_rels/.rels", relationsXML("officeDocument", "./xl/./workbook.xml")).with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", `../xl\worksheets/sheet1.xml#x`, "sharedStrings", "../../xl/sharedStrings.xml")),
		"backslash names":   renamed("/", `\`),
		"names in capitals": renamed("xl/worksheets", "XL/Worksheets", "sharedStrings", "SharedStrings"),
		"odd part names": renamed("xl/worksheets/sheet1.xml", "data/first page.xml", "xl/sharedStrings.xml", "words", "xl/workbook.xml", "main.part", "xl/_rels/workbook.xml.rels", "_rels/main.part.rels").
			with("_rels/.rels", relationsXML("officeDocument", "main.part")).
			with("_rels/main.part.rels", relationsXML("worksheet", "data/first%20page.xml", "sharedStrings", "words")),
		"data descriptors": small.change("xl/worksheets/sheet1.xml", func(f *file) { f.descriptor = true }).change("xl/workbook.xml", func(f *file) { f.descriptor = true }),
		"stored parts":     small.change("xl/worksheets/sheet1.xml", func(f *file) { f.store = true }),
		"UTF-16 parts": small.with("xl/worksheets/sheet1.xml", string(toUTF16(sheet, binary.LittleEndian))).with("xl/sharedStrings.xml", string(toUTF16(stringsXML, binary.BigEndian))).
			with("xl/workbook.xml", string(toUTF16(workbookXML, binary.LittleEndian))).with("_rels/.rels", string(toUTF16(packageRels, binary.BigEndian))),
		"folders and path traversal names": append(small.with("../../../etc/passwd", "x").with(`..\..\x`, "y").with("/absolute", "z"), file{name: "xl/", store: true}, file{name: "xl/worksheets/", store: true}),
		"comments and instructions":        small.with("xl/workbook.xml", strings.Replace(workbookXML, "<sheets>", "<!-- a --><?b c?><sheets><!-- > -->", 1)),
		"unknown parts and relationships":  small.with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml", "sharedStrings", "sharedStrings.xml", "theme", "nowhere.xml", "http://example.invalid/sharedStrings", "nowhere.xml")),
	} {
		t.Run(name, func(t *testing.T) {
			if got, want := scanFirst(t, b.open(t)), "1: A=1 B=1'Quay & Mill'"; got != want {
				t.Errorf("rows %s, want %s", got, want)
			}
		})
	}
	t.Run("no shared strings, no styles", func(t *testing.T) {
		b := small.without("xl/sharedStrings.xml").with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml")).
			with("xl/worksheets/sheet1.xml", rows(`<row r="1"><c r="A1" s="77"><v>1</v></c></row>`)).open(t)
		if got, want := scanFirst(t, b), "1: A/77=1"; got != want {
			t.Errorf("rows %s, want %s", got, want)
		}
		if n, err := b.SharedStrings(); n != 0 || err != nil {
			t.Errorf("%d shared strings and error %v, want none", n, err)
		}
		if f := b.Format(77); f != FormatNumber {
			t.Errorf("format %v, want a plain number", f)
		}
	})
}

func compoundFile(name string) []byte {
	b := append([]byte(nil), compoundMagic...)
	b = append(b, make([]byte, 600<<10)...)
	for _, u := range utf16.Encode([]rune(name)) {
		b = binary.LittleEndian.AppendUint16(b, u)
	}
	return append(b, make([]byte, 1000)...)
}

func TestOpenRefuses(t *testing.T) {
	small := smallBook(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`))
	whole := small.bytes(t)
	sum, size, short := uint32(7), uint64(1<<40), uint64(100)
	workbookWith := func(from, to string) book {
		return small.with("xl/workbook.xml", strings.Replace(workbookXML, from, to, 1))
	}
	table := func(from, to string) book {
		return small.with("xl/worksheets/_rels/sheet1.xml.rels", relationsXML("table", "../tables/table1.xml")).with("xl/tables/table1.xml", strings.Replace(tableXML, from, to, 1))
	}
	for _, test := range []struct {
		name string
		data []byte
		kind error
		want string
	}{
		{"an empty file", nil, ErrNotWorkbook, "the file is empty; name a workbook (.xlsx or .xlsm)"},
		{"a text file", []byte("depot;minutes\n"), ErrNotWorkbook, "the file is not a zip file, as workbooks are, but text; open it in a spreadsheet program and save it as .xlsx"},
		{"text in UTF-16", []byte("\xFF\xFEd\x00;\x00"), ErrNotWorkbook, "the file is not a zip file, as workbooks are, but text; open it in a spreadsheet program and save it as .xlsx"},
		{"a web page", []byte("\xEF\xBB\xBF\r\n<HTML><table>"), ErrNotWorkbook, "the file is not a zip file, as workbooks are, but a web page; open it in a spreadsheet program and save it as .xlsx"},
		{"a web page in XML", []byte(xmlHead + "<!DOCTYPE html><html>"), ErrNotWorkbook, "the file is not a zip file, as workbooks are, but a web page; open it in a spreadsheet program and save it as .xlsx"},
		{"a workbook in one XML file", []byte(xmlHead + `<?mso-application progid="Excel.Sheet"?><Workbook>`), ErrNotWorkbook, "the file is not a zip file, as workbooks are, but XML; open it in a spreadsheet program and save it as .xlsx"},
		{"a picture", []byte("\x89PNG\r\n\x1a\n"), ErrNotWorkbook, "the file is not a zip file, as workbooks are; name a workbook (.xlsx or .xlsm)"},
		{"a truncated file", whole[:len(whole)*2/3], ErrDamaged, "the file is cut short: its zip directory is missing or unreadable; copy or download it again; if the original is no better, " + adviceDamaged},
		{"an encrypted workbook", compoundFile("EncryptedPackage"), ErrEncrypted, "the file is encrypted; open it with its password, save it without a password, and use that file"},
		{"an older workbook", compoundFile("Workbook"), ErrNotWorkbook, "the file is in an older binary format; open it in a spreadsheet program and save it as .xlsx"},
		{"an encrypted part", small.change("xl/workbook.xml", func(f *file) { f.flags = 1 }).bytes(t), ErrEncrypted, "part xl/workbook.xml: the part is encrypted; open it with its password, save it without a password, and use that file"},
		{"some other zip file", book{{name: "a.txt", data: "a"}}.bytes(t), ErrNotWorkbook, "the zip file holds no workbook; name a workbook (.xlsx or .xlsm)"},
		{"an OpenDocument file", book{{name: "mimetype", data: "a"}, {name: "content.xml"}}.bytes(t), ErrNotWorkbook, "the file is an OpenDocument file; save it as .xlsx"},
		{"a text document", small.with("xl/workbook.xml", xmlHead+`<w:document xmlns:w="urn:w"/>`).bytes(t), ErrNotWorkbook, "part xl/workbook.xml: the file holds a <document>, not a workbook; name a workbook (.xlsx or .xlsm)"},
		{"a binary workbook", small.with("_rels/.rels", relationsXML("officeDocument", "xl/workbook.bin")).with("xl/workbook.bin", "\x83\x01").bytes(t), ErrNotWorkbook, "part xl/workbook.bin: the workbook is in the binary form of the format; open it in a spreadsheet program and save it as .xlsx or .xlsm"},
		{"no package relationships", small.without("_rels/.rels").bytes(t), ErrDamaged, "part _rels/.rels: the file has no part for the workbook (its relationship leads to nothing)"},
		{"no workbook part", small.without("xl/workbook.xml").bytes(t), ErrDamaged, "the file has no part for the workbook (its relationship leads to xl/workbook.xml)"},
		{"no sheet part", small.without("xl/worksheets/sheet1.xml").bytes(t), ErrDamaged, "part xl/workbook.xml: sheet Trips: the file has no part for this sheet (its relationship leads to xl/worksheets/sheet1.xml)"},
		{"no relationship of a sheet", workbookWith("rId1", "rId9").bytes(t), ErrDamaged, "part xl/workbook.xml: sheet Trips: the file has no part for this sheet (its relationship leads to nothing)"},
		{"no shared strings part", small.without("xl/sharedStrings.xml").bytes(t), ErrDamaged, "the file has no part for the shared strings (its relationship leads to xl/sharedStrings.xml)"},
		{"two parts of one name", append(small, file{name: "XL/Workbook.xml", data: workbookXML}).bytes(t), ErrDamaged, "part XL/Workbook.xml: two parts have this name, xl/workbook.xml and XL/Workbook.xml"},
		{"two parts of one name through slashes", append(small, file{name: `xl\.\workbook.xml`, data: workbookXML}).bytes(t), ErrDamaged, `part xl\.\workbook.xml: two parts have this name, xl/workbook.xml and xl\.\workbook.xml`},
		{"a wrong checksum", small.change("xl/workbook.xml", func(f *file) { f.sum = &sum }).bytes(t), ErrDamaged, "part xl/workbook.xml: the part's checksum is wrong: some of its bytes changed after it was saved"},
		{"a part longer than told", small.change("xl/workbook.xml", func(f *file) { f.size = &short }).bytes(t), ErrDamaged, "part xl/workbook.xml: the part is longer than the 100 bytes that the file's directory gives"},
		{"a part larger than the limit", small.change("xl/workbook.xml", func(f *file) { f.size = &size }).bytes(t), ErrLimit, "part xl/workbook.xml: the part inflates to 1099511627776 bytes, the limit is 4294967296; if the file can be trusted, raise the limit PartBytes"},
		{"an unknown compression", small.change("xl/workbook.xml", func(f *file) { f.method = 9 }).bytes(t), ErrDamaged, "part xl/workbook.xml: the part is compressed by method 9; only stored and deflated parts can be read"},
		{"a document type", small.with("xl/workbook.xml", strings.Replace(workbookXML, "<workbook", `<!DOCTYPE x SYSTEM "file:///etc/passwd"><workbook`, 1)).bytes(t), ErrDamaged, "part xl/workbook.xml: the part declares a document type (DOCTYPE), which a workbook must not do (byte 56)"},
		{"a cut workbook part", small.with("xl/workbook.xml", workbookXML[:len(workbookXML)-11]).bytes(t), ErrDamaged, fmt.Sprintf("part xl/workbook.xml: the XML ends early, after %d bytes", len(workbookXML)-11)},
		{"no sheets", workbookWith(`<sheet name="Trips" sheetId="1" r:id="rId1"/>`, "").bytes(t), ErrDamaged, "part xl/workbook.xml: the workbook lists no sheets"},
		{"two lists of sheets", workbookWith(`</sheets>`, "</sheets><sheets/>").bytes(t), ErrDamaged, fmt.Sprintf("part xl/workbook.xml: the list of sheets is given twice (byte %d)", strings.Index(workbookXML, "</workbook>"))},
		{"two sheets of one name", workbookWith(`</sheets>`, `<sheet name="TRIPS" r:id="rId1"/></sheets>`).bytes(t), ErrDamaged, "part xl/workbook.xml: sheet TRIPS: two sheets have this name"},
		{"two sheets of one part", workbookWith(`</sheets>`, `<sheet name="B" r:id="rId1"/></sheets>`).bytes(t), ErrDamaged, "part xl/workbook.xml: sheet B: the sheet and the sheet Trips share one part"},
		{"a sheet without a name", workbookWith(`name="Trips"`, ``).bytes(t), ErrDamaged, fmt.Sprintf("part xl/workbook.xml: sheet number 1 has no name (byte %d)", strings.Index(workbookXML, "<sheet "))},
		{"a name for a sheet that is not there", workbookWith(`</sheets>`, `</sheets><definedNames><definedName name="n" localSheetId="1">1</definedName></definedNames>`).bytes(t), ErrDamaged, "part xl/workbook.xml: the defined name n is for sheet number 2 of 1"},
		{"two parts of shared strings", small.with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml", "sharedStrings", "sharedStrings.xml", "sharedStrings", "words.xml")).with("xl/words.xml", stringsXML).bytes(t), ErrDamaged, "the file has two parts for the shared strings, xl/sharedStrings.xml and xl/words.xml"},
		{"two parts of styles", small.with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml", "styles", "styles.xml", "styles", "looks.xml")).with("xl/styles.xml", "").with("xl/looks.xml", "").bytes(t), ErrDamaged, "the file has two parts for the styles, xl/styles.xml and xl/looks.xml"},
		{"two workbook parts", small.with("_rels/.rels", relationsXML("officeDocument", "xl/workbook.xml", "officeDocument", "xl/other.xml")).with("xl/other.xml", workbookXML).bytes(t), ErrDamaged, "the file has two parts for the workbook, xl/workbook.xml and xl/other.xml"},
		{"two tables of one part", small.with("xl/worksheets/_rels/sheet1.xml.rels", relationsXML("table", "../tables/table1.xml", "table", "/xl/tables/table1.xml")).with("xl/tables/table1.xml", tableXML).bytes(t), ErrDamaged, "sheet Trips: two tables share the part xl/tables/table1.xml"},
		{"two relationships of one id", small.with("xl/_rels/workbook.xml.rels", strings.ReplaceAll(workbookRels, "rId2", "rId1")).bytes(t), ErrDamaged, fmt.Sprintf(`part xl/_rels/workbook.xml.rels: two relationships have the id "rId1" (byte %d)`, strings.LastIndex(workbookRels, "<Relationship "))},
		{"a table of a range that is no number", table(`totalsRowCount="1"`, `totalsRowCount="x"`).bytes(t), ErrDamaged, `part xl/tables/table1.xml: sheet Trips: the attribute totalsRowCount is "x", not a whole number (byte 56)`},
		{"a defined name that ends early", workbookWith(`</sheets></workbook>`, `</sheets><definedNames><definedName name="n">A`).bytes(t), ErrDamaged, fmt.Sprintf("part xl/workbook.xml: the XML ends early, after %d bytes", len(workbookXML)-len("</workbook>")+len(`<definedNames><definedName name="n">A`))},
		{"a sheet's name of a wrong reference", workbookWith(`"Trips"`, `"&x;"`).bytes(t), ErrDamaged, fmt.Sprintf("part xl/workbook.xml: the reference &x; means nothing in a workbook (byte %d)", strings.Index(workbookXML, "<sheet "))},
		{"a relationship of a wrong reference", small.with("_rels/.rels", strings.Replace(packageRels, "xl/workbook.xml", "&x;", 1)).bytes(t), ErrDamaged, fmt.Sprintf("part _rels/.rels: the reference &x; means nothing in a workbook (byte %d)", strings.Index(packageRels, "<Relationship "))},
		{"no table part", table("x", "x").without("xl/tables/table1.xml").bytes(t), ErrDamaged, "sheet Trips: the file has no part for a table of this sheet (its relationship leads to xl/tables/table1.xml)"},
		{"a table of no range", table("A1:B5", "A1:").bytes(t), ErrDamaged, `part xl/tables/table1.xml: sheet Trips: the table trips has the range "A1:" (byte 56)`},
		{"a table with too few columns", table("A1:B5", "A1:C5").bytes(t), ErrDamaged, "part xl/tables/table1.xml: sheet Trips: the table trips names 2 columns, its range A1:C5 has 3"},
		{"a table with more totals than rows", table(`totalsRowCount="1"`, `totalsRowCount="5"`).bytes(t), ErrDamaged, "part xl/tables/table1.xml: sheet Trips: the table trips has more header and totals rows than rows (byte 56)"},
		{"a table that is none", table("<table ", "<tables ").bytes(t), ErrDamaged, "part xl/tables/table1.xml: sheet Trips: the part holds a <tables>, not a table (byte 56)"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := openBytes(test.data, Limits{})
			wantError(t, err, test.kind, "Trips.xlsx: "+strings.TrimSuffix(test.want, "; "+adviceDamaged))
		})
	}
}

// A damaged sheet or string table shows when it is read, with every value of
// the scan refused.
func TestScanRefusesDamagedParts(t *testing.T) {
	var content strings.Builder
	for r := 1; r <= 5000; r++ {
		fmt.Fprintf(&content, `<row r="%d"><c r="A%d"><v>%d</v></c><c r="B%d" t="s"><v>%d</v></c></row>`, r, r, r*7919%1000, r, r%2)
	}
	sheet := rows(content.String())
	small := smallBook(sheet)
	good := small.bytes(t)
	sum, size := uint32(1), uint64(len(sheet)+5)
	stored := small.change("xl/worksheets/sheet1.xml", func(f *file) { f.store = true }).bytes(t)
	flipped := bytes.Clone(stored)
	flipped[bytes.Index(flipped, []byte(`<c r="A3000"><v>`))+16] ^= 1
	inDeflate := func(at int) []byte {
		b := bytes.Clone(good)
		start := bytes.Index(b, []byte("xl/worksheets/sheet1.xml")) + len("xl/worksheets/sheet1.xml")
		b[start+at] ^= 0x55
		return b
	}
	const sheetPart = "part xl/worksheets/sheet1.xml: sheet Trips: "
	for _, test := range []struct {
		name string
		data []byte
		kind error
		want string
	}{
		{"one bit of a stored part", flipped, ErrDamaged, sheetPart + "the part's checksum is wrong: some of its bytes changed after it was saved"},
		{"a wrong checksum", small.change("xl/worksheets/sheet1.xml", func(f *file) { f.sum = &sum }).bytes(t), ErrDamaged, sheetPart + "the part's checksum is wrong: some of its bytes changed after it was saved"},
		{"a part shorter than told", small.change("xl/worksheets/sheet1.xml", func(f *file) { f.size = &size }).bytes(t), ErrDamaged, fmt.Sprintf(sheetPart+"the part is cut short: %d of %d bytes", len(sheet), size)},
		{"a checksum of zero", small.change("xl/worksheets/sheet1.xml", func(f *file) { f.sum = new(uint32) }).bytes(t), ErrDamaged, sheetPart + "the part's checksum is wrong: some of its bytes changed after it was saved"},
		{"cut shared strings", small.with("xl/sharedStrings.xml", stringsXML[:len(stringsXML)-4]).bytes(t), ErrDamaged, fmt.Sprintf("part xl/sharedStrings.xml: the XML ends early, after %d bytes", len(stringsXML)-4)},
		{"shared strings that are none", small.with("xl/sharedStrings.xml", strings.ReplaceAll(stringsXML, "sst", "tss")).bytes(t), ErrDamaged, "part xl/sharedStrings.xml: the part holds a <tss>, not shared strings (byte 56)"},
		{"a shared string beyond the limit", small.with("xl/sharedStrings.xml", strings.Replace(stringsXML, "North", strings.Repeat("N", 32768), 1)).bytes(t), ErrLimit, "part xl/sharedStrings.xml: a text has 32768 characters, the limit is 32767; if the file can be trusted, raise the limit TextLength"},
	} {
		t.Run(test.name, func(t *testing.T) {
			b, err := openBytes(test.data, Limits{})
			if err != nil {
				t.Fatal(err)
			}
			_, err = b.Scan(0, ScanOptions{}, func(*Row) error { return nil })
			wantError(t, err, test.kind, "Trips.xlsx: "+test.want)
		})
	}
	// A changed byte of a deflated part may break the stream, the XML or the
	// checksum; it is refused whichever it is.
	for at := 40; at < 4000; at += 97 {
		b, err := openBytes(inDeflate(at), Limits{})
		if err == nil {
			_, err = b.Scan(0, ScanOptions{}, func(*Row) error { return nil })
		}
		var e *Error
		if !errors.As(err, &e) || !errors.Is(err, ErrDamaged) && !errors.Is(err, ErrLimit) || e.Part == "" && e.Reason == "" {
			t.Errorf("byte %d changed: error %v", at, err)
		}
	}
	// Every prefix of the file is refused.
	for n := 0; n < len(good); n += 1 + len(good)/50 {
		if _, err := openBytes(good[:n], Limits{}); err == nil {
			t.Errorf("the first %d of %d bytes open", n, len(good))
		}
	}
}

func TestOpenLimits(t *testing.T) {
	sheet := rows(strings.Repeat(" ", 1<<20))
	small := smallBook(sheet).with("xl/workbook.xml", strings.Replace(workbookXML, "</sheets>", `</sheets><definedNames><definedName name="a"/><definedName name="b"/><definedName name="c"/></definedNames>`, 1))
	const sheetPart = "Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: "
	size := len(sheet)
	for _, test := range []struct {
		name   string
		limits Limits
		want   string
	}{
		{"entries", Limits{Entries: 5}, "Trips.xlsx: the file holds 6 parts, the limit is 5; if the file can be trusted, raise the limit Entries"},
		{"defined names", Limits{Names: 2}, "Trips.xlsx: part xl/workbook.xml: the workbook has more than 2 defined names; if the file can be trusted, raise the limit Names"},
		{"relationships", Limits{Relations: 1}, "Trips.xlsx: part xl/_rels/workbook.xml.rels: a part has more than 1 relationships; if the file can be trusted, raise the limit Relations"},
		{"bytes of one part", Limits{PartBytes: 1 << 20}, fmt.Sprintf(sheetPart+"the part inflates to %d bytes, the limit is 1048576; if the file can be trusted, raise the limit PartBytes", size)},
		{"bytes of all parts", Limits{TotalBytes: 1 << 20}, sheetPart + "the parts read inflate to more than 1048576 bytes; if the file can be trusted, raise the limit TotalBytes"},
		{"bytes in memory", Limits{HeldBytes: 100}, fmt.Sprintf("Trips.xlsx: part _rels/.rels: the part inflates to %d bytes, the limit for parts kept in memory is 100; if the file can be trusted, raise the limit HeldBytes", len(packageRels))},
		{"a zip bomb's ratio", Limits{RatioFrom: 1 << 20}, sheetPart},
	} {
		t.Run(test.name, func(t *testing.T) {
			b, err := openBytes(small.bytes(t), test.limits)
			if err == nil {
				_, err = b.Scan(0, ScanOptions{}, func(*Row) error { return nil })
			}
			if test.limits.RatioFrom > 0 {
				entry := b.zip.File[b.entries[0]]
				test.want += fmt.Sprintf("the part inflates from %d to %d bytes, more than 200 to 1; if the file can be trusted, raise the limit Ratio", entry.CompressedSize64, size)
			}
			wantError(t, err, ErrLimit, test.want)
		})
	}
	// The ratio does not count for small parts, nor a second scan twice.
	b, err := openBytes(small.bytes(t), Limits{TotalBytes: int64(size + 3000)})
	if err != nil {
		t.Fatal(err)
	}
	for range 3 {
		if got := scanFirst(t, b); got != "" {
			t.Errorf("rows %q, want none", got)
		}
	}
}

// Sheets are found by the same rule as strings.EqualFold has.
func TestSheetNamesAreFoldedAlike(t *testing.T) {
	names := []string{"", "Trips", "TRIPS", "trips ", "ſtraße", "Straße", "STRASSE", "\u212A", "k", "K", "Ⱥ", "ⱥ", "Σ", "σ", "ς", "ß", "ẞ", "ı", "i", "İ", "Ǆ", "ǅ", "ǆ", "q'"}
	for _, a := range names {
		for _, b := range names {
			if got, want := foldName(a) == foldName(b), strings.EqualFold(a, b); got != want {
				t.Errorf("%q and %q: %v, want %v", a, b, got, want)
			}
		}
	}
}

func TestOpenNamesMissingFiles(t *testing.T) {
	path := filepath.Join(t.TempDir(), "none.xlsx")
	_, err := Open(path, Limits{})
	if !errors.Is(err, os.ErrNotExist) || !errors.Is(err, ErrUnreadable) || !strings.HasPrefix(err.Error(), path+": the file cannot be opened: ") {
		t.Errorf("error %v", err)
	}
	_, err = Open(filepath.Dir(path), Limits{})
	if !errors.Is(err, ErrNotWorkbook) {
		t.Errorf("error %v for a folder", err)
	}
}

// failing is a file that cannot be read from some place on, once it is open.
type failing struct {
	*bytes.Reader
	from int64
	on   bool
}

var errDisk = errors.New("disk failure")

func (f *failing) ReadAt(b []byte, at int64) (int, error) {
	if f.on && at+int64(len(b)) > f.from {
		return 0, errDisk
	}
	return f.Reader.ReadAt(b, at)
}

func TestScanTellsAFailingDiskFromDamage(t *testing.T) {
	data := smallBook(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`)).bytes(t)
	name := int64(bytes.Index(data, []byte("xl/worksheets/sheet1.xml")))
	for _, from := range []int64{name - 10, name + 60} { // in the part's header, in its bytes
		disk := &failing{Reader: bytes.NewReader(data), from: from}
		b, err := OpenReaderAt("Trips.xlsx", disk, int64(len(data)), Limits{})
		if err != nil {
			t.Fatal(err)
		}
		disk.on = true
		_, err = b.Scan(0, ScanOptions{}, nil)
		wantError(t, err, ErrUnreadable, "Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: the part cannot be read: disk failure; check the disk or the connection, then try again")
		if !errors.Is(err, errDisk) {
			t.Errorf("error %v does not give its cause", err)
		}
	}
}

func TestOpenSeesSignatures(t *testing.T) {
	for name, rels := range map[string]string{
		"by its relationship": relationsXML("officeDocument", "xl/workbook.xml", packageRelations+"/digital-signature/origin", "sig/origin.sigs"),
		"by its folder":       relationsXML("officeDocument", "xl/workbook.xml", "urn:other", "_xmlsignatures/origin.sigs"),
	} {
		if !smallBook(rows("")).with("_rels/.rels", rels).open(t).Signed() {
			t.Errorf("%s: the signature is not seen", name)
		}
	}
}
