package workbook

import (
	"archive/zip"
	"bytes"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"halfwidth/workbook/calculation"
)

// A starter's parts are written here and not by the general library, whose
// start-up every run of the command and the server would pay for (6 ms and 1.3
// MB). They follow ECMA-376 part 1: 18.2 workbooks, 18.3 sheets, 18.8 styles.

// look is how a cell looks. Looks rest on weight, borders and greys, so that a
// print without colour tells the same.
type look struct {
	font   font
	border border
	grey   string // of the ground, as RRGGBB
	wrap   bool
	format string // of numbers
}

type (
	font   int
	border int
)

// The fonts and borders, in the order of the styles part.
const (
	plainFont font = iota
	boldFont
	titleFont
)

const (
	noBorder border = iota
	lineBelow
	frameAround
)

const (
	fontXML = `<font><sz val="11"/><name val="Calibri"/><family val="2"/></font>` +
		`<font><b/><sz val="11"/><name val="Calibri"/><family val="2"/></font>` +
		`<font><b/><sz val="13"/><name val="Calibri"/><family val="2"/></font>`
	borderXML = `<border><left/><right/><top/><bottom/><diagonal/></border>` +
		`<border><left/><right/><top/><bottom style="thin"><color rgb="FF404040"/></bottom><diagonal/></border>` +
		`<border><left style="thin"><color rgb="FFBFBFBF"/></left><right style="thin"><color rgb="FFBFBFBF"/></right>` +
		`<top style="thin"><color rgb="FFBFBFBF"/></top><bottom style="thin"><color rgb="FFBFBFBF"/></bottom><diagonal/></border>`
)

// starterPart is one sheet of a starter.
type starterPart struct {
	name         string
	cells        map[calculation.CellRef]*partCell
	widths       map[int]float64 // of columns, in characters
	heights      map[int]float64 // of rows, in points
	notes        []partNote
	frozenCols   int
	frozenRows   int
	pages        int // side by side, on paper
	titleCols    int // columns that stand on each page
	titleRow     int // the row that does
	filtered     string
	lastRow, end int // the last row and column
}

type partCell struct {
	xml  string // the element's content and type; empty for a cell that has a look only
	look int
}

// partNote is a note on the cells of an area, with a list to pick from where it
// has choices.
type partNote struct{ area, title, text, choices string }

func (s *starter) sheet(name string) *starterPart {
	p := &starterPart{name: name, cells: map[calculation.CellRef]*partCell{}, widths: map[int]float64{}, heights: map[int]float64{}}
	s.parts = append(s.parts, p)
	return p
}

func (p *starterPart) cell(col, row int) *partCell {
	at := calculation.CellRef{Row: row, Col: col}
	c := p.cells[at]
	if c == nil {
		c = &partCell{}
		p.cells[at] = c
		p.lastRow, p.end = max(p.lastRow, row), max(p.end, col)
	}
	return c
}

func (p *starterPart) text(col, row int, text string) {
	p.cell(col, row).xml = ` t="inlineStr"><is><t xml:space="preserve">` + escaped(text) + `</t></is></c>`
}

func (p *starterPart) number(col, row int, digits string) {
	p.cell(col, row).xml = `><v>` + digits + `</v></c>`
}

var escaper = strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&quot;")

func escaped(text string) string { return escaper.Replace(text) }

// styleOf gives the index of a look among the styles.
func (s *starter) styleOf(l look) int {
	i := slices.Index(s.looks, l)
	if i < 0 {
		i = len(s.looks)
		s.looks = append(s.looks, l)
	}
	return i
}

// xml writes the part of a sheet.
func (p *starterPart) xml(selected bool) string {
	var b strings.Builder
	b.WriteString(declaration + `<worksheet xmlns="` + sheetSpace + `"><sheetPr><pageSetUpPr fitToPage="1"/></sheetPr>`)
	fmt.Fprintf(&b, `<dimension ref="A1:%s"/><sheetViews><sheetView%s workbookViewId="0">`, calculation.CellRef{Row: p.lastRow, Col: p.end}, map[bool]string{true: ` tabSelected="1"`}[selected])
	p.writePane(&b)
	b.WriteString(`</sheetView></sheetViews><sheetFormatPr defaultRowHeight="15"/><cols>`)
	for col := 1; col <= p.end; col++ {
		if w, ok := p.widths[col]; ok {
			fmt.Fprintf(&b, `<col min="%d" max="%d" width="%g" customWidth="1"/>`, col, col, w)
		}
	}
	b.WriteString(`</cols><sheetData>`)
	for row := 1; row <= p.lastRow; row++ {
		p.writeRow(&b, row)
	}
	b.WriteString(`</sheetData>`)
	if p.filtered != "" {
		fmt.Fprintf(&b, `<autoFilter ref="%s"/>`, p.filtered)
	}
	if len(p.notes) > 0 {
		fmt.Fprintf(&b, `<dataValidations count="%d">`, len(p.notes))
		for _, n := range p.notes {
			kind, list := "", ""
			if n.choices != "" {
				kind, list = ` type="list"`, `<formula1>"`+escaper.Replace(n.choices)+`"</formula1>`
			}
			fmt.Fprintf(&b, `<dataValidation%s allowBlank="1" showInputMessage="1" promptTitle="%s" prompt="%s" sqref="%s">%s</dataValidation>`,
				kind, escaped(n.title), escaped(n.text), n.area, list)
		}
		b.WriteString(`</dataValidations>`)
	}
	fmt.Fprintf(&b, `<pageMargins left="0.5" right="0.5" top="0.6" bottom="0.6" header="0.3" footer="0.3"/>`+
		`<pageSetup paperSize="9" orientation="landscape" pageOrder="overThenDown" fitToWidth="%d" fitToHeight="0"/>`+
		`<headerFooter><oddFooter>&amp;L&amp;A&amp;R&amp;P / &amp;N</oddFooter></headerFooter></worksheet>`, p.pages)
	return b.String()
}

