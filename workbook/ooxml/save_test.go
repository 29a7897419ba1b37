package ooxml

import (
	"archive/zip"
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
	"reflect"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
)

// richBook is a book with much that a save must keep: entries with comments,
// extra fields, times, data descriptors, stored parts, unknown parts.
func richBook(t testing.TB) []byte {
	t.Helper()
	var out bytes.Buffer
	z := zip.NewWriter(&out)
	for i, f := range smallBook(rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>1</v></c></row>`)).
		with("xl/media/image1.png", "\x89PNG not really").with("docProps/app.xml", "<Properties/>").with("customXml/item1.xml", "<a/>") {
		header := &zip.FileHeader{Name: f.name, Method: zip.Deflate, Comment: fmt.Sprint("entry ", i), Extra: []byte{0xAA, 0xBB, 2, 0, byte(i), 1}}
		if i%2 == 0 {
			header.Modified = time.Date(2020+i, 2, 3, 4, 5, 6, 0, time.UTC)
		}
		if strings.HasSuffix(f.name, ".png") {
			header.Method = zip.Store
		}
		header.SetMode(0o600)
		w, err := z.CreateHeader(header)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.WriteString(w, f.data); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.SetComment("a comment"); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

func open(t testing.TB, data []byte) *Book {
	t.Helper()
	b, err := openBytes(data, Limits{})
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func write(t testing.TB, b *Book, changes Changes) ([]byte, Saved) {
	t.Helper()
	var out bytes.Buffer
	saved, err := b.Write(&out, changes)
	if err != nil {
		t.Fatal(err)
	}
	return out.Bytes(), saved
}

// sameEntries fails unless the entries of two zip files, those named apart, have
// the same headers, order and compressed bytes.
func sameEntries(t *testing.T, before, after *zip.Reader, apart ...string) {
	t.Helper()
	if before.Comment != after.Comment {
		t.Errorf("comment %q, want %q", after.Comment, before.Comment)
	}
	if len(after.File) < len(before.File) {
		t.Fatalf("%d entries, want at least %d", len(after.File), len(before.File))
	}
	for i, f := range before.File {
		g := after.File[i]
		h1, h2 := f.FileHeader, g.FileHeader
		changed := false
		for _, name := range apart {
			changed = changed || f.Name == name
		}
		if changed {
			if h1.Name != h2.Name || h1.Comment != h2.Comment || !bytes.Equal(withoutSeal(h1.Extra), withoutSeal(h2.Extra)) || !h1.Modified.Equal(h2.Modified) || h1.ExternalAttrs != h2.ExternalAttrs {
				t.Errorf("%s: header\n%+v\nwant\n%+v", f.Name, h2, h1)
			}
			continue
		}
		if !reflect.DeepEqual(h1, h2) {
			t.Errorf("%s: header\n%+v\nwant\n%+v", f.Name, h2, h1)
		}
		r1, err1 := f.OpenRaw()
		r2, err2 := g.OpenRaw()
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		if !bytes.Equal(readAll(t, r1), readAll(t, r2)) {
			t.Errorf("%s: the compressed bytes changed", f.Name)
		}
	}
}

func TestWriteCopiesWhatDoesNotChange(t *testing.T) {
	data := richBook(t)
	b := open(t, data)
	edits := map[int][]Edit{0: {cellEdit("B1", NumberValue(2)), cellEdit("C9", TextValue("x"))}}
	out, saved := write(t, b, Changes{Edits: edits})
	if want := (Saved{Cells: 2, Parts: []string{"xl/worksheets/sheet1.xml"}}); !reflect.DeepEqual(saved, want) {
		t.Errorf("saved %+v, want %+v", saved, want)
	}
	after := open(t, out)
	sameEntries(t, b.zip, after.zip, "xl/worksheets/sheet1.xml")
	if len(after.zip.File) != len(b.zip.File) {
		t.Errorf("%d entries, want %d", len(after.zip.File), len(b.zip.File))
	}
	if got, want := part(t, after, "xl/worksheets/sheet1.xml"), rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>2</v></c></row><row r="9"><c r="C9" t="inlineStr"><is><t>x</t></is></c></row>`); got != want {
		t.Errorf("sheet\n%s\nwant\n%s", got, want)
	}
	if again, _ := write(t, b, Changes{Edits: edits}); !bytes.Equal(again, out) {
		t.Error("the same save gives other bytes")
	}
	// The second time nothing changes, and the file is copied as it is.
	twice, saved := write(t, after, Changes{Edits: edits, Recalculate: true})
	if !bytes.Equal(twice, out) || !reflect.DeepEqual(saved, Saved{}) {
		t.Errorf("the same edits again: %+v, %d bytes, want none and %d", saved, len(twice), len(out))
	}
}

