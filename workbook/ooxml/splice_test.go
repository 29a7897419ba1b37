package ooxml

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"regexp"
	"strings"
	"testing"
)

func testText(index int) (string, error) {
	return []string{"North", "Quay & Mill", "", " Fell "}[index], nil
}

// splice makes edits, checks that making them again changes nothing, and that
// the result is a sheet.
func splice(t testing.TB, data string, edits ...Edit) (string, int) {
	t.Helper()
	var out, again bytes.Buffer
	changed, err := Splice(&out, strings.NewReader(data), edits, testText)
	if err != nil {
		t.Fatal(err)
	}
	twice, err := Splice(&again, bytes.NewReader(out.Bytes()), edits, testText)
	if err != nil {
		t.Fatal(err)
	}
	if twice != 0 || again.String() != out.String() {
		t.Errorf("the same edits again change %d cells:\n%s\n%s", twice, out.String(), again.String())
	}
	if _, _, err := scanAlike(t, out.Bytes(), ScanOptions{}); err != nil {
		t.Errorf("the result is refused: %v\n%s", err, out.String())
	}
	return out.String(), changed
}

func cellEdit(cell string, v Value) Edit {
	row, col, ok := ParseCell(cell)
	if !ok {
		panic("no cell " + cell)
	}
	return Edit{row, col, v}
}

