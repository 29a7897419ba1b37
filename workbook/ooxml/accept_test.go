package ooxml

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"slices"
	"strings"
	"testing"
)

// stylesXML has a plain style and one of dates.
const stylesXML = xmlHead + `<styleSheet xmlns="` + mainTransitional + `"><cellXfs count="2"><xf numFmtId="0"/><xf numFmtId="14"/></cellXfs></styleSheet>`

// wholeBook is a book whose parts each spelling is tried on: its sheet, its
// strings and styles, the workbook part, relationships and content types.
func wholeBook(sheet string) book {
	return smallBook(sheet).with("xl/styles.xml", stylesXML).
		with("xl/_rels/workbook.xml.rels", strings.Replace(workbookRels, "</Relationships>", `<Relationship Id="rId3" Type="`+relTransitional+`/styles" Target="styles.xml"/></Relationships>`, 1))
}

// each gives the book with the data of every part changed.
func (b book) each(change func(string) string) book {
	b = slices.Clone(b)
	for i := range b {
		b[i].data = change(b[i].data)
	}
	return b
}

func replacing(pairs ...string) func(string) string { return strings.NewReplacer(pairs...).Replace }

// TestEveryFormThatMustBeAcceptedIs goes through the list of what a reader must
// accept. Each book is read, changed, and read again; all parts but the sheet
// come out as they went in.
func TestEveryFormThatMustBeAcceptedIs(t *testing.T) {
	const two = `<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>12.5</v></c></row><row r="2"><c r="A2" t="s"><v>1</v></c><c r="B2"><v>-300</v></c></row>`
	const want = "1: A=0'North' B=12.5\n2: A=1'Quay & Mill' B=-300"
	plain := wholeBook(rows(two))
	sheet := func(s string) book { return wholeBook(rows(s)) }
	texts := func(s string) book {
		return plain.with("xl/sharedStrings.xml", xmlHead+`<sst xmlns="`+mainTransitional+`">`+s+`</sst>`)
	}
	renamed := func(names ...string) book {
		list := slices.Clone(plain)
		for i := range list {
			list[i].name = replacing(names...)(list[i].name)
		}
		return list
	}
	spelled := func(s string) string { return strings.ReplaceAll(strings.ReplaceAll(s, `" `, `"   `), `">`, "\" \n>") }
	for _, test := range []struct {
		name string
		book book
		want string // empty for the rows that most forms have
	}{
		{"as programs write it", plain, ""},
		{"any namespace prefix", plain.each(func(s string) string { return strings.ReplaceAll(prefixed(s, "any"), `<any:?`, `<?`) }), ""},
		{"strict namespaces", plain.each(replacing(mainTransitional, mainStrict, relTransitional, relStrict)), ""},
		{"single quotes", plain.each(replacing(`"`, `'`)), ""},
		{"byte-order mark", plain.each(func(s string) string { return "\uFEFF" + s }), ""},
		{"UTF-16, little endian", plain.each(func(s string) string { return string(toUTF16(s, binary.LittleEndian)) }), ""},
		{"UTF-16, big endian", plain.each(func(s string) string { return string(toUTF16(s, binary.BigEndian)) }), ""},
		{"CDATA in the sheet", sheet(`<row r="1"><c r="A1" t="s"><v><![CDATA[0]]></v></c><c r="B1"><v>1<![CDATA[2.]]>5</v></c></row><row r="2"><c r="A2" t="s"><v>1</v></c><c r="B2"><v>-300</v></c></row>`), ""},
		{"CDATA in the shared strings", texts(`<si><t><![CDATA[North]]></t></si><si><t>Quay <![CDATA[&]]> Mill</t></si>`), ""},
		{"character references", plain.each(replacing("12.5", "1&#50;&#x2E;5", ">North<", ">N&#111;rth<", `"A1"`, `"&#65;1"`, `"Trips"`, `"Tri&#x70;s"`, `"xl/workbook.xml"`, `"xl/workboo&#107;.xml"`, `numFmtId="14"`, `numFmtId="&#49;4"`)), ""},
		{"comments", plain.each(replacing("><", "><!-- > <x> --><", "12.5", "12<!---->.5", "Nor", "Nor<!-- t -->")), ""},
		{"processing instructions", plain.each(replacing("><", "><?keep this?><")), ""},
		{"spaces in tags", plain.each(spelled), ""},
		{"spaces around the equals signs", plain.each(replacing(` t="s"`, "\n t\t=  \"s\"", ` Id=`, ` Id = `)), ""},
		{"line breaks between elements", plain.each(replacing("><", ">\r\n  <")), ""},
		{"no r on cells", sheet(replacing(` r="A1"`, "", ` r="B1"`, "", ` r="A2"`, "", ` r="B2"`, "")(two)), ""},
		{"no r on rows", sheet(replacing(`<row r="1"`, "<row", `<row r="2"`, "<row")(two)), ""},
		{"no r at all", sheet(replacing(` r="1"`, "", ` r="2"`, "", ` r="A1"`, "", ` r="B1"`, "", ` r="A2"`, "", ` r="B2"`, "")(two)), ""},
		{"cells out of order", sheet(`<row r="1"><c r="B1"><v>12.5</v></c><c r="A1" t="s"><v>0</v></c></row>`), "1: B=12.5 A=0'North'"},
		{"rows out of order", sheet(`<row r="2"><c r="B2"><v>-300</v></c></row><row r="1"><c r="B1"><v>12.5</v></c></row>`), "2: B=-300\n1: B=12.5"},
		{"empty attributes", sheet(replacing(`<c r`, `<c s="" cm="" ph="" r`, `<row r`, `<row spans="" ht="" hidden="" r`, `"B1"`, `"B1" t=""`)(two)), ""},
		{"absolute part names", plain.with("_rels/.rels", relationsXML("officeDocument", "/xl/workbook.xml")).with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "/xl/worksheets/sheet1.xml", "sharedStrings", "/xl/sharedStrings.xml", "styles", "/xl/styles.xml")), ""},
		{"odd part names", renamed("xl/worksheets/sheet1.xml", "Daten/Größe 1.XML", "xl/sharedStrings.xml", "words").
			with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "../Daten/Gr%C3%B6%C3%9Fe%201.xml", "sharedStrings", "/WORDS", "styles", "./styles.xml")), ""},
		{"backslash names", renamed("/", `\`), ""},
		{"no styles", wholeBook(rows(replacing(`<c `, `<c s="7" `)(two))).without("xl/styles.xml").with("xl/_rels/workbook.xml.rels", workbookRels), "1: A/7=0'North' B/7=12.5\n2: A/7=1'Quay & Mill' B/7=-300"},
		{"no shared strings", wholeBook(rows(`<row r="1"><c r="A1" t="inlineStr"><is><t>North</t></is></c></row>`)).without("xl/sharedStrings.xml").with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml")), "1: A='North'"},
		{"a dimension that is too small", wholeBook(worksheet(`<dimension ref="A1"/><sheetData>` + two + `</sheetData>`)), ""},
		{"a dimension that is too large", wholeBook(worksheet(`<dimension ref="A1:XFD1048576"/><sheetData>` + two + `</sheetData>`)), ""},
		{"a dimension that is none", wholeBook(worksheet(`<dimension ref="all"/><sheetData>` + two + `</sheetData>`)), ""},
		{"data descriptors", plain.change("xl/worksheets/sheet1.xml", func(f *file) { f.descriptor = true }).change("xl/sharedStrings.xml", func(f *file) { f.descriptor = true }), ""},
		{"stored parts", plain.change("xl/worksheets/sheet1.xml", func(f *file) { f.store = true }).change("_rels/.rels", func(f *file) { f.store = true }), ""},
		{"ISO date cells", sheet(`<row r="1"><c r="A1" t="d"><v>2024-03-05T06:00:00</v></c><c r="B1" t="d" s="1"><v>1900-03-01</v></c></row>`), "1: A=date 45356.25 B/1=date 61"},
		{"ISO date cells from 1904", sheet(`<row r="1"><c r="A1" t="d"><v>2024-03-05T06:00:00</v></c><c r="B1" t="d"><v>1904-01-01</v></c></row>`).
			with("xl/workbook.xml", strings.Replace(workbookXML, "<sheets>", `<workbookPr date1904="true"/><sheets>`, 1)), "1: A=date 43894.25 B=date 0"},
		{"shared formulas", sheet(`<row r="1"><c r="A1"><f t="shared" ref="A1:B1" si="0">C1</f><v>1</v></c><c r="B1"><f t="shared" si="0"/><v>2</v></c></row>`), "1: A=f=1 B=f=2"},
		{"rich and phonetic text", texts(`<si><r><rPr><b/><rFont val="x"/></rPr><t>No</t></r><r><t>rth</t></r></si><si><t>Quay &amp; Mill</t><rPh sb="0" eb="4"><t>kei</t></rPh><phoneticPr fontId="1"/></si>`), ""},
		{"alternate content beside the cells", wholeBook(worksheet(`<sheetData>` + two + `</sheetData><mc:AlternateContent xmlns:mc="` + compatibility + `"><mc:Choice Requires="x14"><controls/></mc:Choice><mc:Fallback/></mc:AlternateContent><o:ext xmlns:o="urn:o"><sheetData><row r="1"/></sheetData></o:ext>`)), ""},
		{"texts within what else a sheet has", wholeBook(worksheet(`<sheetData>` + two + `</sheetData><conditionalFormatting sqref="A1"><cfRule><formula>A1&gt;1</formula></cfRule></conditionalFormatting><headerFooter><oddHeader>&amp;P</oddHeader></headerFooter>`)), ""},
		{"a sheet's name with quotes and signs", plain.with("xl/workbook.xml", strings.Replace(workbookXML, `"Trips"`, `"Quay's &quot;night&quot; &lt;&amp;&gt; 📦"`, 1)), ""},
		{"a sheet's name of a thousand characters", plain.with("xl/workbook.xml", strings.Replace(workbookXML, `"Trips"`, `"`+strings.Repeat("Trips", 200)+`"`, 1)), ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			if test.want == "" {
				test.want = want
			}
			b := test.book.open(t)
			if got := scanFirst(t, b); got != test.want {
				t.Fatalf("rows\n%s\nwant\n%s", got, test.want)
			}
			out, _ := write(t, b, Changes{Edits: map[int][]Edit{0: {cellEdit("C9", NumberValue(0.1))}}})
			after := open(t, out)
			if got, want := scanFirst(t, after), test.want+"\n9: C=0.1"; got != want {
				t.Errorf("after a change the rows are\n%s\nwant\n%s", got, want)
			}
			sameEntries(t, b.zip, after.zip, b.Sheets()[0].Part)
		})
	}
}

// What stands in a cell, and what it is read as.
func TestValuesAreReadAsTheyStand(t *testing.T) {
	for _, test := range []struct{ cell, want string }{
		{`<c r="A1"><v>1e-400</v></c>`, "1: A=0"},
		{`<c r="A1"><v>-0</v></c>`, "1: A=-0"},
		{`<c r="A1"><v>4.9406564584124654E-324</v></c>`, "1: A=5e-324"},
		{`<c r="A1"><v>0.30000000000000004</v></c>`, "1: A=0.30000000000000004"},
		{`<c r="A1"><v>000012</v></c>`, "1: A=12"},
		{`<c r="A1" s="1"><v>0</v></c><c r="B1" s="1"><v>60</v></c><c r="C1" s="1"><v>-1</v></c>`, "1: A/1=0 B/1=60 C/1=-1"},
		{`<c r="A1" t="d"><v>2024-03-05T08:15:00+02:00</v></c>`, "1: A=date 45356.34375"},
		{`<c r="A1" t="d"><v>1899-12-31</v></c>`, "1: A=date 0"},
		{`<c r="A1" t="d"><v>1899-12-30T06:00:00</v></c>`, "1: A=date 0.25"},
		{`<c r="A1" t="d"><v>06:00:00</v></c>`, "1: A=time 0.25"},
		{`<c r="A1" t="e"><v>#SPILL!</v></c><c r="B1" t="e"><f>1/0</f><v>#DIV/0!</v></c>`, "1: A=error #SPILL! B=f=error #DIV/0!"},
		{`<c r="A1" t="str"><v xml:space="preserve"> a </v></c><c r="B1" t="inlineStr"><is><t> b </t></is></c>`, "1: A=' a ' B=' b '"},
		{`<c r="A1" t="str"><v>&#x1F4E6;` + "\U0001F4E6" + `_xD83D__xDCE6_</v></c>`, "1: A='📦📦📦'"},
		{`<c r="A1" t="str"><v>a_x000D_</v></c><c r="B1" t="str"><v>_x0000_</v></c>`, "1: A='a\r' B='\x00'"},
		{`<c r="A1" t="str"><v>=1+1</v></c><c r="B1" t="inlineStr"><is><t>-1</t></is></c>`, "1: A='=1+1' B='-1'"},
		{`<c r="A1" t="s"><v/></c><c r="B1"><v/></c><c r="C1" t="b"><v/></c><c r="D1" t="e"><v/></c><c r="E1" t="d"><v/></c>`, "1 blank:"},
		{`<c r="XFD1" t="b"><v>true</v></c>`, "1: XFD=bool 1"},
	} {
		got, _, err := scanAlike(t, []byte(rows(`<row r="1">`+test.cell+`</row>`)), ScanOptions{})
		if got != test.want || err != nil {
			t.Errorf("%s is read as %q (%v), want %q", test.cell, got, err, test.want)
		}
	}
}

// A sheet as wide as there are columns, and rows of a style each.
func TestVeryManyColumnsAreRead(t *testing.T) {
	var row, want strings.Builder
	want.WriteString("1:")
	for col := 1; col <= maxColumns; col++ {
		fmt.Fprintf(&row, `<c r="%s"><v>%d</v></c>`, CellName(1, col), col)
		fmt.Fprintf(&want, " %s=%d", ColumnName(col), col)
	}
	b := smallBook(rows(`<row r="1">` + row.String() + `</row>`)).open(t)
	if got := scanFirst(t, b); got != want.String() {
		t.Error("columns are not as written")
	}
	out, _ := write(t, b, Changes{Edits: map[int][]Edit{0: {cellEdit("XFD2", TextValue("last"))}}})
	if got := scanFirst(t, open(t, out)); got != want.String()+"\n2: XFD='last'" {
		t.Error("columns are not as written after a change")
	}
	if !bytes.Contains(out, []byte("xl/worksheets/sheet1.xml")) {
		t.Error("the sheet is gone")
	}
}