func TestWriteSetsRecalculation(t *testing.T) {
	edits := map[int][]Edit{0: {cellEdit("B1", NumberValue(2))}}
	sheets := workbookXML[:strings.Index(workbookXML, "</workbook>")]
	for _, test := range []struct{ name, from, want string }{
		{"no settings", `</workbook>`, `<calcPr fullCalcOnLoad="1"/></workbook>`},
		{"after names", `<definedNames><definedName name="a">1</definedName></definedNames><pivotCaches/></workbook>`, `<definedNames><definedName name="a">1</definedName></definedNames><calcPr fullCalcOnLoad="1"/><pivotCaches/></workbook>`},
		{"other settings", `<calcPr calcId="1" calcMode="manual"/></workbook>`, `<calcPr fullCalcOnLoad="1" calcId="1" calcMode="manual"/></workbook>`},
		{"settings with an end tag", `<calcPr></calcPr></workbook>`, `<calcPr fullCalcOnLoad="1"></calcPr></workbook>`},
		{"switched off", `<calcPr calcId="1" fullCalcOnLoad='0' x="1"/></workbook>`, `<calcPr calcId="1" fullCalcOnLoad='1' x="1"/></workbook>`},
		{"empty", `<calcPr fullCalcOnLoad=""/></workbook>`, `<calcPr fullCalcOnLoad="1"/></workbook>`},
	} {
		t.Run(test.name, func(t *testing.T) {
			b := smallBook(rows("")).with("xl/workbook.xml", sheets+test.from).open(t)
			out, saved := write(t, b, Changes{Edits: edits, Recalculate: true})
			after := open(t, out)
			if got := part(t, after, "xl/workbook.xml"); got != sheets+test.want {
				t.Errorf("workbook\n%s\nwant\n%s", got, sheets+test.want)
			}
			if !saved.Recalculate || !after.Calculation().OnLoad || len(saved.Parts) != 2 {
				t.Errorf("saved %+v, calculation %+v", saved, after.Calculation())
			}
			sameEntries(t, b.zip, after.zip, saved.Parts...)
		})
	}
	t.Run("switched on already", func(t *testing.T) {
		b := smallBook(rows("")).with("xl/workbook.xml", sheets+`<calcPr fullCalcOnLoad="1"/></workbook>`).open(t)
		_, saved := write(t, b, Changes{Edits: edits, Recalculate: true})
		if want := (Saved{Cells: 1, Parts: []string{"xl/worksheets/sheet1.xml"}, Recalculate: true}); !reflect.DeepEqual(saved, want) {
			t.Errorf("saved %+v, want %+v", saved, want)
		}
	})
}

var newSheets = []NewSheet{
	{Name: "Trips per depot", Rows: [][]Value{{TextValue("depot"), TextValue("mean")}, nil, {TextValue("Quay & Mill"), NumberValue(12.5), BoolValue(true), EmptyValue(), NumberValue(-1)}}, Widths: []float64{20, 0, 9.5}, Names: []DefinedName{{Name: "_made", Ref: "'Trips per depot'!$A$1", Hidden: true}}},
	{Name: "O'Brien <2>"},
}

