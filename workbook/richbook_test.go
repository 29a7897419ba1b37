package workbook

import (
	"fmt"
	"regexp"
	"strings"
)

// richBook says in which of its forms a test wants the rich book: a book with a
// part or an element of every kind that programs write, written part by part.
type richBook struct {
	prefix   string // of SpreadsheetML's elements
	strict   bool   // in the strict namespaces
	date1904 bool
	bare     bool // no references on rows and cells
	within   bool // the calculation stands in the rich sheet itself
	table    bool // one row asks for a table sheet
	absent   bool // the result cells are not there yet
}

const (
	strictMain   = "http://purl.oclc.org/ooxml/spreadsheetml/main"
	strictOffice = "http://purl.oclc.org/ooxml/officeDocument/relationships"
)

// form turns a part as most programs write it into the form wanted.
func (v richBook) form(part string) string {
	if v.bare {
		part = regexp.MustCompile(`<(row|c) r="[A-Z]*[0-9]+"`).ReplaceAllString(part, "<$1")
	}
	if v.prefix != "" {
		part = regexp.MustCompile(`<(/?)(\w+)([\s/>])`).ReplaceAllString(part, "<${1}"+v.prefix+":$2$3")
		part = strings.Replace(part, ` xmlns="`+mainSpace, ` xmlns:`+v.prefix+`="`+mainSpace, 1)
	}
	if v.strict {
		part = strings.NewReplacer(mainSpace, strictMain, officeSpace, strictOffice).Replace(part)
	}
	return part
}

// spaces declares what the rich parts use besides SpreadsheetML.
const spaces = ` xmlns:r="` + officeSpace + `" xmlns:mc="http://schemas.openxmlformats.org/markup-compatibility/2006" mc:Ignorable="x14ac xr"` +
	` xmlns:x14ac="http://schemas.microsoft.com/office/spreadsheetml/2009/9/ac" xmlns:xr="http://schemas.microsoft.com/office/spreadsheetml/2014/revision"` +
	` xmlns:x14="http://schemas.microsoft.com/office/spreadsheetml/2009/9/main" xmlns:xm="http://schemas.microsoft.com/office/excel/2006/main"`

// richWords are the shared strings, by their index.
var richWords = []string{"<t>depot</t>", "<t>minutes</t>", "<t>date</t>", "<t>on-time</t>", "<t>hours</t>", "<t>North</t>", "<t>Quay</t>", "<t>Mill</t>",
	`<r><rPr><b/><sz val="11"/><color theme="1"/></rPr><t>Larkmoor</t></r><r><t xml:space="preserve"> Parcels</t></r>`,
	`<t>課</t><rPh sb="0" eb="1"><t>か</t></rPh><phoneticPr fontId="1"/>`, `<t xml:space="preserve"> spaces &amp; _x000D_ escapes </t>`}

// richTrips are the rows of the data: depot, minutes, on time.
var richTrips = []struct {
	depot   int // by richWords
	minutes string
	onTime  int
}{{5, "31.5", 1}, {6, "35.25", 0}, {5, "28", 1}, {7, "41.125", 0}, {6, "30", 1}, {5, "33.0625", 1}, {7, "39.5", 0}, {6, "36", 1}, {5, "30.1", 1}, {7, "40.2", 1}, {6, "34.3", 0}, {5, "29.9", 1}}

// tripsFrom is the row of the first trip, below a title and the header.
const tripsFrom = 4

// richRow writes a row of the data sheet: A to F, with cells of every type.
func (v richBook) richRow(row int, block string) string {
	cell := func(col, attributes, content string) string {
		return fmt.Sprintf(`<c r="%s%d"%s>%s</c>`, col, row, attributes, content)
	}
	var s string
	attributes := ` spans="1:6" x14ac:dyDescent="0.25"`
	switch at := row - tripsFrom; {
	case row == 1:
		s = cell("A", ` s="1" t="s"`, "<v>8</v>")
		if v.within {
			s = cell("A", ` s="1" t="inlineStr"`, "<is><t>calculation sheet</t></is>")
		}
		s += `<c r="B1" s="1"/><c r="C1" s="1"/><c r="D1" s="1"/><c r="E1" s="1"/><c r="F1" s="1"/>`
		attributes += ` ht="30" customHeight="1"`
	case row == 2:
		s = cell("A", ` t="s"`, "<v>9</v>") + cell("B", ` t="s"`, "<v>10</v>") + cell("C", ` t="e"`, "<v>#N/A</v>") +
			cell("D", ` t="str"`, `<f>A2&amp;"x"</f><v>課x</v>`) + cell("E", "", `<f t="array" ref="E2">SUM(1*{1,2})</f><v>3</v>`) + cell("F", "", "<f>TODAY()</f>")
	case row == 3:
		for i, col := range []string{"A", "B", "C", "D", "E"} {
			s += cell(col, ` s="2" t="s"`, fmt.Sprintf("<v>%d</v>", i))
		}
		s += `<c r="F3"/>`
	case at < len(richTrips):
		trip := richTrips[at]
		formula := `<f t="shared" si="0"/>`
		if at == 0 {
			formula = fmt.Sprintf(`<f t="shared" ref="E%d:E%d" si="0">B%[1]d/60</f>`, tripsFrom, tripsFrom+len(richTrips)-1)
		}
		s = cell("A", ` t="s"`, fmt.Sprintf("<v>%d</v>", trip.depot)) + cell("B", ` s="3"`, "<v>"+trip.minutes+"</v>") +
			cell("C", ` s="4"`, fmt.Sprintf("<v>%d</v>", 46000+at)) + cell("D", ` t="b"`, fmt.Sprintf("<v>%d</v>", trip.onTime)) +
			cell("E", "", formula+"<v>0.5</v>") + `<c r="F` + fmt.Sprint(row) + `" s="5"/>`
		if at == 3 {
			attributes += ` hidden="1"`
		}
	}
	return fmt.Sprintf(`<row r="%d"%s>%s%s</row>`, row, attributes, s, block)
}

