package ooxml

import (
	"encoding/binary"
	"errors"
	"fmt"
	"strings"
	"testing"
	"unicode/utf16"
)

// toUTF16 writes a text in UTF-16 with a byte-order mark.
func toUTF16(s string, order byteOrder) []byte {
	s = strings.Replace(s, `encoding="UTF-8"`, `encoding="UTF-16"`, 1)
	b := order.AppendUint16(nil, 0xFEFF)
	for _, u := range utf16.Encode([]rune(s)) {
		b = order.AppendUint16(b, u)
	}
	return b
}

// prefixed gives all elements a namespace prefix.
func prefixed(s, prefix string) string {
	return strings.NewReplacer("<?", "<?", "</", "</"+prefix+":", "<", "<"+prefix+":", "xmlns=", "xmlns:"+prefix+"=").Replace(s)
}

// Each of these is a sheet that the format allows and that some program writes
// (ECMA-376 part 1, 18.3.1), or a slip that leaves no doubt about the values.
func TestScanAcceptsEverySpelling(t *testing.T) {
	plainSheet := rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>12.5</v></c></row><row r="2" hidden="1"><c r="B2" s="2"><v>-3e2</v></c></row>`)
	plainRows := "1: A=0'North' B=12.5\n2 hidden: B/2=-300"
	const ns = mainTransitional
	for _, test := range []struct{ name, data, want string }{
		{"as programs write it", plainSheet, plainRows},
		{"strict namespace", strings.ReplaceAll(plainSheet, ns, mainStrict), plainRows},
		{"a prefix", prefixed(plainSheet, "x"), plainRows},
		{"a long prefix", prefixed(plainSheet, "spreadsheet-namespace"), plainRows},
		{"two prefixes of one namespace", xmlHead + `<x:worksheet xmlns:x="` + ns + `" xmlns="` + ns + `"><sheetData><x:row r="1"><c r="A1"><x:v>1</x:v></c></x:row></sheetData></x:worksheet>`, "1: A=1"},
		{"namespace declared on the cells", xmlHead + `<x:worksheet xmlns:x="` + ns + `"><x:sheetData><x:row r="1"><c xmlns="` + ns + `" r="A1"><v>1</v></c></x:row><row xmlns="` + ns + `" r="2"><c r="A2"><v>2</v></c></row></x:sheetData></x:worksheet>`, "1: A=1\n2: A=2"},
		{"elements of other namespaces with the same names", worksheet(`<sheetData xmlns:o="urn:other"><row r="1"><o:c r="A1"><v>9</v></o:c><c r="A1"><o:v>8</o:v><v>1</v></c></row><o:row r="1"><c r="A1"><v>7</v></c></o:row></sheetData><o:sheetData xmlns:o="urn:other"><row r="5"/></o:sheetData>`), "1: A=1"},
		{"a prefix bound anew within the rows", xmlHead + `<worksheet xmlns="` + ns + `"><sheetData><row r="1" xmlns="urn:other"><c r="A1"><v>1</v></c></row><row r="2"><c r="A2"><v>2</v></c></row></sheetData></worksheet>`, "2: A=2"},
		{"single quotes", strings.ReplaceAll(plainSheet, `"`, `'`), plainRows},
		{"byte-order mark", "\uFEFF" + plainSheet, plainRows},
		{"UTF-16, little endian", string(toUTF16(plainSheet, binary.LittleEndian)), plainRows},
		{"UTF-16, big endian", string(toUTF16(plainSheet, binary.BigEndian)), plainRows},
		{"UTF-16 without a mark", string(toUTF16(plainSheet, binary.LittleEndian)[2:]), plainRows},
		{"CDATA", rows(`<row r="1"><c r="A1"><v><![CDATA[5]]></v></c><c r="B1" t="inlineStr"><is><t>a<![CDATA[<&]]>b</t></is></c></row>`), "1: A=5 B='a<&b'"},
		{"character references", rows(`<row r="1"><c r="A1"><v>&#49;&#x2E;5</v></c><c r="B1" t="str"><v>&lt;&gt;&amp;&quot;&apos;&#228;&#x1F4e6;</v></c><c r="&#67;1"><v>3</v></c></row>`), "1: A=1.5 B='<>&\"'ä📦' C=3"},
		{"comments and instructions", rows(`<!-- rows --><row r="1"><?x y?><c r="A1"><!--a--><v>1<!--b-->2</v></c><!-- > --></row>`), "1: A=12"},
		{"spaces in tags", rows("<row  r = \"1\"\n><c\tr=\"A1\"  ><v >1</v ></c ></row\n>"), "1: A=1"},
		{"line breaks and indents", rows("\n  <row r=\"1\">\n    <c r=\"A1\">\n      <v>1</v>\n    </c>\r\n  </row>\n"), "1: A=1"},
		{"numbers with white space", rows("<row r=\"1\"><c r=\"A1\"><v> 1.5\n</v></c><c r=\"B1\" t=\"s\"><v> 0 </v></c></row>"), "1: A=1.5 B=0'North'"},
		{"no references on cells", rows(`<row r="3"><c><v>1</v></c><c/><c><v>3</v></c></row>`), "3: A=1 C=3"},
		{"no references on rows", rows(`<row><c r="A1"><v>1</v></c></row><row r="4"/><row><c><v>5</v></c></row>`), "1: A=1\n4 blank:\n5: A=5"},
		{"the row's number from its cells", rows(`<row><c r="B7"><v>1</v></c></row><row><c><v>2</v></c></row>`), "7: B=1\n8: A=2"},
		{"cells out of order", rows(`<row r="1"><c r="C1"><v>3</v></c><c r="A1"><v>1</v></c><c><v>2</v></c></row>`), "1: C=3 A=1 B=2"},
		{"rows out of order", rows(`<row r="5"><c r="A5"><v>5</v></c></row><row r="2"><c r="A2"><v>2</v></c></row><row><c><v>3</v></c></row>`), "5: A=5\n2: A=2\n3: A=3"},
		{"empty attributes", rows(`<row r="" hidden="" spans=""><c r="A1" s="" t=""><v>1</v></c><c r="" t="s" s="1"><v>0</v></c></row>`), "1: A=1 B/1=0'North'"},
		{"attributes in any order", rows(`<row spans="1:2" ht="15" customHeight="1" r="1"><c t="s" s="2" r="A1"><v>1</v></c></row>`), "1: A/2=1'Quay & Mill'"},
		{"false dimension", worksheet(`<dimension ref="A1"/><sheetData><row r="9"><c r="C9"><v>1</v></c></row></sheetData>`), "9: C=1"},
		{"all attributes of a row", rows(`<row r="1" spans="1:2" s="1" customFormat="1" ht="12.5" hidden="0" customHeight="1" outlineLevel="1" collapsed="1" thickTop="1" thickBot="1" ph="1" x14ac:dyDescent="0.25"><c r="A1"><v>1</v></c></row>`), "1: A=1"},
		{"rows and columns far apart", rows(`<row r="1"><c r="A1"><v>1</v></c><c r="XFD1"><v>2</v></c></row><row r="1048576"><c r="ZZ1048576"><v>3</v></c></row>`), "1: A=1 XFD=2\n1048576: ZZ=3"},
		{"small letters in references", rows(`<row r="1"><c r="ab1"><v>1</v></c></row>`), "1: AB=1"},
		{"blank cells", rows(`<row r="1"><c r="A1" s="1"/><c r="B1"></c><c r="C1"><v/></c><c r="D1"><v></v></c><c r="E1" t="s"><v/></c><c r="F1" t="s"><v>2</v></c><c r="G1" t="inlineStr"><is><t/></is></c><c r="H1" t="str"><v></v></c><c r="I1"><v> </v></c></row>`), "1 blank:"},
		{"a text of spaces", rows(`<row r="1"><c r="A1" t="s"><v>3</v></c><c r="B1" t="inlineStr"><is><t xml:space="preserve">  </t></is></c></row>`), "1: A=3' Fell ' B='  '"},
		{"booleans and errors", rows(`<row r="1"><c r="A1" t="b"><v>1</v></c><c r="B1" t="b"><v>0</v></c><c r="C1" t="b"><v>true</v></c><c r="D1" t="b"><v>false</v></c><c r="E1" t="e"><v>#N/A</v></c><c r="F1" t="e"><v> #DIV/0! </v></c></row>`), "1: A=bool 1 B=bool 0 C=bool 1 D=bool 0 E=error #N/A F=error #DIV/0!"},
		{"ISO dates", rows(`<row r="1"><c r="A1" t="d"><v>2024-03-05</v></c><c r="B1" t="d"><v>2024-03-05T06:00:00</v></c><c r="C1" t="d"><v>12:00:00</v></c><c r="D1" t="d"><v>2024-03-05T06:00:00.000Z</v></c></row>`), "1: A=date 45356 B=date 45356.25 C=time 0.5 D=date 45356.25"},
		{"formulas", rows(`<row r="1"><c r="A1"><f>1+1</f><v>2</v></c><c r="B1"><f>1&lt;2</f></c><c r="C1" t="str"><f>""</f><v></v></c><c r="D1" t="str"><f>"a"</f><v>a</v></c><c r="E1" t="e"><f>1/0</f><v>#DIV/0!</v></c><c r="F1" t="b"><f>1=1</f><v>1</v></c><c r="G1"><f/><v>4</v></c></row>`),
			"1: A=f=2 B=f=unsaved C=f='' D=f='a' E=f=error #DIV/0! F=f=bool 1 G=f=4"},
		{"shared formulas", rows(`<row r="1"><c r="A1"><f t="shared" ref="A1:A3" si="0">B1*2</f><v>2</v></c><c r="B1"><f t="shared" si="0"/><v>4</v></c><c r="C1"><f ca="1">NOW()</f><v>5</v></c><c r="D1"><f t="shared" si="0" ></f><v>6</v></c></row>`), "1: A=f=2 B=f=4 C=f=5 D=f=6"},
		{"a row of formulas with empty texts is blank", rows(`<row r="1"><c r="A1" t="str"><f>IF(1,"")</f><v></v></c></row>`), "1 blank: A=f=''"},
		{"a row of formulas without saved values is not", rows(`<row r="1"><c r="A1"><f>B1</f></c></row>`), "1: A=f=unsaved"},
		{"rich and phonetic text", rows(`<row r="1"><c r="A1" t="inlineStr"><is><r><rPr><b/><t>no</t></rPr><t>Mill</t></r><r><t xml:space="preserve"> two</t></r><rPh sb="0" eb="1"><t>miru</t></rPh><phoneticPr fontId="1"/></is></c></row>`), "1: A='Mill two'"},
		{"escaped characters", rows(`<row r="1"><c r="A1" t="inlineStr"><is><t>a_x000D_b_x005F_x0041__x0041_</t></is></c><c r="B1" t="str"><v>_xD83D__xDCE6_</v></c></row>`), "1: A='a\rb_x0041_A' B='📦'"},
		{"line ends in texts", rows("<row r=\"1\"><c r=\"A1\" t=\"inlineStr\"><is><t>a\r\nb\rc\nd</t></is></c></row>"), "1: A='a\nb\nc\nd'"},
		{"an inline text kept as a value", rows(`<row r="1"><c r="A1" t="inlineStr"><v>abc</v></c></row>`), "1: A='abc'"},
		{"an empty sheet", worksheet(`<sheetData/>`), ""},
		{"no rows", worksheet(``), ""},
		{"unknown elements and attributes", worksheet(`<sheetPr/><o:x xmlns:o="urn:o"><row r="1"/></o:x><sheetData><row r="1" o:k="1" xmlns:o="urn:o"><c r="A1" o:k="2" cm="1"><v>1</v><extLst><ext><v>2</v></ext></extLst></c></row></sheetData><extLst><ext><sheetData><row r="1"/></sheetData></ext></extLst>`), "1: A=1"},
		{"long rows and texts across blocks", rows(`<row r="1"><c r="A1" t="inlineStr"><is><t>` + strings.Repeat("long ", 6000) + `</t></is></c><c r="B1"><v>1</v></c></row>`), "1: A='" + strings.Repeat("long ", 6000) + "' B=1"},
		{"numbers of all sizes", rows(`<row r="1"><c r="A1"><v>0.1</v></c><c r="B1"><v>12345678901234567890</v></c><c r="C1"><v>2.2250738585072014E-308</v></c><c r="D1"><v>1.7976931348623157e308</v></c><c r="E1"><v>-0.000001</v></c><c r="F1"><v>.5</v></c><c r="G1"><v>5.</v></c><c r="H1"><v>+1</v></c><c r="I1"><v>9007199254740993</v></c></row>`),
			"1: A=0.1 B=1.2345678901234567e+19 C=2.2250738585072014e-308 D=1.7976931348623157e+308 E=-1e-06 F=0.5 G=5 H=1 I=9.007199254740992e+15"},
	} {
		t.Run(test.name, func(t *testing.T) {
			got, _, err := scanAlike(t, []byte(test.data), ScanOptions{})
			if err != nil {
				t.Fatal(err)
			}
			if got != test.want {
				t.Errorf("rows\n%s\nwant\n%s", got, test.want)
			}
		})
	}
}

