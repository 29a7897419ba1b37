package workbook

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/xml"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/thedatashed/xlsxreader"
	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
	"halfwidth/workbook/ooxml"
)

// wantCells are the values of the result cells of one sheet, by address.
type wantCells map[string]any

// TestFillChangesResultCellsOnly fills the richest book in each of its forms, and
// holds every byte of the outcome against the book.
func TestFillChangesResultCellsOnly(t *testing.T) {
	for _, c := range []struct {
		name    string
		book    richBook
		change  func(parts) parts
		options Options
		readers bool // other libraries can read this form
	}{
		{"a calculation sheet", richBook{}, nil, Options{}, true},
		{"cells that are not there yet", richBook{absent: true}, nil, Options{}, true},
		{"in the rich sheet itself", richBook{within: true}, nil, Options{}, true},
		{"in the rich sheet, cells not there yet", richBook{within: true, absent: true}, nil, Options{}, true},
		{"a table sheet", richBook{table: true}, nil, Options{}, true},
		{"dates from 1904", richBook{date1904: true}, nil, Options{}, true},
		{"strict namespaces", richBook{strict: true, table: true}, nil, Options{}, false},
		{"a prefix", richBook{prefix: "x", table: true}, nil, Options{}, true},
		{"a prefix, cells not there yet", richBook{prefix: "ss", absent: true}, nil, Options{}, true},
		{"no references", richBook{bare: true}, nil, Options{}, false},
		{"no references in the rich sheet itself", richBook{bare: true, within: true}, nil, Options{}, false},
		{"UTF-16", richBook{table: true}, inUTF16, Options{}, false},
		{"bytes before the start", richBook{}, nil, Options{}, true},
	} {
		t.Run(c.name, func(t *testing.T) {
			p := c.book.parts()
			if c.change != nil {
				p = c.change(p)
			}
			data := p.zip(t, "a comment of the file")
			if strings.HasPrefix(c.name, "bytes before") {
				data = append([]byte("#!junk\n"), data...)
			}
			report := fillFaithfully(t, data, ".xlsm", c.options, c.readers)
			var statuses []funcs.Status
			for _, row := range report.Results.Rows {
				statuses = append(statuses, row.Status)
			}
			want := []funcs.Status{funcs.StatusOK, funcs.StatusOK, funcs.StatusOK, funcs.StatusRefused} // miles are no column
			if !slices.Equal(statuses[:4], want) {
				for _, row := range report.Results.Rows {
					t.Log(row.Status, row.Note())
				}
				t.Errorf("statuses %v, want %v", statuses, want)
			}
			// (31.5+35.25+28+41.125+30+33.0625+39.5+36+30.1+40.2+34.3+29.9)/12, by hand
			if mean, _ := report.Results.Rows[0].Outcome.Get("mean"); mean != 408.9375/12 {
				t.Errorf("mean %v, want %v", mean, 408.9375/12)
			}
			if n, _ := report.Results.Rows[1].Outcome.Get("n"); n != 5 {
				t.Errorf("n of North %v, want 5", n)
			}
		})
	}
}

func TestFillOfTheTestBooksChangesResultCellsOnly(t *testing.T) {
	books, err := filepath.Glob("../testdata/workbooks/*.xls[xm]")
	if err != nil || len(books) == 0 {
		t.Fatalf("no books (%v)", err)
	}
	for _, book := range books {
		t.Run(filepath.Base(book), func(t *testing.T) {
			data, err := os.ReadFile(book)
			if err != nil {
				t.Fatal(err)
			}
			fillFaithfully(t, data, filepath.Ext(book), Options{}, true)
		})
	}
}

// inUTF16 turns all parts of SpreadsheetML, and those a table sheet changes, to
// UTF-16.
func inUTF16(p parts) parts {
	for _, name := range []string{typesPart, workbookPart, workbookRels, questionPart, tripsPart, stringsPart, stylesPart} {
		p = p.change(name, func(e *entry) {
			b := []byte{0xFF, 0xFE}
			for _, u := range utf16.Encode([]rune(strings.Replace(e.data, `encoding="UTF-8"`, `encoding="UTF-16"`, 1))) {
				b = append(b, byte(u), byte(u>>8))
			}
			e.data = string(b)
		})
	}
	return p
}

