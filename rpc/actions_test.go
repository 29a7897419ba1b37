package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"halfwidth/workbook"
)

// choose makes the edits of the action with a title.
func (e *textEditor) choose(name, marked, title string, more ...map[string]any) {
	e.t.Helper()
	list := into[[]codeAction](e.t, e.askAt("textDocument/codeAction", name, marked, more...))
	var titles []string
	for _, a := range list {
		if a.Title == title {
			e.apply(a.Edit)
			return
		}
		titles = append(titles, a.Title)
	}
	e.t.Errorf("%s: %q is not among %q", marked, title, titles)
}

func TestQuickFixes(t *testing.T) {
	for _, c := range []struct{ text, title, want string }{
		{"work out,sample,confidence,> mean\nmean-interval,12; 13,95|,\n", "Write 95% for 95", "work out,sample,confidence,> mean\nmean-interval,12; 13,95%,\n"},
		{"default decimal-mark;,\nwork out;sample;confidence;> mean\nmean-interval;\"12; 13\";97,5|;\n", "Write 97,5% for 97,5", "default decimal-mark;,\nwork out;sample;confidence;> mean\nmean-interval;\"12; 13\";97,5%;\n"},
		{"work out,sample,> mean\nmean-intervall|,12; 13,\n", `Use "mean-interval"`, "work out,sample,> mean\nmean-interval,12; 13,\n"},
		{"work out: mean-intervall|,sample,> mean\nx,12; 13,\n", `Use "mean-interval"`, "work out: mean-interval,sample,> mean\nx,12; 13,\n"},
		{"work out,sample,\"> meen| (minutes)\"\nmean-interval,12; 13,\n", `Use "mean"`, "work out,sample,\"> mean (minutes)\"\nmean-interval,12; 13,\n"},
		{"work out,sample,|lower,> mean\nmean-interval,12; 13,,\n", `Use "> lower"`, "work out,sample,> lower,> mean\nmean-interval,12; 13,,\n"},
		{"work out,sample,> mean\nmean-interval,minuets| in trips.csv,\n", `Use "minutes"`, "work out,sample,> mean\nmean-interval,minutes in trips.csv,\n"},
		{"work out,sample,> mean\nmean-interval,\"minutes in trips.csv where \"\"depott\"\"| = North\",\n", `Use "depot"`, "work out,sample,> mean\nmean-interval,\"minutes in trips.csv where depot = North\",\n"},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot = Nrth|,\n", `Use "North"`, "work out,sample,> mean\nmean-interval,minutes in trips.csv where depot = North,\n"},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot is one of Quay; 'Nrth'|,\n", `Use "North"`, "work out,sample,> mean\nmean-interval,\"minutes in trips.csv where depot is one of Quay; \"\"North\"\"\",\n"},
		{"work out,sample,> mean\nmean-interval,\"minutes in trips.csv where \"\"depot\"\" = \"\"Nrth|\"\"\",\n", `Use "North"`, "work out,sample,> mean\nmean-interval,\"minutes in trips.csv where \"\"depot\"\" = \"\"North\"\"\",\n"},
		{"work out,sample,> mean\nmean-interval,minutes in runs.csv where run = late-rn|,\n", `Use "late run"`, "work out,sample,> mean\nmean-interval,\"minutes in runs.csv where run = \"\"late run\"\"\",\n"},
		{"work out,label,sample,> mean\nmean-interval,Nrth|,minutes in trips.csv where depot <> Nrth,\n", `Use "North"`, "work out,label,sample,> mean\nmean-interval,Nrth,minutes in trips.csv where depot <> North,\n"},
		{"work out,sample,> mean\nmean-interval,minutes in trps.csv|,\n", `Use "trips.csv"`, "work out,sample,> mean\nmean-interval,minutes in trips.csv,\n"},
		{"work out,sample,> mean\nmean-interval,minutes in loads.xlsx/Lods|,\n", `Use "loads.xlsx/Loads"`, "work out,sample,> mean\nmean-interval,minutes in loads.xlsx/Loads,\n"},
		{"work out,sample,> mean\nmean-interval,minutes in loads.xlsx/\"Night shft\"|,\n", `Use "loads.xlsx/"Night shift""`, "work out,sample,> mean\nmean-interval,\"minutes in loads.xlsx/\"\"Night shift\"\"\",\n"},
		{"default confidnce|,90%\nwork out,sample,> mean\nmean-interval,12; 13,\n", `Use "confidence"`, "default confidence,90%\nwork out,sample,> mean\nmean-interval,12; 13,\n"},
		{"work out,sample,direction,> mean\nmean-interval,12; 13,abov|,\n", `Use "above"`, "work out,sample,direction,> mean\nmean-interval,12; 13,above,\n"},
		{"work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,7|\n", "Fill the results of row 2", "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,3\n"},
		{"work out|,sample,> mean\nmean-interval,1; 2; 3; 4; 5\nmean-interval,1; 2; 3; 4; 6,\n", "Fill the results of this block", "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,3\nmean-interval,1; 2; 3; 4; 6,3.2\n"},
		{"work out,sample,> mean,> note\r\nmean-interval|,1; 2,,old\r\n", "Fill all results", "work out,sample,> mean,> note\r\nmean-interval,1; 2,1.5,The sample has only 2 values: the interval rests wholly on the values being normal. Measure at least 5.\r\n"},
	} {
		e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile, "runs.csv": "run,minutes\nlate run,12\nearly run,13\nlate run,14\n"})
		e.book("loads.xlsx")
		const name = "a.calculations.csv"
		e.open(name, strings.Replace(c.text, "|", "", 1))
		e.choose(name, c.text, c.title)
		if got := e.buffers[name].text; got != c.want {
			t.Errorf("%s after %q is\n%q, want\n%q", c.text, c.title, got, c.want)
		}
		e.leave()
	}
}