func TestSpliceWritesCells(t *testing.T) {
	number, text := NumberValue(2.5), TextValue("a<b ")
	const textXML = `<is><t xml:space="preserve">a&lt;b </t></is>`
	for _, test := range []struct {
		name       string
		from, want string // what stands in the worksheet
		edits      []Edit
		changed    int
	}{
		{"a number for a number", `<sheetData><row r="1"><c r="A1" s="3"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="3"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A1", number)}, 1},
		{"a text for a number", `<sheetData><row r="1"><c r="A1" s="3"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="3" t="inlineStr">` + textXML + `</c></row></sheetData>`, []Edit{cellEdit("A1", text)}, 1},
		{"a text for a shared text", `<sheetData><row r="1"><c r="A1" t="s" s="3"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" t="inlineStr" s="3">` + textXML + `</c></row></sheetData>`, []Edit{cellEdit("A1", text)}, 1},
		{"a number for a text", `<sheetData><row r="1"><c r="A1" t="inlineStr" s="3"><is><t>x</t></is></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="3"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A1", number)}, 1},
		{"a number for an error", `<sheetData><row r="1"><c r="A1" t="e"><v>#N/A</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A1", number)}, 1},
		{"yes and no", `<sheetData><row r="1"><c r="A1" s="1"/><c r="B1" t="b"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="1" t="b"><v>1</v></c><c r="B1" t="b"><v>0</v></c></row></sheetData>`, []Edit{cellEdit("A1", BoolValue(true)), cellEdit("B1", BoolValue(false))}, 2},
		{"a cell emptied", `<sheetData><row r="1"><c r="A1" s="3" t="s"><v>1</v></c><c r="B1"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="3"/><c r="B1"/></row></sheetData>`, []Edit{cellEdit("A1", EmptyValue()), cellEdit("B1", TextValue(""))}, 2},
		{"nothing to empty", `<dimension ref="A1"/><sheetData><row r="1"><c r="A1" s="3"/><c r="C1" t="s"><v>2</v></c></row></sheetData>`, `<dimension ref="A1"/><sheetData><row r="1"><c r="A1" s="3"/><c r="C1" t="s"><v>2</v></c></row></sheetData>`, []Edit{cellEdit("A1", EmptyValue()), cellEdit("B1", EmptyValue()), cellEdit("C1", EmptyValue()), cellEdit("A7", EmptyValue())}, 0},
		{"values that are there already", `<sheetData><row r="1"><c r="A1"><v>25E-1</v></c><c r="B1" t="s"><v>1</v></c><c r="C1" t="inlineStr"><is><r><t>a&#60;b</t></r><r><t> </t></r></is></c><c r="D1" t="b"><v>true</v></c><c r="E1" t="str"><v>x</v></c></row></sheetData>`,
			`<sheetData><row r="1"><c r="A1"><v>25E-1</v></c><c r="B1" t="s"><v>1</v></c><c r="C1" t="inlineStr"><is><r><t>a&#60;b</t></r><r><t> </t></r></is></c><c r="D1" t="b"><v>true</v></c><c r="E1" t="str"><v>x</v></c></row></sheetData>`,
			[]Edit{cellEdit("A1", number), cellEdit("B1", TextValue("Quay & Mill")), cellEdit("C1", text), cellEdit("D1", BoolValue(true)), cellEdit("E1", TextValue("x"))}, 0},
		{"values of another type", `<sheetData><row r="1"><c r="A1"><v>1</v></c><c r="B1" t="b"><v>1</v></c><c r="C1" t="inlineStr"><is><t>1</t></is></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" t="b"><v>1</v></c><c r="B1"><v>1</v></c><c r="C1"><v>1</v></c></row></sheetData>`, []Edit{cellEdit("A1", BoolValue(true)), cellEdit("B1", NumberValue(1)), cellEdit("C1", NumberValue(1))}, 3},
		{"cells added to a row", `<sheetData><row r="1" spans="2:4"><c r="B1"><v>1</v></c><c r="D1"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1" spans="2:4"><c r="A1"><v>2.5</v></c><c r="B1"><v>1</v></c><c r="C1"><v>2.5</v></c><c r="D1"><v>1</v></c><c r="E1"><v>2.5</v></c><c r="AB1"><v>2.5</v></c></row></sheetData>`,
			[]Edit{cellEdit("AB1", number), cellEdit("C1", number), cellEdit("A1", number), cellEdit("E1", number)}, 4},
		{"cells added between changed ones", `<sheetData><row r="1"><c r="B1"><v>1</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1"><v>2.5</v></c><c r="B1"><v>2.5</v></c><c r="C1"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A1", number), cellEdit("B1", number), cellEdit("C1", number)}, 3},
		{"a cell added to a row that is one tag", `<sheetData><row r="1" ht="20" /><row r="2"/></sheetData>`, `<sheetData><row r="1" ht="20" ><c r="B1"><v>2.5</v></c><c r="C1"><v>2.5</v></c></row><row r="2"/></sheetData>`, []Edit{cellEdit("B1", number), cellEdit("C1", number)}, 2},
		{"rows added", `<sheetData><row r="3"><c r="A3"><v>1</v></c></row><row r="6"/></sheetData>`, `<sheetData><row r="1"><c r="A1"><v>2.5</v></c></row><row r="2"><c r="B2"><v>2.5</v></c><c r="C2"><v>2.5</v></c></row><row r="3"><c r="A3"><v>1</v></c></row><row r="4"><c r="A4"><v>2.5</v></c></row><row r="6"/><row r="7"><c r="A7"><v>2.5</v></c></row></sheetData>`,
			[]Edit{cellEdit("A7", number), cellEdit("A4", number), cellEdit("C2", number), cellEdit("B2", number), cellEdit("A1", number)}, 5},
		{"rows added to no rows", `<sheetData/><pageMargins/>`, `<sheetData><row r="2"><c r="A2"><v>2.5</v></c></row><row r="3"><c r="A3"><v>2.5</v></c></row></sheetData><pageMargins/>`, []Edit{cellEdit("A2", number), cellEdit("A3", number)}, 2},
		{"rows added to an empty list", `<sheetData></sheetData>`, `<sheetData><row r="2"><c r="A2"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A2", number)}, 1},
		{"the style of the row or the column", `<cols><col min="1" max="2" style="2" width="9"/><col min="4" max="4" width="9"/></cols><sheetData><row r="1" s="4" customFormat="1"/><row r="2" s="4"><c r="A2"/></row></sheetData>`,
			`<cols><col min="1" max="2" style="2" width="9"/><col min="4" max="4" width="9"/></cols><sheetData><row r="1" s="4" customFormat="1"><c r="B1" s="4"><v>2.5</v></c></row><row r="2" s="4"><c r="A2"><v>2.5</v></c><c r="B2" s="2"><v>2.5</v></c><c r="C2"><v>2.5</v></c></row><row r="3"><c r="A3" s="2" t="b"><v>1</v></c><c r="D3"><v>2.5</v></c></row></sheetData>`,
			[]Edit{cellEdit("B1", number), cellEdit("A2", number), cellEdit("B2", number), cellEdit("C2", number), cellEdit("A3", BoolValue(true)), cellEdit("D3", number)}, 6},
		{"the dimension grows", `<dimension ref="B2:C3"/><sheetData><row r="2"><c r="B2"/></row></sheetData>`, `<dimension ref="A2:C5"/><sheetData><row r="2"><c r="A2"><v>2.5</v></c><c r="B2"/></row><row r="5"><c r="C5"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A2", number), cellEdit("C5", number)}, 2},
		{"the dimension does not grow", `<dimension ref="A1:J99"/><sheetData/>`, `<dimension ref="A1:J99"/><sheetData><row r="9"><c r="J9"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("J9", number)}, 1},
		{"a dimension that is none", `<dimension ref=""/><sheetData/>`, `<dimension ref=""/><sheetData><row r="9"><c r="J9"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("J9", number)}, 1},
		{"no references", `<sheetData><row><c><v>1</v></c><c><v>2</v></c></row><row><c><v>3</v></c></row></sheetData>`, `<sheetData><row><c><v>1</v></c><c><v>2.5</v></c><c r="C1"><v>2.5</v></c></row><row><c><v>2.5</v></c></row><row r="3"><c r="B3"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("B1", number), cellEdit("C1", number), cellEdit("A2", number), cellEdit("B3", number)}, 4},
		{"rows and cells out of order", `<sheetData><row r="5"><c r="C5"/><c r="A5"/></row><row r="2"><c r="A2"/></row></sheetData>`, `<sheetData><row r="3"><c r="A3"><v>2.5</v></c></row><row r="5"><c r="B5"><v>2.5</v></c><c r="C5"/><c r="A5"><v>2.5</v></c></row><row r="2"><c r="A2"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A2", number), cellEdit("A3", number), cellEdit("A5", number), cellEdit("B5", number)}, 4},
		{"odd spellings", "<sheetData >\n <row\tr='1' >\n  <c  s='3' r = 'A1' t='s' ><v>0</v>\n  </c ><!-- c -->\n </row >\n</sheetData >", "<sheetData >\n <row\tr='1' >\n  <c  s='3' r = 'A1' ><v>2.5</v>\n  </c ><!-- c -->\n <c r=\"B1\"><v>2.5</v></c></row >\n</sheetData >", []Edit{cellEdit("A1", number), cellEdit("B1", number)}, 2},
		{"what else stands in a cell", `<sheetData><row r="1"><c r="A1" x:k="1" xmlns:x="urn:x" ph="1"><!--a--><v>1</v><extLst><ext><v>1</v></ext></extLst></c><c r="B1"><extLst/></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" x:k="1" xmlns:x="urn:x" ph="1"><!--a--><v>2.5</v><extLst><ext><v>1</v></ext></extLst></c><c r="B1"><v>2.5</v><extLst/></c></row></sheetData>`, []Edit{cellEdit("A1", number), cellEdit("B1", number)}, 2},
		{"metadata of the old value", `<sheetData><row r="1"><c r="A1" cm="1" s="1" vm="2" t="e"><v>#VALUE!</v></c></row></sheetData>`, `<sheetData><row r="1"><c r="A1" s="1"><v>2.5</v></c></row></sheetData>`, []Edit{cellEdit("A1", number)}, 1},
		{"the first cell of a merged range", `<sheetData><row r="1"><c r="A1"/></row></sheetData><mergeCells><mergeCell ref="A1:B2"/></mergeCells>`, `<sheetData><row r="1"><c r="A1"><v>2.5</v></c></row></sheetData><mergeCells><mergeCell ref="A1:B2"/></mergeCells>`, []Edit{cellEdit("A1", number)}, 1},
		{"numbers in shortest form", `<sheetData/>`, `<sheetData><row r="1"><c r="A1"><v>0.30000000000000004</v></c><c r="B1"><v>1E+300</v></c><c r="C1"><v>240</v></c><c r="D1"><v>0</v></c></row></sheetData>`, []Edit{cellEdit("A1", NumberValue(0.30000000000000004)), cellEdit("B1", NumberValue(1e300)), cellEdit("C1", NumberValue(240)), cellEdit("D1", NumberValue(math.Copysign(0, -1)))}, 4},
		{"texts that look like something else", `<sheetData/>`, `<sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>=1+1</t></is></c><c r="B1" t="inlineStr"><is><t>12</t></is></c><c r="C1" t="inlineStr"><is><t>_x005F_x0041_</t></is></c><c r="D1" t="inlineStr"><is><t xml:space="preserve">a
b</t></is></c></row></sheetData>`, []Edit{cellEdit("A1", TextValue("=1+1")), cellEdit("B1", TextValue("12")), cellEdit("C1", TextValue("_x0041_")), cellEdit("D1", TextValue("a\nb"))}, 4},
	} {
		t.Run(test.name, func(t *testing.T) {
			from, want := worksheet(test.from), worksheet(test.want)
			got, changed := splice(t, from, test.edits...)
			if got != want || changed != test.changed {
				t.Errorf("%d cells changed:\n%s\nwant %d\n%s", changed, got, test.changed, want)
			}
			// The same in UTF-16, in strict, and with a prefix.
			for _, order := range []byteOrder{binary.LittleEndian, binary.BigEndian} {
				if got, _ := splice(t, string(toUTF16(from, order)), test.edits...); got != string(toUTF16(want, order)) {
					t.Errorf("%v:\n%s", order, got)
				}
			}
			if !strings.Contains(from, "urn:x") && !strings.Contains(from, "<!--") {
				if got, _ := splice(t, prefixed(from, "x"), test.edits...); got != prefixed(want, "x") {
					t.Errorf("with a prefix:\n%s\nwant\n%s", got, prefixed(want, "x"))
				}
			}
		})
	}
}

func TestSpliceRefuses(t *testing.T) {
	one := NumberValue(1)
	for _, test := range []struct {
		name, from string
		edits      []Edit
		want       string
	}{
		{"a formula", `<sheetData><row r="1"><c r="A1"><f>1</f><v>1</v></c></row></sheetData>`, []Edit{cellEdit("A1", one)}, "cell A1: the cell holds a formula; leave it out, or delete the formula first"},
		{"a follower of a shared formula", `<sheetData><row r="1"><c r="A1"><f t="shared" si="0"/><v>1</v></c></row></sheetData>`, []Edit{cellEdit("A1", EmptyValue())}, "cell A1: the cell holds a formula; leave it out, or delete the formula first"},
		{"the range of an array formula", `<sheetData><row r="1"><c r="A1"><f t="array" ref="A1:A3">1</f><v>1</v></c></row><row r="2"><c r="A2"><v>1</v></c></row></sheetData>`, []Edit{cellEdit("A2", one)}, "cell A2: the cell lies in the range A1:A3 of one array formula; leave it out, or delete the formula first"},
		{"inside a merged range", `<sheetData/><mergeCells><mergeCell ref="D1:E9"/><mergeCell ref="A1:B2"/><mergeCell ref="A3:B3"/></mergeCells>`, []Edit{cellEdit("D1", one), cellEdit("B2", one)}, "cell B2: the cell lies inside the merged range A1:B2; write to its first cell, or unmerge the range"},
		{"deep inside a merged range", `<sheetData/><mergeCells><mergeCell ref="D1:E9"/><mergeCell ref="A2:B2"/></mergeCells>`, []Edit{cellEdit("E9", one)}, "cell E9: the cell lies inside the merged range D1:E9; write to its first cell, or unmerge the range"},
		{"two values for one cell", `<sheetData/>`, []Edit{cellEdit("B2", one), cellEdit("A1", one), cellEdit("B2", one)}, "cell B2: two values are to be written to this cell; write one"},
		{"no such cell", `<sheetData/>`, []Edit{{0, 1, one}}, "there is no cell in row 0, column 1; write to a cell from A1 to XFD1048576"},
		{"no such column", `<sheetData/>`, []Edit{{1, 16385, one}}, "there is no cell in row 1, column 16385; write to a cell from A1 to XFD1048576"},
		{"no number", `<sheetData/>`, []Edit{cellEdit("A1", NumberValue(math.NaN()))}, "cell A1: the number to write is not finite; empty the cell instead"},
		{"infinity", `<sheetData/>`, []Edit{cellEdit("A1", NumberValue(math.Inf(-1)))}, "cell A1: the number to write is not finite; empty the cell instead"},
		{"no text", `<sheetData/>`, []Edit{cellEdit("A1", TextValue("a\xFF"))}, "cell A1: the text to write is not valid UTF-8; write valid text"},
		{"too long a text", `<sheetData/>`, []Edit{cellEdit("A1", TextValue(strings.Repeat("📦", 16384)))}, "cell A1: the text to write has 32768 characters; a cell holds 32767; shorten it"},
	} {
		t.Run(test.name, func(t *testing.T) {
			var out bytes.Buffer
			_, err := Splice(&out, strings.NewReader(worksheet(test.from)), test.edits, testText)
			wantError(t, err, ErrEdit, test.want)
			if out.Len() > 0 {
				t.Errorf("%d bytes were written", out.Len())
			}
		})
	}
	overlapping := `<sheetData/><mergeCells>` + strings.Repeat(`<mergeCell ref="B2:C9"/>`, maxColumns+1) + `</mergeCells>`
	_, err := Splice(io.Discard, strings.NewReader(worksheet(overlapping)), []Edit{cellEdit("A1", one), cellEdit("A5", one)}, nil)
	wantError(t, err, ErrDamaged, "merged ranges or array formulas overlap in row 5")
	_, err = Splice(io.Discard, strings.NewReader(worksheet("")), []Edit{cellEdit("A1", one)}, nil)
	wantError(t, err, ErrDamaged, "the sheet has no place for cells")
	_, err = Splice(io.Discard, strings.NewReader(rows(`<row r="1"/><row r="1"/>`)), []Edit{cellEdit("A1", one)}, nil)
	wantError(t, err, ErrDamaged, "row 1 is given twice")
	failure := errors.New("no strings")
	_, err = Splice(io.Discard, strings.NewReader(rows(`<row r="1"><c r="A1" t="s"><v>0</v></c></row>`)), []Edit{cellEdit("A1", TextValue("x"))}, func(int) (string, error) { return "", failure })
	if err != failure {
		t.Errorf("error %v, want the caller's own", err)
	}
	// Without the shared strings every shared text counts as another.
	changed, err := Splice(io.Discard, strings.NewReader(rows(`<row r="1"><c r="A1" t="s"><v>0</v></c></row>`)), []Edit{cellEdit("A1", TextValue("North"))}, nil)
	if changed != 1 || err != nil {
		t.Errorf("%d cells changed (%v), want 1", changed, err)
	}
}

// Taken apart from the cells that were edited, a spliced sheet is the sheet it
// was made from, byte for byte; and the edited cells hold their values.
func TestSpliceKeepsAllOtherBytes(t *testing.T) {
	random := rand.New(rand.NewPCG(17, 19))
	for round := range 300 {
		var content strings.Builder
		row := 0
		for range random.IntN(12) {
			row += 1 + random.IntN(3)
			fmt.Fprintf(&content, `<row r="%d" ht="%d"`, row, round)
			if random.IntN(4) == 0 {
				content.WriteString("/>")
				continue
			}
			content.WriteString(">")
			col := 0
			for range random.IntN(6) {
				col += 1 + random.IntN(3)
				name := CellName(row, col)
				switch random.IntN(5) {
				case 0:
					fmt.Fprintf(&content, `<c r="%s" s="%d"/>`, name, random.IntN(5))
				case 1:
					fmt.Fprintf(&content, `<c r="%s" s="1" t="s"><v>%d</v></c>`, name, random.IntN(4))
				case 2:
					fmt.Fprintf(&content, `<c r="%s"><v>%d.50</v></c>`, name, random.IntN(3))
				case 3:
					fmt.Fprintf(&content, `<c r="%s" t="inlineStr"><is><t>a &amp; b</t></is></c>`, name)
				default:
					fmt.Fprintf(&content, `<c r="%s" t="b"><v>1</v></c>`, name)
				}
			}
			content.WriteString("</row>")
		}
		from := worksheet(`<dimension ref="C3:D4"/><sheetData>` + content.String() + `</sheetData><pageMargins left="0.7"/>`)
		var edits []Edit
		used := make(map[[2]int]bool)
		for range random.IntN(10) {
			e := Edit{1 + random.IntN(30), 1 + random.IntN(16), [...]Value{NumberValue(1.5), NumberValue(random.NormFloat64()), TextValue("a & b"), TextValue(" x\n"), BoolValue(true), EmptyValue()}[random.IntN(6)]}
			if !used[[2]int{e.Row, e.Col}] {
				used[[2]int{e.Row, e.Col}] = true
				edits = append(edits, e)
			}
		}
		got, _ := splice(t, from, edits...)
		strip := func(s string) string {
			for _, e := range edits {
				name := CellName(e.Row, e.Col)
				s = regexp.MustCompile(`<c r="`+name+`"[^>]*/>|(?s)<c r="`+name+`"[^>]*>.*?</c>`).ReplaceAllString(s, "")
				if !strings.Contains(from, fmt.Sprintf(`<row r="%d"`, e.Row)) {
					s = strings.Replace(s, fmt.Sprintf(`<row r="%d"></row>`, e.Row), "", 1)
				}
			}
			s = strings.ReplaceAll(s, "></row>", "/>")
			return regexp.MustCompile(`<dimension ref="[A-Z0-9:]*"/>`).ReplaceAllString(s, "")
		}
		if strip(got) != strip(from) {
			t.Fatalf("other bytes changed:\n%s\n%s", from, got)
		}
		checkValues(t, got, edits)
	}
}

// checkValues scans a sheet and fails if a cell does not hold its edit's value,
// or if rows or cells are out of order.
func checkValues(t *testing.T, data string, edits []Edit) {
	t.Helper()
	held := make(map[[2]int]Value)
	table := testStrings(t)
	s := newScanner(newLexer(strings.NewReader(data), blockSize, Limits{}.WithDefaults()), ScanOptions{}, nil)
	s.table = func() (*stringTable, error) { return table, nil }
	lastRow := 0
	s.visit = func(r *Row) error {
		if r.Number <= lastRow {
			t.Errorf("row %d follows row %d", r.Number, lastRow)
		}
		lastRow = r.Number
		lastCol := int32(0)
		for _, c := range r.Cells {
			if c.Col <= lastCol {
				t.Errorf("column %d follows column %d", c.Col, lastCol)
			}
			lastCol = c.Col
			at := [2]int{r.Number, int(c.Col)}
			switch c.Type {
			case TypeNumber:
				held[at] = NumberValue(c.Number)
			case TypeBool:
				held[at] = BoolValue(c.Number == 1)
			case TypeShared:
				held[at] = TextValue(table.string(int(c.Index)))
			default:
				held[at] = TextValue(string(c.Text))
			}
		}
		return nil
	}
	if err := s.run(); err != nil {
		t.Fatal(err)
	}
	for _, e := range edits {
		if got := held[[2]int{e.Row, e.Col}]; got != e.Value {
			t.Errorf("cell %s holds %+v, want %+v", CellName(e.Row, e.Col), got, e.Value)
		}
	}
}

func TestChangesAreThoseThatChange(t *testing.T) {
	b := smallBook(rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>1.50</v></c></row>`)).open(t)
	got, err := b.Changes(0, []Edit{cellEdit("B1", NumberValue(2)), cellEdit("A1", TextValue("North")), cellEdit("A2", NumberValue(1)), cellEdit("A3", EmptyValue())})
	if want := []Edit{cellEdit("B1", NumberValue(2)), cellEdit("A2", NumberValue(1))}; err != nil || fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("changes %v (%v), want %v", got, err, want)
	}
	_, err = b.Changes(0, []Edit{{1, 0, Value{}}})
	wantError(t, err, ErrEdit, "Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: there is no cell in row 1, column 0; write to a cell from A1 to XFD1048576")
}