// fillFaithfully fills a book and checks that nothing but its result cells
// changed, that these hold the results to the last digit, and that filling again
// changes nothing.
func fillFaithfully(t *testing.T, data []byte, ext string, o Options, readers bool) *Report {
	t.Helper()
	dir := t.TempDir()
	book, filled := filepath.Join(dir, "book"+ext), filepath.Join(dir, "book-filled"+ext)
	if err := os.WriteFile(book, data, 0o600); err != nil {
		t.Fatal(err)
	}
	report, err := Fill(context.Background(), book, o)
	if err != nil {
		t.Fatal(err)
	}
	if now, err := os.ReadFile(book); err != nil || !bytes.Equal(now, data) {
		t.Fatal("the book itself changed", err)
	}
	after, err := os.ReadFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	file, err := ooxml.Open(book, ooxml.Limits{})
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	results := map[string]wantCells{} // by sheet
	for _, row := range report.Results.Rows {
		for _, e := range row.Edits {
			sheet := row.Row.Sheet()
			if results[sheet] == nil {
				results[sheet] = wantCells{}
			}
			results[sheet][e.Cell.String()] = e.Value
		}
	}
	if len(results) == 0 {
		t.Fatal("no results")
	}
	sheets := map[string]string{} // sheets with results, by part
	for _, s := range file.Sheets() {
		if results[s.Name] != nil {
			sheets[s.Part] = s.Name
		}
	}
	compareZips(t, data, after, func(name, before, after string) {
		switch sheet := sheets[name]; {
		case sheet != "":
			compareSheets(t, before, after, results[sheet])
		case name == typesPart || name == workbookPart || name == workbookRels:
			if report.Saved.Recalculate {
				after = strings.Replace(after, ` fullCalcOnLoad="1"`, "", 1)
			}
			compareAdditions(t, name, before, after)
		default:
			t.Errorf("%s changed", name)
		}
	})
	if readers {
		for sheet, want := range results {
			compareReaders(t, filled, sheet, want)
		}
	}
	again, err := Fill(context.Background(), filled, Options{InPlace: true, Sheets: o.Sheets})
	if err != nil {
		t.Fatal(err)
	}
	if now, err := os.ReadFile(filled); err != nil || !bytes.Equal(now, after) || again.Saved.Path != "" {
		t.Errorf("filling again changed %+v (%v)", again.Saved, err)
	}
	return report
}

// compareZips fails unless both files have the same entries in the same order:
// names, times, comments, extra fields, attributes and packed bytes. changed is
// called with the content of those that differ; entries at the end of after that
// before lacks must be sheets.
func compareZips(t *testing.T, before, after []byte, changed func(name, before, after string)) {
	t.Helper()
	b, err1 := zip.NewReader(bytes.NewReader(before), int64(len(before)))
	a, err2 := zip.NewReader(bytes.NewReader(after), int64(len(after)))
	if err1 != nil || err2 != nil {
		t.Fatal(err1, err2)
	}
	if a.Comment != b.Comment || len(a.File) < len(b.File) {
		t.Fatalf("comment %q, %d entries, want %q and %d", a.Comment, len(a.File), b.Comment, len(b.File))
	}
	for i, f := range b.File {
		g := a.File[i]
		if f.Name == g.Name && f.CRC32 != g.CRC32 {
			x, y := f.FileHeader, g.FileHeader
			if x.Comment != y.Comment || !bytes.HasPrefix(y.Extra, x.Extra) || !x.Modified.Equal(y.Modified) || x.ExternalAttrs != y.ExternalAttrs {
				t.Errorf("%s: the entry is %+v, want %+v", f.Name, y, x)
			}
			changed(f.Name, inflated(t, f), inflated(t, g))
			continue
		}
		if !reflect.DeepEqual(f.FileHeader, g.FileHeader) {
			t.Errorf("%s: the entry is\n%+v, want\n%+v", f.Name, g.FileHeader, f.FileHeader)
		}
		if packedBytes(t, f) != packedBytes(t, g) {
			t.Errorf("%s: the packed bytes changed", f.Name)
		}
	}
	for _, f := range a.File[len(b.File):] {
		if !strings.HasPrefix(f.Name, "xl/worksheets/sheet") {
			t.Errorf("%s was added", f.Name)
		}
	}
}