func TestFilledResultsLeaveNothingToFill(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "a.calculations.csv"
	e.open(name, "work out,sample,> mean,> lower,> upper,> status\nmean-interval,minutes in trips.csv where depot = North,1,,\nmean-interval,minutes in trips.csv where depot = Quay\nmean-intervall,1; 2,7,8,9,ok\n")
	e.choose(name, "mean-interval|,", "Fill all results")
	for _, d := range e.found(name) {
		if d.Code == codeOutOfDate || d.Code == codeNotFilled {
			t.Errorf("after a fill: %+v in\n%s", d, e.buffers[name].text)
		}
	}
	want := "mean-intervall,1; 2,,,,refused\n"
	if !strings.HasSuffix(e.buffers[name].text, want) {
		t.Errorf("a refused row is\n%s", e.buffers[name].text)
	}
	for _, a := range into[[]codeAction](t, e.askAt("textDocument/codeAction", name, "mean-interval|,")) {
		if a.Kind == kindFill {
			t.Errorf("offered: %s", a.Title)
		}
	}
	e.leave()
}

func TestActionsAreOfTheKindsAskedFor(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, "work out,sample,> mean\nmean-intervall,12; 13,4\nmean-interval,1; 2,\n")
	for only, want := range map[string]string{"quickfix": "quickfix", "source": "source.fillResults", "source.fillResults": "source.fillResults", "refactor": "", "source.fill": ""} {
		list := into[[]codeAction](t, e.askAt("textDocument/codeAction", name, "mean-intervall|", map[string]any{"context": map[string]any{"diagnostics": []any{}, "only": []string{only}}}))
		if (len(list) > 0) != (want != "") {
			t.Errorf("only %s: %+v", only, list)
		}
		for _, a := range list {
			if a.Kind != want {
				t.Errorf("only %s: %+v", only, a)
			}
		}
	}
	e.leave()
}