func (p *starterPart) writePane(b *strings.Builder) {
	pane, split := "bottomRight", ""
	if p.frozenCols > 0 {
		split += fmt.Sprintf(` xSplit="%d"`, p.frozenCols)
	} else {
		pane = "bottomLeft"
	}
	if p.frozenRows > 0 {
		split += fmt.Sprintf(` ySplit="%d"`, p.frozenRows)
	} else {
		pane = "topRight"
	}
	if split != "" {
		fmt.Fprintf(b, `<pane%s topLeftCell="%s" activePane="%s" state="frozen"/>`, split, calculation.CellRef{Row: p.frozenRows + 1, Col: p.frozenCols + 1}, pane)
	}
}

func (p *starterPart) writeRow(b *strings.Builder, row int) {
	started := false
	for col := 1; col <= p.end; col++ {
		at := calculation.CellRef{Row: row, Col: col}
		c := p.cells[at]
		if c == nil {
			continue
		}
		if !started {
			started = true
			fmt.Fprintf(b, `<row r="%d"`, row)
			if h, ok := p.heights[row]; ok {
				fmt.Fprintf(b, ` ht="%g" customHeight="1"`, h)
			}
			b.WriteByte('>')
		}
		fmt.Fprintf(b, `<c r="%s"`, at)
		if c.look > 0 {
			fmt.Fprintf(b, ` s="%d"`, c.look)
		}
		if c.xml == "" {
			b.WriteString(`/>`)
		}
		b.WriteString(c.xml)
	}
	if started {
		b.WriteString(`</row>`)
	}
}

// styles writes the part of the looks.
func (s *starter) styles() string {
	var formats, greys []string
	var xfs strings.Builder
	for _, l := range s.looks {
		number, fill := 0, 0
		if l.format != "" {
			number = 164 + indexIn(&formats, l.format) // numbers below are the format's own
		}
		if l.grey != "" {
			fill = 2 + indexIn(&greys, l.grey) // the first two must be none and a pattern
		}
		fmt.Fprintf(&xfs, `<xf numFmtId="%d" fontId="%d" fillId="%d" borderId="%d" xfId="0" applyNumberFormat="1" applyFont="1" applyFill="1" applyBorder="1" applyAlignment="1">`+
			`<alignment vertical="top"%s/></xf>`, number, l.font, fill, l.border, map[bool]string{true: ` wrapText="1"`}[l.wrap])
	}
	var b strings.Builder
	b.WriteString(declaration + `<styleSheet xmlns="` + sheetSpace + `">`)
	if len(formats) > 0 {
		fmt.Fprintf(&b, `<numFmts count="%d">`, len(formats))
		for i, f := range formats {
			fmt.Fprintf(&b, `<numFmt numFmtId="%d" formatCode="%s"/>`, 164+i, escaped(f))
		}
		b.WriteString(`</numFmts>`)
	}
	fmt.Fprintf(&b, `<fonts count="3">%s</fonts><fills count="%d"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill>`, fontXML, 2+len(greys))
	for _, g := range greys {
		fmt.Fprintf(&b, `<fill><patternFill patternType="solid"><fgColor rgb="FF%s"/><bgColor indexed="64"/></patternFill></fill>`, g)
	}
	fmt.Fprintf(&b, `</fills><borders count="3">%s</borders><cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs>`+
		`<cellXfs count="%d">%s</cellXfs><cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles></styleSheet>`, borderXML, len(s.looks), xfs.String())
	return b.String()
}

// indexIn gives the index of a text in a list, to which it is added if need be.
func indexIn(list *[]string, text string) int {
	i := slices.Index(*list, text)
	if i < 0 {
		i = len(*list)
		*list = append(*list, text)
	}
	return i
}

const (
	declaration = `<?xml version="1.0" encoding="UTF-8" standalone="yes"?>` + "\n"
	sheetSpace  = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
	relSpace    = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
	partsSpace  = "http://schemas.openxmlformats.org/package/2006"
	partType    = "application/vnd.openxmlformats-officedocument.spreadsheetml."
)