func TestWriteAddsSheets(t *testing.T) {
	strict := strings.NewReplacer(mainTransitional, mainStrict, relTransitional, relStrict)
	small := smallBook(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`))
	for name, before := range map[string]book{
		"as programs write it": small,
		"strict": small.with("_rels/.rels", strict.Replace(packageRels)).with("xl/workbook.xml", strict.Replace(workbookXML)).
			with("xl/_rels/workbook.xml.rels", strict.Replace(workbookRels)).with("xl/worksheets/sheet1.xml", strict.Replace(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`))),
		"a prefix":                              small.with("xl/workbook.xml", prefixed(workbookXML, "x")).with("[Content_Types].xml", prefixed(contentTypes, "ct")).with("xl/_rels/workbook.xml.rels", prefixed(workbookRels, "r")),
		"UTF-16":                                small.with("xl/workbook.xml", string(toUTF16(workbookXML, binary.LittleEndian))).with("[Content_Types].xml", string(toUTF16(contentTypes, binary.LittleEndian))),
		"names of its own":                      small.with("xl/workbook.xml", strings.Replace(workbookXML, "</sheets>", `</sheets><definedNames><definedName name="a">1</definedName></definedNames>`, 1)),
		"an empty list of names":                small.with("xl/workbook.xml", strings.Replace(workbookXML, "</sheets>", `</sheets><definedNames/>`, 1)),
		"the relationships prefix on the sheet": small.with("xl/workbook.xml", strings.Replace(strings.Replace(workbookXML, ` xmlns:r="`+relTransitional+`"`, "", 1), "<sheet ", `<sheet xmlns:r="`+relTransitional+`" `, 1)),
		"a stray part of the name":              small.with("xl/worksheets/Sheet2.xml", "<x/>"),
	} {
		t.Run(name, func(t *testing.T) {
			b := before.open(t)
			out, saved := write(t, b, Changes{Sheets: newSheets, Recalculate: true})
			after := open(t, out)
			sameEntries(t, b.zip, after.zip, "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "[Content_Types].xml")
			if len(saved.Parts) != 5 || saved.Cells != 0 {
				t.Errorf("saved %+v", saved)
			}
			var names []string
			for _, s := range after.Sheets() {
				names = append(names, s.Name)
			}
			if got, want := strings.Join(names, "|"), "Trips|Trips per depot|O'Brien <2>"; got != want {
				t.Fatalf("sheets %s, want %s", got, want)
			}
			var lines []string
			_, err := after.Scan(1, ScanOptions{}, func(r *Row) error {
				lines = append(lines, render(after.CellText, r))
				return nil
			})
			if got, want := strings.Join(lines, "\n"), "1: A='depot' B='mean'\n3: A='Quay & Mill' B=12.5 C=bool 1 E=-1"; got != want || err != nil {
				t.Errorf("rows\n%s (%v)\nwant\n%s", got, err, want)
			}
			last := after.DefinedNames()[len(after.DefinedNames())-1]
			if want := (DefinedName{"_made", 1, "'Trips per depot'!$A$1", true}); last != want {
				t.Errorf("name %+v, want %+v", last, want)
			}
			// The new sheet can be changed like any other.
			if got, err := after.Changes(1, []Edit{cellEdit("B3", NumberValue(12.5)), cellEdit("A1", TextValue("site"))}); len(got) != 1 || err != nil {
				t.Errorf("changes %v (%v), want one", got, err)
			}
		})
	}
}

// A second reader sees what was written, in a book that it made itself.
func TestSecondReaderReadsWhatIsWritten(t *testing.T) {
	f := excelize.NewFile()
	style, err := f.NewStyle(&excelize.Style{NumFmt: 10, Font: &excelize.Font{Bold: true}})
	if err != nil {
		t.Fatal(err)
	}
	for r := 1; r <= 50; r++ {
		if err := f.SetSheetRow("Sheet1", CellName(r, 1), &[]any{"North", r, float64(r) / 4, r%2 == 0, time.Date(2024, 3, 5, 0, 0, 0, 0, time.UTC)}); err != nil {
			t.Fatal(err)
		}
	}
	for _, err := range []error{f.SetCellStyle("Sheet1", "B2", "B2", style), f.SetCellFormula("Sheet1", "G1", "SUM(B1:B50)"), f.MergeCell("Sheet1", "H1", "I2"), f.AddTable("Sheet1", &excelize.Table{Range: "K1:L3", Name: "trips"})} {
		if err != nil {
			t.Fatal(err)
		}
	}
	buf, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	b := open(t, buf.Bytes())
	if got := b.Tables(); len(got) != 1 || got[0].Name != "trips" || got[0].Range.String() != "K1:L3" || strings.Join(got[0].Columns, ",") != "Column1,Column2" {
		t.Errorf("tables %+v", got)
	}
	facts, err := b.Scan(0, ScanOptions{}, func(r *Row) error {
		if c := r.Cells[4]; r.Number == 2 && (c.Number != 45356 || b.Format(int(c.Style)) != FormatDate || b.Format(int(r.Cells[1].Style)) != FormatPercent) {
			t.Errorf("the date is %+v, of the format %v", c, b.Format(int(c.Style)))
		}
		return nil
	})
	if err != nil || facts.Rows != 50 || facts.Formulas != 1 || facts.Merged.Len() != 1 {
		t.Errorf("facts %+v (%v)", facts, err)
	}
	out, _ := write(t, b, Changes{Sheets: newSheets, Recalculate: true, Edits: map[int][]Edit{0: {cellEdit("B2", NumberValue(0.1234567890123456)), cellEdit("H1", TextValue(" <&>\n_x0041_")), cellEdit("Z60", BoolValue(true)), cellEdit("A3", EmptyValue())}}})
	g, err := excelize.OpenReader(bytes.NewReader(out))
	if err != nil {
		t.Fatal(err)
	}
	for _, test := range []struct{ sheet, cell, want string }{
		{"Sheet1", "B2", "0.1234567890123456"}, {"Sheet1", "H1", " <&>\n_x0041_"}, {"Sheet1", "Z60", "1"}, {"Sheet1", "A3", ""}, {"Sheet1", "A2", "North"}, {"Sheet1", "C50", "12.5"},
		{"Trips per depot", "A3", "Quay & Mill"}, {"Trips per depot", "B3", "12.5"}, {"Trips per depot", "C3", "1"},
	} {
		got, err := g.GetCellValue(test.sheet, test.cell, excelize.Options{RawCellValue: true})
		if err != nil || got != test.want && strings.ReplaceAll(got, "TRUE", "1") != test.want {
			t.Errorf("%s!%s is %q (%v), want %q", test.sheet, test.cell, got, err, test.want)
		}
	}
	if got, err := g.GetCellStyle("Sheet1", "B2"); got != style || err != nil {
		t.Errorf("B2 has the style %d (%v), want %d", got, err, style)
	}
	if got, err := g.GetCellFormula("Sheet1", "G1"); got != "SUM(B1:B50)" || err != nil {
		t.Errorf("G1 has the formula %q (%v)", got, err)
	}
}

