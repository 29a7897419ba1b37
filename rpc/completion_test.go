package rpc

import (
	"os"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// pick makes the edit of the item with a label, as an editor does, and gives the
// text; it fails where there is no such item or an editor would not show it.
func (e *textEditor) pick(name, marked, label string) string {
	e.t.Helper()
	list := into[completionList](e.t, e.askAt("textDocument/completion", name, marked))
	at := slices.IndexFunc(list.Items, func(i completionItem) bool { return i.Label == label })
	if at < 0 {
		var labels []string
		for _, i := range list.Items {
			labels = append(labels, i.Label)
		}
		e.t.Errorf("%s: %q is not among %.600q", marked, label, labels)
		return ""
	}
	item, l := list.Items[at], e.buffers[name]
	before, after, _ := strings.Cut(marked, "|")
	cursor := strings.Index(l.text, before+after) + len(before)
	start, end := l.offset(item.TextEdit.Range.Start), l.offset(item.TextEdit.Range.End)
	if item.TextEdit.Range.Start.Line != item.TextEdit.Range.End.Line || start > cursor || end < cursor {
		e.t.Errorf("%s: the edit of %q, %v, does not hold the cursor", marked, label, item.TextEdit.Range)
	}
	if typed := l.text[start:cursor]; !strings.HasPrefix(strings.ToLower(item.FilterText), strings.ToLower(typed)) {
		e.t.Errorf("%s: an editor that filters %q by %q hides %q", marked, item.FilterText, typed, label)
	}
	return l.text[:start] + item.TextEdit.NewText + l.text[end:]
}

// book makes a workbook with a sheet, a table and a defined name.
func (e *textEditor) book(name string) {
	e.t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	for cell, value := range map[string]any{"A1": "parcels", "B1": "handling time", "A2": 3, "B2": 4, "A3": 5, "B3": 6,
		"C1": "ramp", "C2": "12", "C3": "late"} {
		if err := f.SetCellValue("Sheet1", cell, value); err != nil {
			e.t.Fatal(err)
		}
	}
	if err := f.SetSheetName("Sheet1", "Night shift"); err != nil {
		e.t.Fatal(err)
	}
	if err := f.AddTable("Night shift", &excelize.Table{Range: "A1:B3", Name: "Loads"}); err != nil {
		e.t.Fatal(err)
	}
	if err := f.SaveAs(e.folder + "/" + name); err != nil {
		e.t.Fatal(err)
	}
}

func TestCompletion(t *testing.T) {
	const row = "work out,sample,confidence,direction,> mean\n"
	for _, c := range []struct{ text, label, want string }{
		// functions, in the column of work out, also in the row right below a block
		{row + "mean-|,1; 2,,,\n", "mean-interval", row + "mean-interval,1; 2,,,\n"},
		{row + "|,1; 2,,,\n", "mean-interval", row + "mean-interval,1; 2,,,\n"},
		{row + "mean-interval,1; 2,,,\n|", "mean-interval", row + "mean-interval,1; 2,,,\nmean-interval"},
		{"|", "work out", "work out"},
		{row + "\"mean-|\",1; 2,,,\n", "mean-interval", row + "\"mean-interval\",1; 2,,,\n"},
		{row + " med|,1; 2,,,\n", "median-interval", row + " median-interval,1; 2,,,\n"},
		// headers: an input, a result behind its mark, none twice
		{"work out,sample,con|,> mean\nmean-interval,1; 2,,\n", "confidence", "work out,sample,confidence,> mean\nmean-interval,1; 2,,\n"},
		{"work out,sample,> lo|,> mean\nmean-interval,1; 2,,\n", "> lower", "work out,sample,> lower,> mean\nmean-interval,1; 2,,\n"},
		{"work out,sample,la|,> mean\nmean-interval,1; 2,,\n", "label", "work out,sample,label,> mean\nmean-interval,1; 2,,\n"},
		{"wor|\n", "work out", "work out\n"},
		{"work out: mean-i|\n", "work out: mean-interval", "work out: mean-interval\n"},
		{"work out,sam|\n", "sample", "work out,sample\n"},
		{"work out: mean-interval;sample;> me|\n", "> mean", "work out: mean-interval;sample;> mean\n"},
		{"work out\tsample\t> me|\n", "> mean", "work out\tsample\t> mean\n"},
		{"default conf|\n", "default confidence", "default confidence\n"},
		{"default confidence,|\n", "99%", "default confidence,99%\n"},
		// values
		{row + "mean-interval,1; 2,9|,,\n", "95%", row + "mean-interval,1; 2,95%,,\n"},
		{row + "mean-interval,1; 2,,ab|,\n", "above", row + "mean-interval,1; 2,,above,\n"},
		// expressions
		{row + "mean-interval,|,,,\n", "minutes in trips.csv", row + "mean-interval,minutes in trips.csv,,,\n"},
		{row + "mean-interval,minutes |,,,\n", "in", row + "mean-interval,minutes in,,,\n"},
		{row + "mean-interval,minutes in |,,,\n", "trips.csv", row + "mean-interval,minutes in trips.csv,,,\n"},
		{row + "mean-interval,minutes in tr|ps,,,\n", "trips.csv", row + "mean-interval,minutes in trips.csv,,,\n"},
		{row + "mean-interval,minutes in |,,,\n", `"old trips.csv"`, row + `mean-interval,"minutes in ""old trips.csv""",,,` + "\n"},
		{row + "mean-interval,\"minutes in |\",,,\n", `"old trips.csv"`, row + `mean-interval,"minutes in ""old trips.csv""",,,` + "\n"},
		{row + "mean-interval,\"minutes in |", `trips.csv`, row + "mean-interval,\"minutes in trips.csv"},
		{row + "mean-interval,\"minutes in tri|\nmean-interval,1; 2,,,\n", `trips.csv`, row + "mean-interval,\"minutes in trips.csv\nmean-interval,1; 2,,,\n"},
		{row + "mean-interval,parcels in lo|,,,\n", `loads.xlsx/"Night shift"`, row + `mean-interval,"parcels in loads.xlsx/""Night shift""",,,` + "\n"},
		{row + "mean-interval,parcels in lo|,,,\n", `loads.xlsx/Loads`, row + "mean-interval,parcels in loads.xlsx/Loads,,,\n"},
		{row + "mean-interval,| in loads.xlsx/Loads,,,\n", "parcels", row + "mean-interval,parcels in loads.xlsx/Loads,,,\n"},
		{row + "mean-interval,| in loads.xlsx/Loads,,,\n", `"handling time"`, row + `mean-interval,"""handling time"" in loads.xlsx/Loads",,,` + "\n"},
		{row + "mean-interval,minutes in trips.csv w|,,,\n", "where", row + "mean-interval,minutes in trips.csv where,,,\n"},
		{row + "mean-interval,minutes in trips.csv where |,,,\n", "depot", row + "mean-interval,minutes in trips.csv where depot,,,\n"},
		{row + "mean-interval,minutes in trips.csv where depot = |,,,\n", "North", row + "mean-interval,minutes in trips.csv where depot = North,,,\n"},
		{row + "mean-interval,minutes in trips.csv where depot =N|,,,\n", "North", row + "mean-interval,minutes in trips.csv where depot =North,,,\n"},
		{row + "mean-interval,\"parcels in loads.xlsx/\"\"Night shift\"\" where ramp = |\",,,\n", `"12"`, row + "mean-interval,\"parcels in loads.xlsx/\"\"Night shift\"\" where ramp = \"\"12\"\"\",,,\n"}, // a text there
		{row + "mean-interval,minutes in trips.csv for each |,,,\n", "shift", row + "mean-interval,minutes in trips.csv for each shift,,,\n"},
		{row + "mean-interval,minutes in sub/tr|,,,\n", "sub/trips.csv", row + "mean-interval,minutes in sub/trips.csv,,,\n"},
	} {
		e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile, "old trips.csv": tripsFile})
		if err := os.Mkdir(e.folder+"/sub", 0o755); err != nil {
			t.Fatal(err)
		}
		e.write("sub/trips.csv", tripsFile)
		e.book("loads.xlsx")
		const name = "a.calculations.csv"
		e.open(name, strings.Replace(c.text, "|", "", 1))
		if got := e.pick(name, c.text, c.label); c.want != "" && got != c.want {
			t.Errorf("%s with %q is\n%q, want\n%q", c.text, c.label, got, c.want)
		}
		e.leave()
	}
}

func TestCompletionOffersNothingTwiceAndNothingForeign(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile, "notes.txt": "x"})
	const name = "a.calculations.csv"
	e.open(name, "work out: mean-interval,sample,> mean,,> lower\nx,minutes in trips.csv,,,\n")
	for marked, absent := range map[string][]string{
		"mean,|,> lower":        {"> mean", "sample", "> lower", "table sheet", "> half-width-of-difference"},
		"x|,minutes":            {"mean-interval"}, // a label under work out: NAME
		"minutes in |trips.csv": {"notes.txt", "a.calculations.csv"},
		"trips.csv,|,,":         {"mean-interval", "95%"}, // a result's cell
	} {
		list := into[completionList](t, e.askAt("textDocument/completion", name, marked))
		seen := map[string]bool{}
		for _, item := range list.Items {
			if seen[item.Label] || slices.Contains(absent, item.Label) {
				t.Errorf("%s: %q is offered", marked, item.Label)
			}
			seen[item.Label] = true
		}
	}
	e.leave()
}