// pack writes the whole package. Its times are those of no clock.
func (s *starter) pack() ([]byte, error) {
	var sheets, names, rels, types strings.Builder
	parts := [][2]string{}
	for i, p := range s.parts {
		n := strconv.Itoa(i + 1)
		fmt.Fprintf(&sheets, `<sheet name="%s" sheetId="%s" r:id="rId%s"/>`, escaped(p.name), n, n)
		fmt.Fprintf(&rels, `<Relationship Id="rId%s" Type="%s/worksheet" Target="worksheets/sheet%s.xml"/>`, n, relSpace, n)
		fmt.Fprintf(&types, `<Override PartName="/xl/worksheets/sheet%s.xml" ContentType="%sworksheet+xml"/>`, n, partType)
		if p.filtered != "" {
			first, last, _ := strings.Cut(p.filtered, ":")
			fmt.Fprintf(&names, `<definedName name="_xlnm._FilterDatabase" localSheetId="%d" hidden="1">%s!%s:%s</definedName>`, i, p.name, absolute(first), absolute(last))
		}
		if t := p.titles(); t != "" {
			fmt.Fprintf(&names, `<definedName name="_xlnm.Print_Titles" localSheetId="%d">%s</definedName>`, i, t)
		}
		parts = append(parts, [2]string{"xl/worksheets/sheet" + n + ".xml", p.xml(i == 0)})
	}
	fmt.Fprintf(&rels, `<Relationship Id="rId%d" Type="%s/styles" Target="styles.xml"/>`, len(s.parts)+1, relSpace)
	const made = "2026-01-05T08:00:00Z" // any fixed time
	parts = append([][2]string{
		{"[Content_Types].xml", declaration + `<Types xmlns="` + partsSpace + `/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>` +
			`<Default Extension="xml" ContentType="application/xml"/><Override PartName="/xl/workbook.xml" ContentType="` + partType + `sheet.main+xml"/>` + types.String() +
			`<Override PartName="/xl/styles.xml" ContentType="` + partType + `styles+xml"/>` +
			`<Override PartName="/docProps/core.xml" ContentType="application/vnd.openxmlformats-package.core-properties+xml"/></Types>`},
		{"_rels/.rels", declaration + `<Relationships xmlns="` + partsSpace + `/relationships"><Relationship Id="rId1" Type="` + relSpace + `/officeDocument" Target="xl/workbook.xml"/>` +
			`<Relationship Id="rId2" Type="` + partsSpace + `/relationships/metadata/core-properties" Target="docProps/core.xml"/></Relationships>`},
		{"docProps/core.xml", declaration + `<cp:coreProperties xmlns:cp="` + partsSpace + `/metadata/core-properties" xmlns:dc="http://purl.org/dc/elements/1.1/" ` +
			`xmlns:dcterms="http://purl.org/dc/terms/" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"><dc:title>Calculations</dc:title><dc:creator>halfwidth starter</dc:creator>` +
			`<dcterms:created xsi:type="dcterms:W3CDTF">` + made + `</dcterms:created><dcterms:modified xsi:type="dcterms:W3CDTF">` + made + `</dcterms:modified></cp:coreProperties>`},
		{"xl/workbook.xml", declaration + `<workbook xmlns="` + sheetSpace + `" xmlns:r="` + relSpace + `"><bookViews><workbookView activeTab="0"/></bookViews><sheets>` + sheets.String() +
			`</sheets><definedNames>` + names.String() + `</definedNames></workbook>`},
		{"xl/_rels/workbook.xml.rels", declaration + `<Relationships xmlns="` + partsSpace + `/relationships">` + rels.String() + `</Relationships>`},
		{"xl/styles.xml", s.styles()},
	}, parts...)
	var buffer bytes.Buffer
	out := zip.NewWriter(&buffer)
	for _, part := range parts {
		w, err := out.Create(part[0])
		if err != nil {
			return nil, err
		}
		if _, err := w.Write([]byte(part[1])); err != nil {
			return nil, err
		}
	}
	err := out.Close()
	return buffer.Bytes(), err
}

// titles are the columns and the row that stand on each page.
func (p *starterPart) titles() string {
	var list []string
	if p.titleCols > 0 {
		last := strings.TrimRight(calculation.CellRef{Row: 1, Col: p.titleCols}.String(), "1")
		list = append(list, fmt.Sprintf("%s!$A:$%s", p.name, last))
	}
	if p.titleRow > 0 {
		list = append(list, fmt.Sprintf("%s!$%d:$%d", p.name, p.titleRow, p.titleRow))
	}
	return strings.Join(list, ",")
}

// absolute writes a cell's address with its dollar signs.
func absolute(cell string) string {
	letters := strings.TrimRight(cell, "0123456789")
	return "$" + letters + "$" + cell[len(letters):]
}