// richAsked is the calculation: a header and rows of it. A result that starts
// with = stands in the book already; the others are to be added.
func (v richBook) asked() [][]string {
	rows := [][]string{
		{"work out", "label", "sample", "> mean", "> lower", "> upper", "> n", "> status", "> note", "> sentence"},
		{"mean-interval", "all", "minutes in Deliveries"},
		{"mean-interval", "North", "minutes in Deliveries where depot = North"},
		{"mean-interval", "=1+1", "minutes in Deliveries where on-time = yes"},
		{"mean-interval", "refused", "miles in Deliveries"},
	}
	if v.table {
		rows[0] = append(rows[0], "table sheet")
		rows = append(rows, []string{"mean-interval", "each", "minutes in Deliveries for each depot", "", "", "", "", "", "", "", "By depot"})
	}
	return rows
}

// block writes the cells of one row of the calculation from a column on.
func (v richBook) block(line, row int, from int) string {
	lines := v.asked()
	if line < 0 || line >= len(lines) {
		return ""
	}
	var s strings.Builder
	for i := range lines[0] {
		name, text := fmt.Sprintf("%c%d", 'A'+from+i, row), ""
		if i < len(lines[line]) {
			text = lines[line][i]
		}
		result := line > 0 && strings.HasPrefix(lines[0][i], "> ")
		escaped := strings.NewReplacer("<", "&lt;", ">", "&gt;").Replace(text)
		switch {
		case result && v.absent:
		case result && i == 3 && line == 1: // an older number, with what else a cell may hold
			fmt.Fprintf(&s, `<c r="%s" s="3" cm="1"><v>99</v><extLst><ext uri="{2}"><x14:id>7</x14:id></ext></extLst></c>`, name)
		case result && i == 7: // an older text
			fmt.Fprintf(&s, `<c r="%s" s="2" t="s"><v>9</v></c>`, name)
		case result:
			fmt.Fprintf(&s, `<c r="%s" s="%d"/>`, name, i%4)
		case text == "":
			fmt.Fprintf(&s, `<c r="%s"/>`, name)
		default:
			fmt.Fprintf(&s, `<c r="%s" s="%d" t="inlineStr"><is><t>%s</t></is></c>`, name, min(line, 1)+1, escaped)
		}
	}
	return s.String()
}

