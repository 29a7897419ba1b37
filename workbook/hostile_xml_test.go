package workbook

import (
	"fmt"
	"math/rand/v2"
	"strings"
)

const million = 1_000_000

// many writes n pieces that a pattern with one number gives.
func many(n int, pattern string) string {
	var s strings.Builder
	for i := range n {
		fmt.Fprintf(&s, pattern, i)
	}
	return s.String()
}

// nested opens and closes an element so many times.
func nested(depth int) string {
	return strings.Repeat("<a>", depth) + strings.Repeat("</a>", depth)
}

// laughs declares entities that grow to 10^9 when they are put in place.
const laughs = `<!DOCTYPE lolz [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;&a;&a;"><!ENTITY c "&b;&b;&b;&b;&b;&b;&b;&b;&b;&b;"><!ENTITY d "&c;&c;&c;&c;&c;&c;&c;&c;&c;&c;">]>`

// hostileParts are books with a part, other than a sheet, that is made to do harm.
func hostileParts() []hostile {
	plain := plainBook()
	workbook := func(more string) parts { return plain.with(workbookPart, workbookA+bookSheets+more+`</workbook>`) }
	relations := func(list string) parts { return plain.with(workbookRels, relsA+list+`</Relationships>`) }
	styles := func(more string) parts { return plain.with(stylesPart, stylesA+more+`</styleSheet>`) }
	texts := func(more string) parts { return plain.with(stringsPart, sstA+tripStrings+more+`</sst>`) }
	sheets := func(n int) parts {
		list, names, related := plain[:len(plain):len(plain)], bookSheets, bookRels
		for i := range n {
			list = append(list, entry{name: fmt.Sprintf("xl/worksheets/x%d.xml", i), data: worksheetA + `</worksheet>`})
		}
		names = strings.Replace(names, "</sheets>", many(n, `<sheet name="x%d" r:id="x%[1]d"/>`)+`</sheets>`, 1)
		related += many(n, `<Relationship Id="x%d" Type="`+officeSpace+`/worksheet" Target="worksheets/x%[1]d.xml"/>`)
		return list.with(workbookPart, workbookA+names+`</workbook>`).with(workbookRels, relsA+related+`</Relationships>`)
	}
	hidden := strings.Repeat(" ", 16)
	return []hostile{
		{name: "a million shared strings used by none", parts: texts(many(million, `<si><t>text %d</t></si>`))},
		{name: "a shared string of many runs", parts: texts(`<si>` + strings.Repeat(`<r><t></t></r>`, million) + `</si>`)},
		{name: "a shared string of 40,000 characters", parts: texts(`<si><t>` + strings.Repeat("x", 40_000) + `</t></si>`), refused: "the limit is 32767"},
		{name: "a shared string of many short texts", parts: texts(`<si>` + strings.Repeat(`<t>xxxxxxxx</t>`, million) + `</si>`), refused: "the limit is 32767"},
		{name: "shared strings nested deep", parts: texts("<extLst>" + nested(100_000) + "</extLst>"), refused: "nested deeper than 256"},
		{name: "a document type in the shared strings", parts: plain.with(stringsPart, strings.Replace(sstA, "<sst", laughs+"<sst", 1)+tripStrings+`</sst>`), refused: "DOCTYPE"},
		{name: "a document type in the workbook part", parts: plain.with(workbookPart, laughs+`<workbook/>`), refused: "DOCTYPE"},
		{name: "a document type in the relationships", parts: plain.with(rootRels, laughs+`<Relationships/>`), refused: "DOCTYPE"},
		{name: "a million styles", parts: styles(`<cellXfs>` + `<xf/>` + many(million, `<xf numFmtId="14" x="%d"/>`) + `</cellXfs>`)},
		{name: "a million number formats", parts: styles(`<numFmts>` + many(million, `<numFmt numFmtId="%d" formatCode="0"/>`) + `</numFmts>` + bookStyles)},
		{name: "a number format of a million brackets", parts: styles(`<numFmts><numFmt numFmtId="0" formatCode="` + strings.Repeat("[", million) + `"/></numFmts>` + bookStyles)},
		{name: "a number format of a million sections", parts: styles(`<numFmts><numFmt numFmtId="0" formatCode="` + strings.Repeat("0;", million) + `"/></numFmts>` + bookStyles)},
		{name: "styles nested deep", parts: styles(nested(100_000)), refused: "nested deeper than 256"},
		{name: "a million defined names", parts: workbook(`<definedNames>` + many(million, `<definedName name="n%d">Trips!$B$2:$B$7</definedName>`) + `</definedNames>`), refused: "defined names"},
		{name: "as many defined names as may be, and formulas", parts: workbook(`<definedNames>`+many(100_000, `<definedName name="n%d">Trips!$B$2:$B$7</definedName>`)+`</definedNames>`).
			with(tripsPart, worksheetA+`<sheetData>`+tripRows+many(50_000, `<row><c><f>n%d+n1</f><v>1</v></c></row>`)+`</sheetData></worksheet>`)},
		{name: "a question to each of many defined names", parts: workbook(`<definedNames>`+many(150_000, `<definedName name="n%d">Trips!$A$1:$B$7</definedName>`)+`</definedNames>`).
			with(questionPart, strings.Replace(question("minutes in n0"), "</sheetData>", many(3000, `<row><c t="inlineStr"><is><t>mean-interval</t></is></c><c t="inlineStr"><is><t>minutes in n%d</t></is></c></row>`)+"</sheetData>", 1))},
		{name: "questions to none of many defined names", parts: workbook(`<definedNames>`+many(150_000, `<definedName name="n%d">Trips!$A$1:$B$7</definedName>`)+`</definedNames>`).
			with(questionPart, strings.Replace(question("minutes in n0"), "</sheetData>", many(3000, `<row><c t="inlineStr"><is><t>mean-interval</t></is></c><c t="inlineStr"><is><t>minutes in m%d</t></is></c></row>`)+"</sheetData>", 1))},
		{name: "a defined name of a megabyte", parts: workbook(`<definedNames><definedName name="` + strings.Repeat("n", 1<<20) + `">Trips!` + strings.Repeat("$B$2,", 1<<20) + `</definedName></definedNames>`)},
		{name: "thousands of sheets", parts: sheets(9000)},
		{name: "workbook part nested deep", parts: workbook(nested(100_000)), refused: "nested deeper than 256"},
		{name: "a huge attribute", parts: workbook(`<a b="` + strings.Repeat("x", 15<<20) + `"/>`)},
		{name: "an attribute that never ends", parts: plain.with(workbookPart, workbookA+`<a b="`+strings.Repeat("x", 15<<20)), refused: "ends early"},
		{name: "a million attributes", parts: workbook(`<a` + many(million, ` b%d=""`) + `/>`), refused: "attributes"},
		{name: "a million namespaces", parts: workbook(`<a` + many(million, ` xmlns:b%d=""`) + `/>`), refused: "namespaces"},
		{name: "namespaces upon namespaces", parts: workbook(strings.Repeat(`<a`+many(200, ` xmlns:b%d=""`)+`/>`, 3000))},
		{name: "a sheet's name of a megabyte", parts: plain.with(workbookPart, workbookA+strings.Replace(bookSheets, "Trips", strings.Repeat("T", 1<<20), 1)+`</workbook>`), refused: "T"},
		{name: "no content types", parts: plain.without(typesPart)},
		{name: "content types that say otherwise", parts: plain.with(typesPart, xmlHead+`<Types xmlns="`+packSpace+`content-types"/>`)},
		{name: "no relationships of the book", parts: plain.without(rootRels), refused: "no part for the workbook"},
		{name: "no relationships of the workbook part", parts: plain.without(workbookRels), refused: "no part for this sheet"},
		{name: "a million relationships", parts: relations(bookRels + many(million, `<Relationship Id="x%d" Type="x" Target="x"/>`)), refused: "relationships"},
		{name: "relationships that lead out", parts: relations(bookRels + relation("x1", "theme", "../../../../etc/passwd") + relation("x2", "theme", "file:///etc/passwd") + relation("x3", "theme", `\\host\share`))},
		{name: "a sheet that leads out", parts: relations(strings.Replace(bookRels, "worksheets/sheet1.xml", "../../../etc/passwd", 1)), refused: "no part for this sheet"},
		{name: "a sheet that is external", parts: relations(strings.Replace(bookRels, `Target="worksheets/sheet1.xml"`, `Target="worksheets/sheet1.xml" TargetMode="External"`, 1)), refused: "no part for this sheet"},
		{name: "a sheet that is the workbook part", parts: relations(strings.Replace(bookRels, "worksheets/sheet1.xml", "workbook.xml", 1)), refused: "not a worksheet"},
		{name: "a sheet that is the relationships", parts: relations(strings.Replace(bookRels, "worksheets/sheet1.xml", "_rels/workbook.xml.rels", 1)), refused: "not a worksheet"},
		{name: "two sheets of one part", parts: relations(strings.Replace(bookRels, "worksheets/sheet1.xml", "worksheets/sheet2.xml", 1)), refused: "share one part"},
		{name: "shared strings that are a sheet", parts: relations(strings.Replace(bookRels, "sharedStrings.xml", "worksheets/sheet1.xml", 1)), refused: "not shared strings"},
		{name: "two parts of shared strings", parts: relations(bookRels+relation("x", "sharedStrings", "words.xml")).with("xl/words.xml", sstA+tripStrings+`</sst>`), refused: "two parts"},
		{name: "two parts of styles", parts: relations(bookRels+relation("x", "styles", "looks.xml")).with("xl/looks.xml", stylesA+`</styleSheet>`), refused: "two parts"},
		{name: "two workbook parts", parts: plain.with(rootRels, relsA+relation("rId1", "officeDocument", "xl/workbook.xml")+relation("rId2", "officeDocument", "xl/other.xml")+`</Relationships>`).with("xl/other.xml", workbookA+`</workbook>`), refused: "two"},
		{name: "relationships in a circle", parts: plain.with("xl/worksheets/_rels/sheet1.xml.rels", relsA+relation("rId1", "worksheet", "../workbook.xml")+relation("rId2", "table", "sheet1.xml")+`</Relationships>`), refused: "not a table"},
		{name: "a hundred thousand tables", parts: plain.with("xl/worksheets/_rels/sheet1.xml.rels", relsA+many(100_000, `<Relationship Id="t%d" Type="`+officeSpace+`/table" Target="t"/>`)+`</Relationships>`).
			with("xl/worksheets/t", xmlHead+`<table xmlns="`+mainSpace+`" displayName="t" ref="A1:B7"><tableColumns><tableColumn name="depot"/><tableColumn name="minutes"/></tableColumns></table>`), refused: "two tables share"},
		{name: "a table of a million columns", parts: plain.with("xl/worksheets/_rels/sheet1.xml.rels", relsA+relation("t", "table", "t")+`</Relationships>`).
			with("xl/worksheets/t", xmlHead+`<table xmlns="`+mainSpace+`" displayName="t" ref="A1:B7"><tableColumns>`+many(million, `<tableColumn name="c%d"/>`)+`</tableColumns></table>`), refused: "names 1000000 columns"},
		{name: "a part of spaces", parts: plain.with(workbookPart, strings.Repeat(hidden, million)), refused: "ends early"},
		{name: "a part of comments", parts: workbook(strings.Repeat("<!---->", 2*million))},
	}
}