func inflated(t *testing.T, f *zip.File) string {
	t.Helper()
	r, err := f.Open()
	if err != nil {
		t.Fatal(err)
	}
	return readAll(t, r)
}

func packedBytes(t *testing.T, f *zip.File) string {
	t.Helper()
	r, err := f.OpenRaw()
	if err != nil {
		t.Fatal(err)
	}
	return readAll(t, r)
}

func readAll(t *testing.T, r io.Reader) string {
	t.Helper()
	data, err := io.ReadAll(r)
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

// fromUTF16 gives a text in UTF-8.
func fromUTF16(s string) string {
	if !strings.HasPrefix(s, "\xFF\xFE") {
		return s
	}
	var units []uint16
	for i := 2; i+1 < len(s); i += 2 {
		units = append(units, uint16(s[i])|uint16(s[i+1])<<8)
	}
	return string(utf16.Decode(units))
}

// tokens splits XML into its tokens, as bytes, by the offsets that encoding/xml
// tells.
func tokens(t *testing.T, data string) (list []string, kinds []xml.Token) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(data))
	d.CharsetReader = func(_ string, r io.Reader) (io.Reader, error) { return r, nil }
	for {
		from := d.InputOffset()
		token, err := d.RawToken()
		if err == io.EOF {
			return list, kinds
		}
		if err != nil {
			t.Fatalf("%v in %s", err, data)
		}
		list, kinds = append(list, data[from:d.InputOffset()]), append(kinds, xml.CopyToken(token))
	}
}

// compareAdditions fails unless before is after with some tokens taken out.
func compareAdditions(t *testing.T, name, before, after string) {
	t.Helper()
	b, _ := tokens(t, fromUTF16(before))
	a, _ := tokens(t, fromUTF16(after))
	var added strings.Builder
	i := 0
	for _, token := range a {
		if i < len(b) && token == b[i] {
			i++
			continue
		}
		added.WriteString(token)
	}
	want := map[string]string{typesPart: "Override", workbookPart: "sheetId", workbookRels: "Relationship"}[name]
	if i < len(b) || added.Len() > 0 && !strings.Contains(added.String(), want) {
		t.Errorf("%s is\n%s\nwant, but for additions,\n%s", name, after, before)
	}
}

// sheetCell is a cell as it stands in the XML.
type sheetCell struct {
	style, kind, text string
	formula           bool
}

// cells gives the cells of a sheet, and its XML without some of them and without
// the dimension, whose reference is put under the name "dimension".
func cells(t *testing.T, data string, without wantCells) (map[string]sheetCell, string) {
	t.Helper()
	list, kinds := tokens(t, fromUTF16(data))
	found := map[string]sheetCell{}
	var rest strings.Builder
	row, col, name, in := 0, 0, "", ""
	var cell sheetCell
	for i, kind := range kinds {
		keep := true
		switch token := kind.(type) {
		case xml.StartElement:
			attributes := map[string]string{}
			for _, a := range token.Attr {
				attributes[a.Name.Local] = a.Value
			}
			switch token.Name.Local {
			case "dimension":
				keep = false
				found["dimension"] = sheetCell{text: attributes["ref"]}
			case "row":
				row, col = row+1, 0
				if n, err := strconv.Atoi(attributes["r"]); err == nil {
					row = n
				}
			case "c":
				if col++; attributes["r"] != "" {
					_, col, _ = ooxml.ParseCell(attributes["r"])
				}
				name, cell, in = ooxml.CellName(row, col), sheetCell{style: attributes["s"], kind: attributes["t"]}, ""
			case "extLst":
				in = "ext"
			case "f":
				cell.formula = true
			case "v", "t":
				if in == "" {
					in = token.Name.Local
				}
			}
		case xml.EndElement:
			if token.Name.Local == "c" && name != "" {
				found[name] = cell
				if _, result := without[name]; result {
					keep = false
				}
				name = ""
			} else if in != "ext" {
				in = ""
			}
			if token.Name.Local == "dimension" {
				keep = false
			}
		case xml.CharData:
			if name != "" && (in == "v" || in == "t") {
				cell.text += string(token)
			}
		}
		if _, result := without[name]; keep && !(name != "" && result) {
			rest.WriteString(list[i])
		}
	}
	return found, rest.String()
}