// tripsSheet is the rich sheet.
func (v richBook) tripsSheet() string {
	var rows strings.Builder
	for row := 1; row < tripsFrom+len(richTrips); row++ {
		block := ""
		if v.within {
			block = `<c r="` + fmt.Sprintf("G%d", row) + `"/>` + v.block(row-tripsFrom, row, 7)
		}
		rows.WriteString(v.richRow(row, block) + "\n")
	}
	return xmlHead + `<worksheet xmlns="` + mainSpace + `"` + spaces + `><sheetPr codeName="Sheet1"><tabColor rgb="FF00B050"/><pageSetUpPr fitToPage="1"/></sheetPr>` +
		`<dimension ref="A1:F15"/><sheetViews><sheetView workbookViewId="0"><pane xSplit="1" ySplit="3" topLeftCell="B4" activePane="bottomRight" state="frozen"/><selection pane="bottomRight" activeCell="B4" sqref="B4"/></sheetView></sheetViews>` +
		`<sheetFormatPr defaultRowHeight="15" x14ac:dyDescent="0.25"/><cols><col min="1" max="1" width="12.5" customWidth="1"/><col min="3" max="3" width="11" style="4" hidden="1" outlineLevel="1"/></cols>` +
		`<sheetData>` + rows.String() + `</sheetData>` +
		`<sheetProtection algorithmName="SHA-512" hashValue="q8Qm" saltValue="c2Fs" spinCount="100000" sheet="1" objects="1" scenarios="1"/>` +
		`<protectedRanges><protectedRange sqref="F4:F9" name="notes"/></protectedRanges><mergeCells count="1"><mergeCell ref="A1:F1"/></mergeCells><phoneticPr fontId="1"/>` +
		`<conditionalFormatting sqref="B4:B15"><cfRule type="dataBar" priority="1"><dataBar><cfvo type="min"/><cfvo type="max"/><color rgb="FF638EC6"/></dataBar><extLst><ext uri="{B025F937-C7B1-47D3-B67F-A62EFF666E3E}"><x14:id>{1}</x14:id></ext></extLst></cfRule></conditionalFormatting>` +
		`<dataValidations count="1"><dataValidation type="list" allowBlank="1" sqref="A4:A15"><formula1>"North,Quay,Mill"</formula1></dataValidation></dataValidations>` +
		`<hyperlinks><hyperlink ref="A4" r:id="rId9" tooltip="a &amp; b"/><hyperlink ref="A5" location="Trips!A1"/></hyperlinks><printOptions gridLines="1"/>` +
		`<pageMargins left="0.7" right="0.7" top="0.75" bottom="0.75" header="0.3" footer="0.3"/><pageSetup paperSize="9" orientation="landscape" r:id="rId1"/>` +
		`<headerFooter differentFirst="1"><oddHeader>&amp;L&amp;"Calibri,Bold"Larkmoor&amp;RPage &amp;P</oddHeader></headerFooter><rowBreaks count="1" manualBreakCount="1"><brk id="9" max="16383" man="1"/></rowBreaks>` +
		`<ignoredErrors><ignoredError sqref="A1" numberStoredAsText="1"/></ignoredErrors><drawing r:id="rId2"/><legacyDrawing r:id="rId3"/>` +
		`<mc:AlternateContent><mc:Choice Requires="x14"><controls><control shapeId="1025" r:id="rId8" name="Button 1"/></controls></mc:Choice><mc:Fallback/></mc:AlternateContent>` +
		`<tableParts count="1"><tablePart r:id="rId4"/></tableParts><extLst><ext uri="{CCE6A557-97BC-4b89-ADB6-D9C93CAAB3DF}"><x14:dataValidations count="1"><x14:dataValidation type="list"><x14:formula1><xm:f>Trips!$A$4:$A$6</xm:f></x14:formula1><xm:sqref>F4</xm:sqref></x14:dataValidation></x14:dataValidations></ext>` +
		`<ext uri="{05C60535-1F16-4fd2-B633-F4F36F0B64E0}"><x14:sparklineGroups><x14:sparklineGroup><x14:sparklines><x14:sparkline><xm:f>Trips!B4:B15</xm:f><xm:sqref>F15</xm:sqref></x14:sparkline></x14:sparklines></x14:sparklineGroup></x14:sparklineGroups></ext>` +
		`<ext uri="{A8765BA9-456A-4dab-B4F3-ACF838C121DE}"><x14:slicerList><x14:slicer r:id="rId7"/></x14:slicerList></ext></extLst></worksheet>`
}

// calculationSheet is the sheet with the questions; of no use where these stand
// within the rich sheet.
func (v richBook) calculationSheet() string {
	var rows strings.Builder
	rows.WriteString(`<row r="1" ht="20" customHeight="1"><c r="A1" s="1" t="s"><v>8</v></c><c r="B1" s="1"/></row><row r="2"/>`)
	for line := range v.asked() {
		if !v.within {
			fmt.Fprintf(&rows, `<row r="%d" spans="1:10" s="5" customFormat="1" x14ac:dyDescent="0.25">%s</row>`, line+3, v.block(line, line+3, 0))
		}
	}
	return xmlHead + "<!-- kept -->" + `<worksheet xmlns="` + mainSpace + `"` + spaces + ` xr:uid="{0}"><sheetPr/><dimension ref="A1:B2"/>` +
		`<sheetViews><sheetView showGridLines="0" workbookViewId="0"/></sheetViews><sheetFormatPr defaultRowHeight="15"/><cols><col min="4" max="6" width="9" style="3"/></cols><sheetData>` + rows.String() + `</sheetData>` +
		`<mergeCells count="1"><mergeCell ref="A1:B1"/></mergeCells><mc:AlternateContent><mc:Choice Requires="x14"><dataValidations count="1"><dataValidation type="list" sqref="A4:A9"><formula1>"mean-interval"</formula1></dataValidation></dataValidations></mc:Choice></mc:AlternateContent>` +
		`<pageMargins left="0.7" right="0.7" top="0.75" bottom="0.75" header="0.3" footer="0.3"/></worksheet>`
}