// hostileSheets are books with a sheet that is made to do harm.
func hostileSheets() []hostile {
	plain := plainBook()
	sheet := func(before, rows, after string) parts {
		return plain.with(tripsPart, worksheetA+before+`<sheetData>`+tripRows+rows+`</sheetData>`+after+`</worksheet>`)
	}
	asks := func(sheet, sample string) parts {
		return plain.with(tripsPart, sheet).with(questionPart, question(sample))
	}
	random := rand.New(rand.NewPCG(7, 11))
	merges := func(n int, merge func() string) string {
		var s strings.Builder
		for range n {
			s.WriteString(merge())
		}
		return `<mergeCells>` + s.String() + `</mergeCells>`
	}
	apart := func() string {
		row, col := 10+random.IntN(million), random.IntN(26)
		return fmt.Sprintf(`<mergeCell ref="%c%d:%c%[2]d"/>`, 'A'+col, row, 'A'+min(25, col+1))
	}
	all := func() string { return fmt.Sprintf(`<mergeCell ref="A1:XFD1048576" x="%d"/>`, random.IntN(million)) }
	questions := plain.get(questionPart)
	long := strings.Repeat("x", 33_000)
	return []hostile{
		{name: "a million empty rows", parts: sheet("", many(million, `<row r="%d"/>`)[len(many(8, `<row r="%d"/>`)):], "")},
		{name: "a million empty rows without numbers", parts: sheet("", strings.Repeat(`<row/>`, million), "")},
		{name: "more rows than there are", parts: sheet("", strings.Repeat(`<row/>`, 1_048_576), ""), refused: "rows go from 1 to 1048576"},
		{name: "a million empty rows below the question", parts: plain.with(questionPart, strings.Replace(questions, `</sheetData>`, strings.Repeat(`<row/>`, million)+`</sheetData>`, 1))},
		{name: "a million rows below the question", parts: plain.with(questionPart, strings.Replace(questions, `</sheetData>`, strings.Repeat(`<row><c/><c/><c/><c/><c/><c/><c><v>1</v></c></row>`, million/4)+`</sheetData>`, 1))},
		{name: "only the last cells", parts: asks(worksheetA+`<dimension ref="A1:XFD1048576"/><sheetData>`+lastRows(`<c r="XFD%d"><v>%s</v></c>`)+`</sheetData></worksheet>`, "Trips!XFD1048571:XFD1048576")},
		{name: "only the last cell of a whole column", parts: asks(worksheetA+`<sheetData>`+lastRows(`<c r="XFD%d"><v>%s</v></c>`)+`</sheetData></worksheet>`, "Trips!XFD:XFD")},
		{name: "every column of the first hundred rows", parts: asks(worksheetA+`<sheetData>`+tripRows+strings.Repeat(`<row>`+strings.Repeat(`<c><v>1</v></c>`, 16_384)+`</row>`, 60)+`</sheetData></worksheet>`, "Trips!B2:B7")},
		{name: "a column more than there are", parts: sheet("", `<row>`+strings.Repeat(`<c/>`, 16_385)+`</row>`, ""), refused: "16384 columns"},
		{name: "nested deep", parts: sheet(nested(100_000), "", ""), refused: "nested deeper than 256"},
		{name: "nested deep in a cell", parts: sheet("", `<row><c><extLst>`+nested(100_000)+`</extLst></c></row>`, ""), refused: "nested deeper than 256"},
		{name: "a document type", parts: plain.with(tripsPart, laughs+`<worksheet/>`), refused: "DOCTYPE"},
		{name: "an external entity", parts: sheet("", `<row><c t="str"><v>&passwd;</v></c></row>`, ""), refused: "&passwd; means nothing"},
		{name: "a huge attribute of a cell", parts: sheet("", `<row><c x="`+strings.Repeat("x", 15<<20)+`"/></row>`, "")},
		{name: "a value of 15 MiB", parts: sheet("", `<row><c><v>`+strings.Repeat("1", 15<<20)+`</v></c></row>`, ""), refused: "cell A8"},
		{name: "a text of 33,000 characters", parts: sheet("", `<row><c t="inlineStr"><is><t>`+long+`</t></is></c></row>`, ""), refused: "the limit is 32767"},
		{name: "a text of 15 MiB in the calculation sheet", parts: plain.with(questionPart, strings.Replace(questions, "minutes in", strings.Repeat("x", 15<<20), 1)), refused: "the limit is 32767"},
		{name: "a million merged ranges", parts: sheet("", "", merges(million, apart))},
		{name: "a million merged ranges of the whole sheet", parts: asks(worksheetA+`<sheetData>`+tripRows+many(900_000, `<row x="%d"/>`)+`<row><c/><c><v>1</v></c></row></sheetData>`+merges(million, all)+`</worksheet>`, "Trips!B2:B7"), refused: "overlap"},
		{name: "half a million merged ranges in the calculation sheet", parts: plain.with(questionPart, strings.Replace(questions, "</sheetData>", "</sheetData>"+merges(million/2, apart), 1))},
		{name: "a hundred thousand array formulas of the whole sheet", parts: sheet("", many(100_000, `<row><c><f t="array" ref="A1:XFD1048576">%d</f><v>1</v></c></row>`), ""), refused: "overlap"},
		{name: "a million column styles", parts: sheet(`<cols>`+many(million, `<col min="1" max="16384" style="1" x="%d"/>`)+`</cols>`, "", ""), refused: "more than 16384 columns"},
		{name: "a million column styles of the calculation sheet", parts: plain.with(questionPart, strings.Replace(questions, "<sheetData>", `<cols>`+many(million, `<col min="1" max="16384" style="1" x="%d"/>`)+`</cols><sheetData>`, 1)), refused: "more than 16384 columns"},
		{name: "a million formulas", parts: sheet("", many(million/4, `<row><c><f>SUM(A1:B%d)*"x"+Trips!C2+LOG10(minutes)</f><v>1</v></c></row>`), "")},
		{name: "a formula of a megabyte", parts: sheet("", `<row><c><f>`+strings.Repeat("A1+", 300_000)+`1</f><v>1</v></c></row>`, ""), refused: "the limit is 32767"},
		{name: "a formula of a hundred thousand quotes", parts: sheet("", `<row><c><f>`+strings.Repeat("'", 100_001)+`</f><v>1</v></c></row>`, ""), refused: "the limit is 32767"},
		{name: "a million conditional formats", parts: sheet("", "", many(million/4, `<conditionalFormatting sqref="A%d"><cfRule type="expression"><formula>1</formula></cfRule></conditionalFormatting>`))},
		{name: "texts that are formulas elsewhere", parts: plain.with(stringsPart, sstA+strings.Replace(tripStrings, "Quay", "=cmd|'/c calc'!A1", 1)+`</sst>`)},
	}
}

// get gives the data of a part.
func (p parts) get(name string) string {
	for _, e := range p {
		if e.name == name {
			return e.data
		}
	}
	return ""
}

// lastRows writes the minutes of the six trips into the last six rows.
func lastRows(cell string) string {
	var s strings.Builder
	for i, minutes := range []string{"31.5", "28", "35.5", "30", "33", "36"} {
		fmt.Fprintf(&s, `<row r="%d">`+cell+`</row>`, 1_048_571+i, 1_048_571+i, minutes)
	}
	return s.String()
}