// compareSheets fails unless a sheet changed in its result cells only, which hold
// the results and have kept their styles.
func compareSheets(t *testing.T, before, after string, want wantCells) {
	t.Helper()
	was, rest1 := cells(t, before, want)
	is, rest2 := cells(t, after, want)
	if rest1 != rest2 {
		t.Errorf("beside its results the sheet changed:\n%s\nwant\n%s", rest2, rest1)
	}
	grown, _ := ooxml.ParseRange(was["dimension"].text)
	for name, value := range want {
		if row, col, _ := ooxml.ParseCell(name); value != nil {
			grown = ooxml.Range{FirstRow: min(grown.FirstRow, row), FirstCol: min(grown.FirstCol, col), LastRow: max(grown.LastRow, row), LastCol: max(grown.LastCol, col)}
		}
		old, there := was[name]
		if there && old.style != is[name].style {
			t.Errorf("%s has style %q, want %q", name, is[name].style, old.style)
		}
		if problem := holds(is[name].text, value); problem != "" || is[name].formula {
			t.Errorf("%s: %s %+v", name, problem, is[name])
		}
	}
	if is["dimension"].text != grown.String() {
		t.Errorf("the dimension is %q, want %s", is["dimension"].text, grown)
	}
}

// holds says why a text, as it was read from a file, is not the value.
func holds(text string, value any) string {
	switch v := value.(type) {
	case nil:
		if text != "" {
			return fmt.Sprintf("%q stands there, want nothing", text)
		}
	case string:
		if text != v {
			return fmt.Sprintf("%q stands there, want %q", text, v)
		}
	case bool:
		if text != map[bool]string{true: "1", false: "0"}[v] && !strings.EqualFold(text, fmt.Sprint(v)) {
			return fmt.Sprintf("%q stands there, want %v", text, v)
		}
	default:
		x, err := strconv.ParseFloat(text, 64)
		want := reflect.ValueOf(v).Convert(reflect.TypeFor[float64]()).Float()
		if err != nil || x != want {
			return fmt.Sprintf("%q stands there, want %v", text, v)
		}
	}
	return ""
}

// compareReaders reads the results by two libraries that have nothing in common
// with this package.
func compareReaders(t *testing.T, path, sheet string, want wantCells) {
	t.Helper()
	first, err := xlsxreader.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer first.Close()
	got := map[string]string{}
	for row := range first.ReadRows(sheet) {
		if row.Error != nil {
			t.Fatal(row.Error)
		}
		for _, c := range row.Cells {
			got[fmt.Sprint(c.Column, c.Row)] = c.Value
		}
	}
	second, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer second.Close()
	for name, value := range want {
		if problem := holds(got[name], value); problem != "" {
			t.Errorf("by the first reader, %s: %s", name, problem)
		}
		text, err := second.GetCellValue(sheet, name, excelize.Options{RawCellValue: true})
		if problem := holds(text, value); problem != "" || err != nil {
			t.Errorf("by the second reader, %s: %s (%v)", name, problem, err)
		}
	}
}