// The demo sheet filled in an editor is, byte for byte, the one that a fill
// writes.
func TestAnEditorFillsAsTheCommandDoes(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	for _, name := range []string{"handling.calculations.csv", "night.csv", "larkmoor.xlsx"} {
		data, err := os.ReadFile("../testdata/workbooks/" + name)
		if err != nil {
			t.Fatal(err)
		}
		e.write(name, string(data))
	}
	const name = "handling.calculations.csv"
	report, err := workbook.Fill(context.Background(), filepath.Join(e.folder, name), workbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	want, err := os.ReadFile(report.Saved.Path)
	if err != nil {
		t.Fatal(err)
	}
	before, err := os.ReadFile(filepath.Join(e.folder, name))
	if err != nil {
		t.Fatal(err)
	}
	e.open(name, string(before))
	e.choose(name, "|Larkmoor", "Fill all results")
	if got := e.buffers[name].text; got != string(want) || got == string(before) {
		t.Errorf("the editor holds\n%s\nthe command wrote\n%s", got, want)
	}
	for _, d := range e.found(name) {
		if d.Code == codeOutOfDate || d.Code == codeNotFilled {
			t.Errorf("after a fill: %+v", d)
		}
	}
	e.leave()
}

// A client that takes no edits in an action gets commands, which come back, and
// whose edits are sent with workspace/applyEdit.
func TestActionsAsCommands(t *testing.T) {
	e := newTextEditor(t, `{"workspace":{"applyEdit":true}}`, "", nil)
	const name = "a.calculations.csv"
	e.open(name, "work out,sample,> mean\nmean-intervall,1; 2; 3; 4; 5,\n")
	run := func(c command) json.RawMessage {
		return e.ask("workspace/executeCommand", map[string]any{"command": c.Command, "arguments": c.Arguments})
	}
	list := into[[]command](t, e.askAt("textDocument/codeAction", name, "mean-intervall|"))
	if len(list) == 0 || list[0].Title != `Use "mean-interval"` {
		t.Fatalf("the commands are %+v", list)
	}
	if got := run(list[0]); string(got) != "null" {
		t.Fatalf("the command gave %s", got)
	}
	for e.versions[name] < 2 {
		e.take()
	}
	if got := run(list[0]); !strings.Contains(string(got), "-32801") {
		t.Errorf("a command for an older version gave %s", got)
	}
	run(command{Command: fillCommand, Arguments: []commandArgs{{URI: e.uri(name)}}})
	for e.versions[name] < 3 {
		e.take()
	}
	if got, want := e.buffers[name].text, "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,3\n"; got != want {
		t.Errorf("the text is %q, want %q", got, want)
	}
	for _, c := range []command{{Command: "rm"}, {Command: fillCommand}, {Command: fillCommand, Arguments: []commandArgs{{URI: "file:///none.calculations.csv"}}}} {
		if got := run(c); !strings.Contains(string(got), "-32602") {
			t.Errorf("%+v gave %s", c, got)
		}
	}
	e.leave()

	e = newTextEditor(t, `{}`, "", nil)
	e.open(name, "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,\n")
	if got := run(command{Command: fillCommand, Arguments: []commandArgs{{URI: e.uri(name)}}}); !strings.Contains(string(got), "-32803") {
		t.Errorf("a client that takes no edits got %s", got)
	}
	e.leave()
}

func TestALensFillsItsRow(t *testing.T) {
	e := newTextEditor(t, everything, `{"results":"codeLenses"}`, nil)
	const name = "a.calculations.csv"
	e.open(name, "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,\nmean-interval,1; 2; 3; 4; 6,\n")
	lenses := into[[]codeLens](t, e.askAt("textDocument/codeLens", name, "work|"))
	if len(lenses) != 2 || lenses[1].Command.Title != "mean 3.2" || lenses[1].Range.Start.Line != 2 {
		t.Fatalf("the lenses are %+v", lenses)
	}
	e.ask("workspace/executeCommand", map[string]any{"command": lenses[1].Command.Command, "arguments": lenses[1].Command.Arguments})
	for e.versions[name] < 2 {
		e.take()
	}
	if got, want := e.buffers[name].text, "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,\nmean-interval,1; 2; 3; 4; 6,3.2\n"; got != want {
		t.Errorf("the text is %q, want %q", got, want)
	}
	e.leave()
}

func TestEditsWithoutVersionsForClientsThatKnowNone(t *testing.T) {
	e := newTextEditor(t, `{"textDocument":{"codeAction":{"codeActionLiteralSupport":{}}}}`, "", nil)
	const name = "a.calculations.csv"
	e.open(name, "work out,sample,> mean\nmean-interval,1; 2; 3; 4; 5,\n")
	got := string(e.askAt("textDocument/codeAction", name, "mean-interval|"))
	if !strings.Contains(got, fmt.Sprintf(`"edit":{"changes":{%q:[`, e.uri(name))) || strings.Contains(got, "documentChanges") || strings.Contains(got, "isPreferred") {
		t.Errorf("got %s", got)
	}
	e.leave()
}
