package workbook

import (
	"context"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// filledRows fills a book and gives what became of its rows.
func filledRows(t *testing.T, p parts) []*calculation.RowResult {
	t.Helper()
	path := filepath.Join(t.TempDir(), "book.xlsx")
	if err := os.WriteFile(path, p.zip(t, ""), 0o600); err != nil {
		t.Fatal(err)
	}
	report, err := Fill(context.Background(), path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	return report.Results.Rows
}

// minutesOfTrips are the cells of the small book with minutes.
var minutesOfTrips = regexp.MustCompile(`(<c r="B\d")><v>[\d.]+</v></c>`)

// Some programs write times of day as they are read, by ISO 8601 (ECMA-376 part
// 1, 18.18.11), and strict books give them the day from which they count.
func TestWrittenTimesOfDayAreDurations(t *testing.T) {
	styles := stylesA + `<cellXfs count="3"><xf numFmtId="0"/><xf numFmtId="14"/><xf numFmtId="20"/></cellXfs></styleSheet>`
	for name, cell := range map[string]string{
		"a time alone":                      ` t="d"><v>06:00:00</v></c>`,
		"a time alone, shown as a date":     ` t="d" s="1"><v>06:00:00</v></c>`,
		"with the first day of strict":      ` t="d" s="2"><v>1899-12-30T06:00:00</v></c>`,
		"with the first day, shown as time": ` t="d" s="2"><v>1899-12-31T06:00:00</v></c>`,
	} {
		for _, date1904 := range []string{"0", "1"} {
			if date1904 == "1" && strings.Contains(cell, "1899") {
				continue
			}
			book := func(sample string) parts {
				return plainBook().with(stylesPart, styles).with(questionPart, strings.Replace(question(sample), "mean-interval", "sample-summary", 1)).
					with(workbookPart, workbookA+`<workbookPr date1904="`+date1904+`"/>`+bookSheets+`</workbook>`).
					with(tripsPart, worksheetA+`<sheetData>`+minutesOfTrips.ReplaceAllString(tripRows, "$1"+cell)+`</sheetData></worksheet>`)
			}
			row := filledRows(t, book("minutes (hours) in Trips"))[0]
			if note := filledRows(t, book("minutes in Trips"))[0].Note(); !strings.Contains(note, "Trips!B2 is a duration") {
				t.Errorf("%s, 1904 %s: without a unit: %q", name, date1904, note)
			}
			if mean := sampleMean(t, row); mean != 6.0 {
				t.Errorf("%s, 1904 %s: the mean is %v, want 6 hours: %s", name, date1904, mean, row.Note())
			}
		}
	}
}

// A cell that another cell's array formula or data table fills holds a formula's
// value, though no formula stands in it.
func TestResultCellsThatAFormulaFillsRefuseTheirRow(t *testing.T) {
	for _, formula := range []string{`<f t="array" ref="C2:D3">A1</f>`, `<f t="dataTable" ref="C2:D3" r1="A1"/>`} {
		below := `<row r="3"><c r="A3" t="inlineStr"><is><t>mean-interval</t></is></c><c r="B3" t="inlineStr"><is><t>1; 2; 4</t></is></c><c r="C3"><v>5</v></c></row>` +
			`<row r="4"><c r="A4" t="inlineStr"><is><t>mean-interval</t></is></c><c r="B4" t="inlineStr"><is><t>1; 2; 4</t></is></c></row></sheetData>`
		sheet := strings.Replace(question("1; 2; 4"), `</row></sheetData>`, `<c r="C2">`+formula+`<v>7</v></c></row>`+below, 1)
		rows := filledRows(t, plainBook().with(questionPart, sheet))
		for i, want := range []funcs.Status{funcs.StatusRefused, funcs.StatusRefused, funcs.StatusCaution} {
			if rows[i].Status != want || want == funcs.StatusRefused && !strings.Contains(rows[i].Note(), "holds a formula, which is never overwritten") {
				t.Errorf("%s: row %d is %s: %s", formula, i+2, rows[i].Status, rows[i].Note())
			}
		}
	}
}

// The values of an array formula are saved results, in each of its cells.
func TestValuesOfArrayFormulasAreSavedResults(t *testing.T) {
	row := filledRows(t, plainBook().with(tripsPart, worksheetA+`<sheetData>`+strings.Replace(tripRows, `<c r="B2">`, `<c r="B2"><f t="array" ref="B2:B7">D2:D7</f>`, 1)+`</sheetData></worksheet>`))[0]
	if note := row.Note(); !strings.Contains(note, "6 values are the last saved result of a formula") {
		t.Errorf("the note is %q", note)
	}
}

func TestANameThatProgramsKeepIsNoTableSheet(t *testing.T) {
	sheet := strings.NewReplacer("&gt; mean", "table sheet", `</row></sheetData>`, `<c r="C2" t="inlineStr"><is><t>history</t></is></c></row></sheetData>`).Replace(question("minutes in Trips for each depot"))
	row := filledRows(t, plainBook().with(questionPart, sheet))[0]
	if row.Status != funcs.StatusRefused || !strings.Contains(row.Note(), "C2: spreadsheet programs keep the name history") {
		t.Errorf("%s: %s", row.Status, row.Note())
	}
}

// Names of print areas and the like are no places; a name of a row's cells is one.
func TestWhichDefinedNamesArePlaces(t *testing.T) {
	book := func(sample string) parts {
		return plainBook().with(questionPart, question(sample)).with(workbookPart, workbookA+bookSheets+`<definedNames><definedName name="_xlnm.Print_Area" localSheetId="0">Trips!$A$1:$B$7</definedName>`+
			`<definedName name="few" localSheetId="1">Trips!$1:$5</definedName><definedName name="few">Trips!$A$1:$B$7</definedName><definedName name="gone">Trips!#REF!</definedName></definedNames></workbook>`)
	}
	if mean := sampleMean(t, filledRows(t, book("minutes in few"))[0]); mean != 125.0/4 {
		t.Errorf("the name of the sheet's own gives the mean %v, want that of the first four trips", mean)
	}
	for sample, want := range map[string]string{"minutes in gone": `"gone" is a defined name for Trips!#REF!`, "minutes in nowhere": "Names are Trips, Calculations and few."} {
		if note := filledRows(t, book(sample))[0].Note(); !strings.Contains(note, want) {
			t.Errorf("%s: %q", sample, note)
		}
	}
}

// sampleMean gives the row's mean.
func sampleMean(t *testing.T, row *calculation.RowResult) any {
	t.Helper()
	if row.Outcome == nil {
		t.Fatalf("no outcome: %s", row.Note())
	}
	mean, _ := row.Outcome.Get("mean")
	return mean
}

// A line that goes on beyond its header has a cell that was cut in two, as an
// unquoted decimal comma does; its numbers would be wrong.
func TestLinesOfTextFilesLongerThanTheirHeader(t *testing.T) {
	long := strings.Repeat("North,10\n", 150)
	for _, test := range []struct {
		text, comma string
		want        any // the mean, or a part of the refusal
	}{
		{"minutes\n1,5\n2,5\n", "", "data.csv!B2 lies beyond the header, row 1 with 1 cell, so a cell of row 2 may be cut in two"},
		{"minutes\n1,5\n2,5\n", ",", 2.0},
		{"depot,minutes\nNorth,1,5\nQuay,2,5\n", ",", "data.csv!C2 lies beyond the header"},
		{"depot,minutes\nNorth,\"1,5\"\nQuay,\"2,5\"\n", ",", 2.0},
		{"depot,minutes\nNorth,10\nQuay, new,20\n", "", "data.csv!C3 lies beyond the header, row 1 with 2 cells"},
		{"depot,minutes\n" + long + "North,1,5\n" + long, "", "data.csv!C152 lies beyond"},
		{"depot,minutes\n" + long + "North,1,5,7\nNorth,1,5\n", "", "data.csv!C152 lies beyond"},
		{"depot,minutes\n\"North,10\n", "", "(sample): data.csv is damaged in line 2: a quote is opened and never closed."},
		{"depot,minutes\n\xc4,10\n", "", "(sample): data.csv is damaged in line 2: the text is not in UTF-8; save the file as CSV UTF-8."},
		{"depot,minutes\nNorth,10,\nQuay,20,,\n", "", 15.0},
		{"depot,minutes,\nNorth,10,late\nQuay,20\n", "", 15.0},
		{"Trips,of,the,week\ndepot,minutes\nNorth,10\nQuay\nMill,20\n", "", 15.0},
		{"depot,minutes\nNorth,10\nQuay,20\n\ndepot,minutes,cost\nNorth,30,7\n", "", 20.0},
	} {
		path := filepath.Join(t.TempDir(), "a.calculations.csv")
		sheet := "work out\tsample\t> mean\nsample-summary\tminutes in data.csv\t\n"
		if test.comma != "" {
			sheet = "default decimal-mark\t,\n\n" + sheet
		}
		write(t, path, sheet)
		write(t, filepath.Join(filepath.Dir(path), "data.csv"), test.text)
		report, err := Fill(context.Background(), path, Options{})
		if err != nil {
			t.Fatal(err)
		}
		row := report.Results.Rows[0]
		if want, ok := test.want.(string); ok {
			if row.Status != funcs.StatusRefused || !strings.Contains(row.Note(), want) {
				t.Errorf("%.60q: %s: %s", test.text, row.Status, row.Note())
			}
		} else if mean := sampleMean(t, row); mean != test.want {
			t.Errorf("%.60q: the mean is %v, want %v", test.text, mean, test.want)
		}
	}
}

// A chart sheet has no cells to read, and its name is no new sheet's.
func TestAChartSheetIsNoPlaceAndItsNameIsTaken(t *testing.T) {
	book := func(question string) parts {
		return plainBook().with(questionPart, question).with("xl/chartsheets/sheet1.xml", xmlHead+`<chartsheet xmlns="`+mainSpace+`"/>`).
			with(workbookRels, relsA+bookRels+relation("rId9", "chartsheet", "chartsheets/sheet1.xml")+`</Relationships>`).
			with(workbookPart, workbookA+strings.Replace(bookSheets, `</sheets>`, `<sheet name="Chart" sheetId="3" r:id="rId9"/></sheets>`, 1)+`</workbook>`)
	}
	groups := strings.NewReplacer("&gt; mean", "table sheet", `</row></sheetData>`, `<c r="C2" t="inlineStr"><is><t>CHART</t></is></c></row></sheetData>`).Replace(question("minutes in Trips for each depot"))
	for question, want := range map[string]string{
		question("minutes in Chart"): `"Chart" is a chart, dialog or macro sheet, without cells. Name a worksheet.`,
		groups:                       `C2: there is a sheet "Chart" already that no fill made`,
		question("minutes in Chrt"):  "Names are Trips and Calculations.",
	} {
		if row := filledRows(t, book(question))[0]; row.Status != funcs.StatusRefused || !strings.Contains(row.Note(), want) {
			t.Errorf("%s: %s, want %s", row.Status, row.Note(), want)
		}
	}
}