func manyAttributes(n int, name string) string {
	var s strings.Builder
	for i := range n {
		fmt.Fprintf(&s, " "+name+"=''", i)
	}
	return s.String()
}

// A mark ¦ in the data is taken out and stands for the byte that %d in the error
// is to name; without a mark that is the end of the data.
func TestScanRefusesDamage(t *testing.T) {
	for _, test := range []struct{ name, data, want string }{
		{"ends within a row", strings.TrimSuffix(rows(`<row r="1"><c r="A1"><v>1</v></c>`), `</sheetData></worksheet>`), "the XML ends early, after %d bytes"},
		{"ends within a value", xmlHead + `<worksheet xmlns="` + mainTransitional + `"><sheetData><row r="1"><c r="A1"><v>1`, "cell A1: the XML ends early, after %d bytes"},
		{"ends within a tag", xmlHead + `<worksheet xmlns="` + mainTransitional + `"><sheetData><row r="1"><c r="A`, "the XML ends early, after %d bytes"},
		{"ends after the rows", xmlHead + `<worksheet xmlns="` + mainTransitional + `"><sheetData></sheetData>`, "the XML ends early, after %d bytes"},
		{"ends within a comment", worksheet(`<sheetData/>`) + `<!-- `, "the XML ends early, after %d bytes"},
		{"nothing", "", "the XML ends early, after %d bytes"},
		{"a row given twice", rows(`<row r="1"/><row r="2"/><row r="1"/>`), "row 1 is given twice"},
		{"a row met again by counting", rows(`<row r="2"/><row r="1"/><row/>`), "row 2 is given twice"},
		{"a cell given twice", rows(`<row r="4"><c r="B4"><v>1</v></c><c r="B4"><v>1</v></c></row>`), "cell B4: the cell is given twice"},
		{"a cell met again by counting", rows(`<row r="4"><c r="B4"><v>1</v></c><c r="A4"/><c/></row>`), "cell B4: the cell is given twice"},
		{"a cell of another row", rows(`<row r="4"><c r="B5"><v>1</v></c></row>`), "cell B4: a cell with the reference B5 stands in row 4"},
		{"no reference at all", rows(`<row r="4"><c r="4B"><v>1</v></c></row>`), `cell A4: a cell has the reference "4B"`},
		{"a column out of range", rows(`<row r="4"><c r="XFE4"><v>1</v></c></row>`), `cell A4: a cell has the reference "XFE4"`},
		{"a row out of range", rows(`<row r="1048577"/>`), "a row has the number 1048577; rows go from 1 to 1048576"},
		{"row 0", rows(`<row r="0"/>`), "a row has the number 0; rows go from 1 to 1048576"},
		{"a row number that is none", rows(`¦<row r="1a"/>`), `the attribute r is "1a", not a whole number (byte %d)`},
		{"a string index out of range", rows(`<row r="7"><c r="C7" t="s"><v>4</v></c></row>`), "cell C7: the cell points to shared string 4, of 4"},
		{"a string index that is none", rows(`<row r="7"><c r="C7" t="s"><v>-1</v></c></row>`), `cell C7: the cell points to shared string "-1"`},
		{"a style out of range", rows(`<row r="7"><c r="C7" s="5"><v>4</v></c></row>`), "cell C7: the cell points to style 5, of 5"},
		{"an unknown type", rows(`<row r="7"><c r="C7" t="x"><v>4</v></c></row>`), `cell C7: the cell has the type "x", which does not exist`},
		{"a number that is none", rows(`<row r="7"><c r="C7"><v>4,5</v></c></row>`), `cell C7: the cell's value is "4,5", not a number that a cell can hold`},
		{"a number with something after it", rows(`<row r="7"><c r="C7"><v>4-5</v></c></row>`), `cell C7: the cell's value is "4-5", not a number that a cell can hold`},
		{"infinity", rows(`<row r="7"><c r="C7"><v>INF</v></c></row>`), `cell C7: the cell's value is "INF", not a number that a cell can hold`},
		{"a number beyond doubles", rows(`<row r="7"><c r="C7"><v>1e999</v></c></row>`), `cell C7: the cell's value is "1e999", not a number that a cell can hold`},
		{"a hexadecimal number", rows(`<row r="7"><c r="C7"><v>0x10</v></c></row>`), `cell C7: the cell's value is "0x10", not a number that a cell can hold`},
		{"a boolean that is none", rows(`<row r="7"><c r="C7" t="b"><v>2</v></c></row>`), `cell C7: the cell's value is "2", neither true nor false`},
		{"a date that is none", rows(`<row r="7"><c r="C7" t="d"><v>5.3.2024</v></c></row>`), `cell C7: the cell's value is "5.3.2024", not a date in the form 2024-03-05T08:15:00`},
		{"two values", rows(`<row r="7"><c r="C7"><v>1</v><v>2</v></c></row>`), "cell C7: the cell has two values"},
		{"two texts", rows(`<row r="7"><c r="C7" t="inlineStr"><is><t>a</t></is><is/></c></row>`), "cell C7: the cell has two texts"},
		{"two formulas", rows(`<row r="7"><c r="C7"><f>1</f><f/><v>1</v></c></row>`), "cell C7: the cell has two formulas"},
		{"a document type", `¦<!DOCTYPE worksheet [<!ENTITY a "b">]>` + worksheet(`<sheetData/>`), "the part declares a document type (DOCTYPE), which a workbook must not do (byte %d)"},
		{"an unknown entity", rows(`<row r="1"><c r="A1" t="str"><v>¦&a;</v></c></row>`), "cell A1: the reference &a; means nothing in a workbook (byte %d)"},
		{"a reference without an end", rows(`<row r="1"><c r="A1" t="str"><v>¦a & b</v></c></row>`), "cell A1: the text holds an & that starts no reference (byte %d)"},
		{"a reference to no character", rows(`<row r="1"><c r="A1" t="str"><v>¦&#0;</v></c></row>`), "cell A1: the reference &#0; means nothing in a workbook (byte %d)"},
		{"a control character", rows("<row r=\"1\"><c r=\"A1\" t=\"str\"><v>a\x01¦</v></c></row>"), "cell A1: the text holds the control character 0x01 (byte %d)"},
		{"bytes that are not UTF-8", rows("<row r=\"1\"><c r=\"A1\" t=\"str\"><v>a\xFF¦</v></c></row>"), "cell A1: the text is not valid UTF-8 (byte %d)"},
		{"a wrong end tag", rows(`<row r="1"><c r="A1"><v>1¦</c></v></row>`), "cell A1: the end tag </c> does not end <v> (byte %d)"},
		{"an end tag too many", rows(``) + `¦</worksheet>`, "the end tag </worksheet> ends nothing (byte %d)"},
		{"more columns than there are", worksheet(`<cols>` + strings.Repeat(`<col min="1" max="1"/>`, maxColumns) + `¦<col min="1" max="1"/></cols><sheetData/>`), "the sheet describes more than 16384 columns (byte %d)"},
		{"a cell after the last column", rows(`<row r="1"><c r="XFD1"/><c/></row>`), "row 1 has more than 16384 columns"},
		{"a reference of no digits", rows(`<row r="1"><c r="A1" t="str"><v>¦&#x;</v></c></row>`), "cell A1: the reference &#x; means nothing in a workbook (byte %d)"},
		{"a reference of wrong digits", rows(`<row r="1"><c r="A1" t="str"><v>¦&#1A;</v></c></row>`), "cell A1: the reference &#1A; means nothing in a workbook (byte %d)"},
		{"a reference beyond Unicode", rows(`<row r="1"><c r="A1" t="str"><v>¦&#x110000;</v></c></row>`), "cell A1: the reference &#x110000; means nothing in a workbook (byte %d)"},
		{"a CDATA section without an end", strings.TrimSuffix(worksheet("<![CDATA[ >"), "</worksheet>"), "the XML ends early, after %d bytes"},
		{"a CDATA section outside the root", rows("") + `¦<![CDATA[x]]>`, "text stands outside the XML's root element (byte %d)"},
		{"an instruction without an end", rows("") + `<?x >`, "the XML ends early, after %d bytes"},
		{"another declaration", worksheet("¦<!ELEMENT x>"), "a tag starts with <! and is neither a comment nor a CDATA section (byte %d)"},
		{"a tag without a name", worksheet("¦< x>"), "a tag has no name (byte %d)"},
		{"a value of two quotes", strings.TrimSuffix(worksheet("<x a='1\">"), "</worksheet>"), "the XML ends early, after %d bytes"},
		{"a style that is none", rows(`<row r="1">¦<c r="A1" s="x"/></row>`), `cell A1: the attribute s is "x", not a whole number (byte %d)`},
		{"two roots", rows(``) + `¦<worksheet/>`, "the XML has two root elements (byte %d)"},
		{"text after the root", rows(``) + `¦x`, "text stands outside the XML's root element (byte %d)"},
		{"an attribute given twice", rows(`<row r="1">¦<c r="A1" r="A1"/></row>`), "the attribute r is given twice (byte %d)"},
		{"a row's attribute given twice", rows(`¦<row r="1" r="1"/>`), "the attribute r is given twice (byte %d)"},
		{"an attribute without quotes", rows(`¦<row r=1/>`), "the attribute r has no value in quotes (byte %d)"},
		{"attributes without a space", rows(`¦<row r="1"hidden="1"/>`), "the attributes of <row> are not well formed (byte %d)"},
		{"a tag in a tag", rows(`¦<row r="1" <c/>`), "a tag holds another < (byte %d)"},
		{"too many attributes", rows(`¦<row` + manyAttributes(1025, "a%d") + `/>`), "a tag has more than 1024 attributes (byte %d)"},
		{"too many namespaces", rows(`¦<row` + manyAttributes(256, "xmlns:a%d") + `/>`), "more than 256 namespaces are declared at once (byte %d)"},
		{"an attribute given twice among many", rows(`¦<row` + manyAttributes(30, "a%d") + ` a7=""/>`), "the attribute a7 is given twice (byte %d)"},
		{"cells in two places", worksheet(`<sheetData/>¦<sheetData/>`), "the sheet's cells are given in two places (byte %d)"},
		{"another root", xmlHead + `¦<chartsheet xmlns="` + mainTransitional + `"/>`, "the part holds a <chartsheet>, not a worksheet (byte %d)"},
		{"a root of no namespace", `¦<worksheet><sheetData/></worksheet>`, "the part holds a <worksheet>, not a worksheet (byte %d)"},
		{"a foreign encoding", `¦<?xml version="1.0" encoding="windows-1252"?><worksheet/>`, `the part's encoding is "windows-1252"; only UTF-8 and UTF-16 are allowed (byte %d)`},
		{"UTF-32", "\xFF\xFE\x00\x00<\x00\x00\x00", "the part is in UTF-32; only UTF-8 and UTF-16 are allowed"},
		{"half a character of UTF-16", string(toUTF16(rows(""), binary.LittleEndian)) + "\x00", "the part's UTF-16 ends in the middle of a character"},
		{"a lone surrogate", "\xFF\xFE<\x00\x00\xD8>\x00", "the part's UTF-16 has half a character"},
		{"a merged range that is none", worksheet(`<sheetData/><mergeCells>¦<mergeCell ref="A1:"/></mergeCells>`), `a merged range is "A1:" (byte %d)`},
	} {
		t.Run(test.name, func(t *testing.T) {
			data, want := test.data, test.want
			at := strings.Index(data, "¦")
			if at >= 0 {
				data = strings.Replace(data, "¦", "", 1)
			} else {
				at = len(data)
			}
			if strings.Contains(want, "%d") {
				want = fmt.Sprintf(want, at)
			}
			_, _, err := scanAlike(t, []byte(data), ScanOptions{})
			wantError(t, err, ErrDamaged, want)
		})
	}
}

