package ooxml

import (
	"bytes"
	"errors"
	"io"
	"strings"
	"testing"
)

// TestEverythingThatMustBeRefusedIs goes through the list of what a reader must
// refuse. Each refusal has a kind and names where it happened, when the book is
// read and when it is changed, and nothing is written then.
func TestEverythingThatMustBeRefusedIs(t *testing.T) {
	const sheetPart, stringsPart = "part xl/worksheets/sheet1.xml", "part xl/sharedStrings.xml"
	const two = `<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>12.5</v></c></row><row r="2"><c r="A2" t="s"><v>1</v></c><c r="B2"><v>-300</v></c></row>`
	plain := wholeBook(rows(two))
	sheet := func(s string) []byte { return wholeBook(rows(s)).bytes(t) }
	cell := func(s string) []byte { return sheet(`<row r="7">` + s + `</row>`) }
	told := func(part string, change func(*file)) []byte { return plain.change(part, change).bytes(t) }
	wrong, shorter, longer := uint32(1), uint64(100), uint64(100_000)
	cut := func(part string, from int) []byte {
		return plain.change(part, func(f *file) { f.data = f.data[:len(f.data)-from] }).bytes(t)
	}
	also := func(name string) []byte { return append(plain[:len(plain):len(plain)], file{name: name}).bytes(t) }
	const doctype = `<!DOCTYPE x [<!ENTITY a "b">]>`
	typed := func(part string) []byte {
		return plain.change(part, func(f *file) { f.data = strings.Replace(f.data, "\n<", "\n"+doctype+"<", 1) }).bytes(t)
	}
	for _, test := range []struct {
		name  string
		data  []byte
		kind  error
		place []string // what the refusal names
	}{
		{"CRC mismatch of the sheet", told("xl/worksheets/sheet1.xml", func(f *file) { f.sum = &wrong }), ErrDamaged, []string{sheetPart, "sheet Trips", "checksum"}},
		{"CRC mismatch of the shared strings", told("xl/sharedStrings.xml", func(f *file) { f.sum = &wrong }), ErrDamaged, []string{stringsPart, "checksum"}},
		{"CRC mismatch of the styles", told("xl/styles.xml", func(f *file) { f.sum = &wrong }), ErrDamaged, []string{"part xl/styles.xml", "checksum"}},
		{"CRC mismatch of the relationships", told("_rels/.rels", func(f *file) { f.sum = &wrong }), ErrDamaged, []string{"part _rels/.rels", "checksum"}},
		{"longer than told", told("xl/worksheets/sheet1.xml", func(f *file) { f.size = &shorter }), ErrDamaged, []string{sheetPart, "sheet Trips", "longer than the 100 bytes"}},
		{"shorter than told", told("xl/worksheets/sheet1.xml", func(f *file) { f.size = &longer }), ErrDamaged, []string{sheetPart, "sheet Trips", "cut short"}},
		{"sheet ends early", cut("xl/worksheets/sheet1.xml", 12), ErrDamaged, []string{sheetPart, "sheet Trips", "the XML ends early"}},
		{"sheet ends early in a cell", plain.with("xl/worksheets/sheet1.xml", strings.Split(rows(two), "00</v>")[0]).bytes(t), ErrDamaged, []string{sheetPart, "sheet Trips", "cell B2", "the XML ends early"}},
		{"shared strings end early", cut("xl/sharedStrings.xml", 6), ErrDamaged, []string{stringsPart, "the XML ends early"}},
		{"styles end early", cut("xl/styles.xml", 5), ErrDamaged, []string{"part xl/styles.xml", "the XML ends early"}},
		{"relationships end early", cut("xl/_rels/workbook.xml.rels", 5), ErrDamaged, []string{"part xl/_rels/workbook.xml.rels", "the XML ends early"}},
		{"two parts of one name", also("xl/worksheets/sheet1.xml"), ErrDamaged, []string{sheetPart, "two parts have this name"}},
		{"two parts of one name, ASCII case apart", also("xl/worksheets/SHEET1.xml"), ErrDamaged, []string{"part xl/worksheets/SHEET1.xml", "two parts have this name"}},
		{"two parts of one name, slashes apart", also(`xl\worksheets\sheet1.xml`), ErrDamaged, []string{`part xl\worksheets\sheet1.xml`, "two parts have this name"}},
		{"a row given twice", sheet(`<row r="1"/><row r="1"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", "row 1 is given twice"}},
		{"a cell given twice", cell(`<c r="C7"><v>1</v></c><c r="C7"><v>1</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "given twice"}},
		{"a row out of range", sheet(`<row r="1048577"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", "1048577"}},
		{"row 0", sheet(`<row r="0"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", "the number 0"}},
		{"a negative row", sheet(`<row r="-1"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", `"-1"`}},
		{"a column out of range", cell(`<c r="XFE7"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", `"XFE7"`}},
		{"a cell of another row", cell(`<c r="C8"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", "C8", "row 7"}},
		{"a reference without a number", cell(`<c r="C"/>`), ErrDamaged, []string{sheetPart, "sheet Trips", `"C"`}},
		{"a string index out of range", cell(`<c r="C7" t="s"><v>4</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "shared string 4, of 4"}},
		{"a negative string index", cell(`<c r="C7" t="s"><v>-1</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", `"-1"`}},
		{"a string index that is no whole number", cell(`<c r="C7" t="s"><v>1.0</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", `"1.0"`}},
		{"a huge string index", cell(`<c r="C7" t="s"><v>4294967296</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", `"4294967296"`}},
		{"a string index in a book without strings", wholeBook(rows(`<row r="7"><c r="C7" t="s"><v>0</v></c></row>`)).with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml")).bytes(t), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "shared string 0, of 0"}},
		{"an inline text in a cell of another type", cell(`<c r="C7"><is><t>1</t></is></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "<is> stands where it has no place"}},
		{"a row within a row", sheet(`<row r="1"><row r="2"/></row>`), ErrDamaged, []string{sheetPart, "sheet Trips", "<row> stands where it has no place"}},
		{"a cell outside the rows", sheet(`<c r="A1"><v>1</v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "<c> stands where it has no place"}},
		{"a row outside the sheet's data", wholeBook(worksheet(`<row r="1"/><sheetData/>`)).bytes(t), ErrDamaged, []string{sheetPart, "sheet Trips", "<row> stands where it has no place"}},
		{"a cell within a cell", cell(`<c r="C7"><c r="D7"><v>1</v></c></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "<c> stands where it has no place"}},
		{"an element within a value", cell(`<c r="C7"><v><b>5</b></v></c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", "<b> stands where it has no place"}},
		{"an unknown element within a text", plain.with("xl/sharedStrings.xml", strings.Replace(stringsXML, "<t>North</t>", `<b>North</b>`, 1)).bytes(t), ErrDamaged, []string{stringsPart, "<b> stands where it has no place"}},
		{"a value without its tag", cell(`<c r="C7">5</c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "cell C7", `the text "5" stands where it has no place`}},
		{"text between cells", cell(`<c r="C7"/>x`), ErrDamaged, []string{sheetPart, "sheet Trips", `the text "x" stands where it has no place`}},
		{"text between rows", sheet(`<row r="1"/><![CDATA[x]]>`), ErrDamaged, []string{sheetPart, "sheet Trips", `the text "x" stands where it has no place`}},
		{"an element in capitals", cell(`<C r="C7"><v>1</v></C>`), ErrDamaged, []string{sheetPart, "sheet Trips", "<C> stands where it has no place"}},
		{"a prefix that is not declared", cell(`<y:c r="C7"><y:v>1</y:v></y:c>`), ErrDamaged, []string{sheetPart, "sheet Trips", "the prefix of <y:c> is not declared"}},
		{"cells to choose from", sheet(`<mc:AlternateContent xmlns:mc="` + compatibility + `"><mc:Fallback><row r="1"/></mc:Fallback></mc:AlternateContent>`), ErrDamaged, []string{sheetPart, "sheet Trips", "<mc:AlternateContent> stands among the values"}},
		{"sheet data to choose from", wholeBook(worksheet(`<mc:AlternateContent xmlns:mc="` + compatibility + `"><mc:Choice><sheetData/></mc:Choice></mc:AlternateContent>`)).bytes(t), ErrDamaged, []string{sheetPart, "sheet Trips", "contents to choose from"}},
		{"shared strings to choose from", plain.with("xl/sharedStrings.xml", strings.Replace(stringsXML, "<si><t>North</t></si>", `<mc:AlternateContent xmlns:mc="`+compatibility+`"><mc:Choice><si><t>North</t></si></mc:Choice></mc:AlternateContent>`, 1)).bytes(t), ErrDamaged, []string{stringsPart, "<mc:AlternateContent> stands among the values"}},
		{"part of a text to choose from", plain.with("xl/sharedStrings.xml", strings.Replace(stringsXML, "<t>North</t>", `<mc:AlternateContent xmlns:mc="`+compatibility+`"><mc:Choice><t>North</t></mc:Choice></mc:AlternateContent>`, 1)).bytes(t), ErrDamaged, []string{stringsPart, "<mc:AlternateContent> stands among the values"}},
		{"DOCTYPE in the sheet", typed("xl/worksheets/sheet1.xml"), ErrDamaged, []string{sheetPart, "sheet Trips", "DOCTYPE"}},
		{"DOCTYPE in the shared strings", typed("xl/sharedStrings.xml"), ErrDamaged, []string{stringsPart, "DOCTYPE"}},
		{"DOCTYPE in the workbook part", typed("xl/workbook.xml"), ErrDamaged, []string{"part xl/workbook.xml", "DOCTYPE"}},
		{"an encrypted entry", told("xl/worksheets/sheet1.xml", func(f *file) { f.flags = 1 }), ErrEncrypted, []string{sheetPart, "sheet Trips", "encrypted"}},
		{"an encrypted workbook", compoundFile("EncryptedPackage"), ErrEncrypted, []string{"the file is encrypted"}},
		{"a text beyond the limit", cell(`<c r="C7" t="str"><v>` + strings.Repeat("x", 32_768) + `</v></c>`), ErrLimit, []string{sheetPart, "sheet Trips", "cell C7", "TextLength"}},
		{"a depth beyond the limit", cell(`<c r="C7"><extLst>` + strings.Repeat("<a>", 256) + `</c>`), ErrLimit, []string{sheetPart, "sheet Trips", "cell C7", "Depth"}},
	} {
		t.Run(test.name, func(t *testing.T) { refuseEverywhere(t, test.data, test.kind, test.place) })
	}
}

// refuseEverywhere opens, reads and changes a book, and fails unless each ends in
// the same refusal.
func refuseEverywhere(t *testing.T, data []byte, kind error, place []string) {
	t.Helper()
	check := func(err error) {
		t.Helper()
		if !errors.Is(err, kind) {
			t.Errorf("error %v, want one of the kind %v", err, kind)
			return
		}
		for _, p := range append(place, "Trips.xlsx") {
			if !strings.Contains(err.Error(), p) {
				t.Errorf("%q does not name %q", err, p)
			}
		}
	}
	b, err := openBytes(data, Limits{})
	if err != nil {
		check(err)
		return
	}
	_, err = b.Scan(0, ScanOptions{}, func(r *Row) error { return nil })
	check(err)
	// A change that is planned passes over the sheet only; damage elsewhere, which
	// the sheet's own cells lead to, shows there as well.
	var out bytes.Buffer
	if _, err = b.Write(&out, oneEdit); err == nil {
		t.Error("the damaged book is written")
	} else {
		check(err)
	}
	if out.Len() > 0 {
		t.Errorf("%d bytes were written", out.Len())
	}
	// A sheet that is refused is refused again.
	_, err = b.Scan(0, ScanOptions{}, func(r *Row) error { return nil })
	check(err)
}

// Texts that are not numbers, dates, yes or no, or text at all.
func TestValuesThatCannotBeAreRefused(t *testing.T) {
	number := func(s string) string { return `<c r="A1"><v>` + s + `</v></c>` }
	date := func(s string) string { return `<c r="A1" t="d"><v>` + s + `</v></c>` }
	text := func(s string) string { return `<c r="A1" t="str"><v>` + s + `</v></c>` }
	list := []string{
		number("1e400"), number("-1e400"), number("1e999999999999"), number("NaN"), number("nan"), number("INF"), number("-INF"), number("Infinity"), number("∞"),
		number("0x10"), number("0x1p-2"), number("0b1"), number("0o7"), number("1_000"), number("1,000"), number("1,5"), number("1 000"), number("1.2.3"), number("1e5.5"),
		number("--1"), number("+-1"), number("-"), number("."), number("e5"), number("1e"), number("1e+"), number("1d5"), number("1f"), number("−5"), number("１２"), number("١٢"),
		number("12%"), number("$12"), number("TRUE"), number("12\u00A0"), number("#N/A"), number("1<!-- -->e"), number("=1"),
		`<c r="A1" t="b"><v>TRUE</v></c>`, `<c r="A1" t="b"><v>yes</v></c>`, `<c r="A1" t="b"><v>2</v></c>`, `<c r="A1" t="b"><v>-1</v></c>`, `<c r="A1" t="b"><v>1.0</v></c>`,
		date("2024-3-5"), date("20240305"), date("2024-02-30"), date("2024-13-01"), date("1900-02-29"), date("1899-12-29"), date("10000-01-01"), date("-0001-01-01"), date("2024-03-05T24:00:00"),
		date("2024-03-05T08:60"), date("2024-W10-2"), date("2024-065"), date("2024-03"), date("45356"), date("05.03.2024"), date("2024-03-05T"), date("P1D"), date("yesterday"),
		text("a\x00b"), text("a\x01b"), text("a\xFFb"), text("\xC0\x80"), text("\xED\xA0\x80"), text("\xEF\xBF\xBE"), text("&#0;"), text("&#xD83D;"), text("&#x110000;"), text("&nbsp;"), text("&lt"), text("a & b"),
		`<c r="A1" t="x"/>`, `<c r="A1" t="S"/>`, `<c r="A1" s="-1"/>`, `<c r="A1" s="1e3"/>`, `<c r="A1" s="5"/>`, `<c r="A1" s="99999999999999999999"/>`,
		`<c r="A0"/>`, `<c r="A01"/>`, `<c r="1A"/>`, `<c r="$A$1"/>`, `<c r="A1:B2"/>`, `<c r="AAAA1"/>`, `<c r="Ä1"/>`, `<c r="R1C1"/>`, `<c r="A-1"/>`, `<c r="A1" r="A1"/>`,
	}
	for _, s := range list {
		_, _, err := scanAlike(t, []byte(rows(`<row r="1">`+s+`</row>`)), ScanOptions{})
		if !errors.Is(err, ErrDamaged) {
			t.Errorf("%q is not refused: %v", s, err)
		}
		if _, err := Splice(io.Discard, strings.NewReader(rows(`<row r="1">`+s+`</row>`)), []Edit{cellEdit("B9", NumberValue(1))}, testText); err == nil && !strings.Contains(s, `s="5"`) && !isOnlyDecoded(s) {
			t.Errorf("%q is not refused when the sheet is changed", s)
		}
	}
}

// isOnlyDecoded tells whether a faulty cell shows only when its number is worked
// out, which a change of other cells does not do.
func isOnlyDecoded(s string) bool {
	inner, ok := strings.CutPrefix(s, `<c r="A1"><v>`)
	return ok && isNumberLike([]byte(strings.TrimSuffix(strings.ReplaceAll(inner, "<!-- -->", ""), "</v></c>")))
}
