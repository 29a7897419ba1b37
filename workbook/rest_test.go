package workbook

import (
	"bytes"
	"testing"

	"halfwidth/workbook/ooxml"
)

// Of three sheets, cells C2 and C9 of the middle one are edited.
func TestDependenceOfFormulas(t *testing.T) {
	p := plainBook().with(workbookPart, workbookA+`<sheets><sheet name="Trips" r:id="rId1"/><sheet name="Quay's sheet" r:id="rId2"/></sheets>`+
		`<definedNames><definedName name="answer">'Quay''s sheet'!$C$2</definedName><definedName name="built">OFFSET(Trips!$A$1,1,1)</definedName><definedName name="minutes">Trips!$B$2:$B$7</definedName></definedNames></workbook>`).
		with("xl/worksheets/_rels/sheet2.xml.rels", relsA+relation("t", "table", "t")+`</Relationships>`).
		with("xl/worksheets/t", xmlHead+`<table xmlns="`+mainSpace+`" displayName="Asked" ref="A1:B2"><tableColumns><tableColumn name="a"/><tableColumn name="b"/></tableColumns></table>`)
	data := p.zip(t, "")
	file, err := ooxml.OpenReaderAt("book.xlsx", bytes.NewReader(data), int64(len(data)), ooxml.Limits{})
	if err != nil {
		t.Fatal(err)
	}
	d := newDependence(&Book{Book: file}, map[int][]ooxml.Edit{1: {{Row: 2, Col: 3}, {Row: 9, Col: 3}}})
	const trips, quay = 0, 1
	for _, c := range []struct {
		formula string
		on      int
		want    bool
	}{
		{"", trips, false}, // a follower of a shared formula
		{"", quay, true},
		{"C2", trips, false},
		{"C2", quay, true},
		{"$C$2*2", quay, true},
		{"C3", quay, false},
		{"C1:C9", quay, true},
		{"C3:C8", quay, false},
		{"B:B", quay, false},
		{"$B:$D", quay, true},
		{"2:2", quay, true},
		{"$3:$8", quay, false},
		{"B1+SUM(A1,c9)", quay, true},
		{"LOG10(B7)+AC2+C22", quay, false},
		{"1E+2+C2E", quay, false},
		{`"C2"&B1`, quay, false},
		{`"say ""C2"""&B1`, quay, false},
		{"Trips!C2+Trips!C1:C9", quay, false},
		{"'Quay''s sheet'!A1", trips, true},
		{"'Quay''s sheet'!A1", quay, true},
		{"'[2]Quay''s sheet'!A1", trips, false}, // of another workbook
		{"SUM('Fell:Quay''s sheet'!A1)", trips, true},
		{"SUM(Fell:North!A1)", trips, true},
		{"answer+1", trips, true},
		{"ANSWER+1", trips, true},
		{"answers+my.answer+answer_2", trips, false},
		{"built", trips, true},
		{"SUM(minutes)", trips, false},
		{"SUM(asked[b])", trips, true},
		{"SUM(Other[[C2]:['[C2]])+B1", quay, false},
		{`INDIRECT("x"&1)`, trips, true},
		{"OFFSET(A1,1,1)", trips, true},
		{"INDEX(A1:A9,2)", trips, false},
		{"SUM(A1:INDEX(A1:A9,2))", quay, true},
		{"SUM(A1:INDEX(A1:A9,2))", trips, false},
		{"SUM(A1:INDEX(A1:A9,2))+answer", trips, true},
		{"#REF!+Größe", trips, false},
		{"'C2", quay, false}, // not well formed
		{`"C2`, quay, false},
		{"[C2", quay, false},
		{"[C2'", quay, false},
	} {
		if got := d.rests([]byte(c.formula), c.on); got != c.want {
			t.Errorf("%s on sheet %d: %v, want %v", c.formula, c.on, got, c.want)
		}
	}
}