func TestScanLimits(t *testing.T) {
	wide := rows(`<row r="12"><c r="E12"><v>1</v></c><c r="F12" t="inlineStr"><is><t>abcdef</t></is></c></row>`)
	for _, test := range []struct {
		name   string
		limits Limits
		data   string
		want   string
	}{
		{"rows", Limits{Rows: 11}, wide, "the sheet has a row 12, the limit is 11; if the file can be trusted, raise the limit Rows"},
		{"columns", Limits{Columns: 5}, wide, "cell F12: the sheet has a column F, the limit is 5 columns; if the file can be trusted, raise the limit Columns"},
		{"text", Limits{TextLength: 5}, wide, "cell F12: a text has 6 characters, the limit is 5; if the file can be trusted, raise the limit TextLength"},
		{"text counted in UTF-16", Limits{TextLength: 3}, rows(`<row r="1"><c r="A1" t="inlineStr"><is><t>📦📦</t></is></c></row>`), "cell A1: a text has 4 characters, the limit is 3; if the file can be trusted, raise the limit TextLength"},
		{"depth", Limits{Depth: 8}, worksheet(strings.Repeat("<a>", 8) + strings.Repeat("</a>", 8)), "XML elements are nested deeper than 8; if the file can be trusted, raise the limit Depth"},
		{"token", Limits{TokenBytes: 100}, worksheet(`<a b="` + strings.Repeat("x", 2<<20) + `"/>`), "one tag or text is longer than 100 bytes; if the file can be trusted, raise the limit TokenBytes"},
	} {
		t.Run(test.name, func(t *testing.T) {
			opened, err := openBytes(smallBook(test.data).bytes(t), test.limits)
			if err != nil {
				t.Fatal(err)
			}
			_, err = opened.Scan(0, ScanOptions{}, func(*Row) error { return nil })
			want := "Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: " + test.want
			wantError(t, err, ErrLimit, want)
		})
	}
}