func TestWriteRefuses(t *testing.T) {
	small := smallBook(rows(`<row r="1"><c r="A1"><f>1</f></c></row>`))
	locked := small.with("xl/workbook.xml", strings.Replace(workbookXML, "<sheets>", `<workbookProtection lockStructure="1"/><sheets>`, 1))
	sheet := func(n NewSheet) Changes { return Changes{Sheets: []NewSheet{n}} }
	for _, test := range []struct {
		name    string
		book    book
		changes Changes
		want    string
	}{
		{"a formula", small, Changes{Edits: map[int][]Edit{0: {cellEdit("A1", NumberValue(1))}}}, "part xl/worksheets/sheet1.xml: sheet Trips: cell A1: the cell holds a formula; leave it out, or delete the formula first"},
		{"no such sheet", small, Changes{Edits: map[int][]Edit{1: nil}}, "there is no sheet number 2; the book has 1"},
		{"a locked structure", locked, sheet(NewSheet{Name: "A"}), "the book is protected against new sheets; take off the protection of its structure, or name a sheet that it has"},
		{"a taken name", small, sheet(NewSheet{Name: "TRIPS"}), "sheet TRIPS: the book has a sheet of this name; choose another name, or change that sheet"},
		{"two of one name", small, Changes{Sheets: []NewSheet{{Name: "A"}, {Name: "a"}}}, "sheet a: the book has a sheet of this name; choose another name, or change that sheet"},
		{"no name", small, sheet(NewSheet{}), "a sheet's name has 1 to 31 characters; choose another name"},
		{"a long name", small, sheet(NewSheet{Name: strings.Repeat("📦", 16)}), "sheet " + strings.Repeat("📦", 16) + ": a sheet's name has 1 to 31 characters; choose another name"},
		{"a name of forbidden characters", small, sheet(NewSheet{Name: "a/b"}), `sheet a/b: a sheet's name must not hold [ ] : * ? / \, nor start or end with '; choose another name`},
		{"a quoted name", small, sheet(NewSheet{Name: "'a"}), `sheet 'a: a sheet's name must not hold [ ] : * ? / \, nor start or end with '; choose another name`},
		{"a reserved name", small, sheet(NewSheet{Name: "history"}), "sheet history: no sheet may have this name; choose another name"},
		{"a value that is none", small, sheet(NewSheet{Name: "A", Rows: [][]Value{nil, {EmptyValue(), TextValue("\xFF")}}}), "sheet A: cell B2: the text to write is not valid UTF-8; write valid text"},
		{"too many columns", small, sheet(NewSheet{Name: "A", Rows: [][]Value{make([]Value, 16385)}}), "sheet A: row 1 has 16385 columns; a sheet holds 16384; write fewer columns"},
		{"too many rows", small, sheet(NewSheet{Name: "A", Rows: make([][]Value, 1048577)}), "sheet A: the sheet has 1048577 rows; a sheet holds 1048576; write fewer rows"},
	} {
		t.Run(test.name, func(t *testing.T) {
			var out bytes.Buffer
			_, err := test.book.open(t).Write(&out, test.changes)
			wantError(t, err, ErrEdit, "Trips.xlsx: "+test.want)
			if out.Len() > 0 {
				t.Errorf("%d bytes were written", out.Len())
			}
		})
	}
	_, err := small.without("[Content_Types].xml").open(t).Write(io.Discard, sheet(NewSheet{Name: "A"}))
	wantError(t, err, ErrDamaged, "Trips.xlsx: the file has no part for the content types (its relationship leads to nothing)")
}