func TestScanFacts(t *testing.T) {
	sheet := worksheet(`<sheetProtection sheet="1"/><sheetData>` +
		`<row r="1"><c r="A1" t="s"><v>0</v></c></row>` +
		`<row r="3" hidden="1"><c r="B3"><v>1</v></c></row>` +
		`<row r="4" hidden="true"><c r="Z4" s="1"/></row>` +
		`<row r="6"><c r="C6"><f t="array" ref="C6:C8">A1:A3</f><v>1</v></c><c r="D6"><f>1</f></c></row>` +
		`<row r="7"><c r="C7"><v>1</v></c><c r="E7"><f t="dataTable" ref="E7:F9" dt2D="1" r1="A1" r2="A2"/><v>0</v></c></row>` +
		`</sheetData><autoFilter ref="A1:B$3"/><mergeCells count="2"><mergeCell ref="A1:B2"/><mergeCell ref="D4:D5"/></mergeCells>`)
	_, facts, err := scanAlike(t, []byte(sheet), ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	filter := facts.AutoFilter
	facts.AutoFilter = nil
	want := SheetFacts{Rows: 4, LastRow: 7, LastCol: 5, HiddenRows: 1, Formulas: 3, Protected: true,
		Merged: rangesOf(Range{1, 1, 2, 2}, Range{4, 4, 5, 4}), Arrays: []Range{{6, 3, 8, 3}, {7, 5, 9, 6}}}
	if fmt.Sprintf("%+v", facts) != fmt.Sprintf("%+v", want) {
		t.Errorf("facts\n%+v\nwant\n%+v", facts, want)
	}
	if filter == nil || filter.String() != "A1:B3" {
		t.Errorf("filter %v, want A1:B3", filter)
	}
}

// The caller sees all columns of the first rows and then those it asks for; of
// the others it learns whether they hold anything and the classes of texts.
func TestScanOfChosenColumns(t *testing.T) {
	sheet := rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>1</v></c></row>` +
		`<row r="2"><c r="A2" t="s"><v>1</v></c><c r="B2"><v>2</v></c><c r="C2"><v>3</v></c></row>` +
		`<row r="3"><c r="A3" t="inlineStr"><is><t>total</t></is></c><c r="C3" t="str"><f>1</f><v>sum</v></c></row>` +
		`<row r="4"><c r="A4" s="1"/></row>` +
		`<row r="5"><c r="A5"><v>7</v></c></row>` +
		`<row r="6"><c r="A6" t="s"><v>0</v></c></row>`)
	opened := smallBook(sheet).open(t)
	seen := make(map[string]int)
	columns := AllColumns()
	options := ScanOptions{Columns: columns, Classify: func(text []byte) uint8 {
		seen[string(text)]++
		switch string(text) {
		case "total":
			return 1
		case "sum":
			return 2
		case "North":
			return 128
		}
		return 0
	}}
	var lines []string
	_, err := opened.Scan(0, options, func(r *Row) error {
		lines = append(lines, render(opened.CellText, r))
		if r.Number == 1 {
			columns.Clear()
			columns.Add(2)
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	want := "1 class 128: A=0'North' B=1\n2: B=2\n3 class 3:\n4 blank:\n5:\n6 class 128:"
	if got := strings.Join(lines, "\n"); got != want {
		t.Errorf("rows\n%s\nwant\n%s", got, want)
	}
	for text, n := range seen {
		if n != 1 {
			t.Errorf("%q was classified %d times", text, n)
		}
	}
	// Numbers that nobody wants are held to look like numbers.
	bad := smallBook(rows(`<row r="1"><c r="A1"><v>x</v></c></row>`)).open(t)
	_, err = bad.Scan(0, ScanOptions{Columns: new(Columns)}, func(*Row) error { return nil })
	wantError(t, err, ErrDamaged, `Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: cell A1: the cell's value is "x", not a number that a cell can hold`)
}

func TestScanGivesFormulas(t *testing.T) {
	sheet := rows(`<row r="1"><c r="A1"><f>1&lt;2</f><v>1</v></c><c r="B1"><f t="shared" ref="B1:B2" si="0">A1*2</f><v>2</v></c></row><row r="2"><c r="B2"><f t="shared" si="0"/><v>3</v></c></row>`)
	var got []string
	options := ScanOptions{Formula: func(row, col int, text []byte) {
		got = append(got, CellName(row, col)+" "+string(text))
	}}
	if _, err := smallBook(sheet).open(t).Scan(0, options, func(*Row) error { return nil }); err != nil {
		t.Fatal(err)
	}
	if want := "A1 1<2, B1 A1*2, B2 "; strings.Join(got, ", ") != want {
		t.Errorf("formulas %q, want %q", strings.Join(got, ", "), want)
	}
}

func TestScanStopsAtTheCallersError(t *testing.T) {
	stop := errors.New("enough")
	calls := 0
	_, err := smallBook(rows(`<row r="1"/><row r="2"/>`)).open(t).Scan(0, ScanOptions{}, func(*Row) error {
		calls++
		return stop
	})
	if err != stop || calls != 1 {
		t.Errorf("error %v after %d calls, want the caller's own after 1", err, calls)
	}
}

func TestScanKeepsTextsUntilTheRowEnds(t *testing.T) {
	var content strings.Builder
	for c := 1; c <= 200; c++ {
		fmt.Fprintf(&content, `<c r="%s" t="inlineStr"><is><t>text %d &amp;</t></is></c><c t="str"><v>plain %d</v></c>`, CellName(1, 2*c), c, c)
	}
	data := []byte(rows(`<row r="1">` + content.String() + `</row>`))
	checked := 0
	s := newScanner(newLexer(strings.NewReader(string(data)), 64, Limits{}.WithDefaults()), ScanOptions{}, func(r *Row) error {
		for i, cell := range r.Cells {
			want := fmt.Sprintf("text %d &", i/2+1)
			if i%2 == 1 {
				want = fmt.Sprintf("plain %d", i/2+1)
			}
			if string(cell.Text) != want {
				t.Errorf("cell %d is %q, want %q", i, cell.Text, want)
			}
			checked++
		}
		return nil
	})
	if err := s.run(); err != nil {
		t.Fatal(err)
	}
	if checked != 400 {
		t.Errorf("%d cells, want 400", checked)
	}
}

func rangesOf(list ...Range) Ranges {
	var r Ranges
	for _, a := range list {
		r.add(a)
	}
	return r
}

func TestRangesKeepTheirOrderOverAllPieces(t *testing.T) {
	var r Ranges
	for i := range 3*rangesInPiece + 5 {
		r.add(Range{FirstRow: i})
	}
	want := 0
	for a := range r.All() {
		if a.FirstRow != want {
			t.Fatalf("range %d comes at place %d", a.FirstRow, want)
		}
		want++
	}
	if want != r.Len() || want != 3*rangesInPiece+5 {
		t.Errorf("%d ranges, Len says %d", want, r.Len())
	}
}
