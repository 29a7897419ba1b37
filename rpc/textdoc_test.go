package rpc

import (
	"encoding/json"
	"fmt"
	"os"
	"slices"
	"strings"
	"testing"
	"time"
)

const tripsFile = "depot,minutes,shift\nNorth,12,day\nNorth,13,day\nNorth,11,night\nNorth,14,day\nNorth,12,night\nNorth,10,day\n" +
	"Quay,15,day\nQuay,18,night\nQuay,14,day\nQuay,17,day\nQuay,16,night\nQuay,15,day\n"

// The mean of North is (12+13+11+14+12+10)/6 = 12, of Quay 95/6.
const northSheet = "work out,sample,> mean\nmean-interval,minutes in trips.csv where depot = North,\n"

func TestASheetIsWorkedOutAsItIsEdited(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "a.calculations.csv"
	e.open(name, northSheet)
	want := `3 results-not-filled "work out"`
	if got := e.codes(name); got != want {
		t.Fatalf("unfilled: %s, want %s", got, want)
	}
	e.replace(name, "North,", "North,11.5")
	if got, want := e.codes(name), `2 results-out-of-date "11.5"`; got != want {
		t.Fatalf("a stale result: %s, want %s", got, want)
	}
	if d := e.found(name)[0]; d.Message != "The results are out of date: C2 (mean) holds 11.5, worked out is 12. Fill the results again." || d.Source != "halfwidth" {
		t.Errorf("it reads: %+v", d)
	}
	e.replace(name, "11.5", "12.0")
	if got := e.codes(name); got != "" {
		t.Fatalf("12.0 is 12: %s", got)
	}
	e.replace(name, "depot = North", "depott = North")
	if got, want := e.codes(name), "1 unknown-name \"depott\"\n2 results-out-of-date \"12.0\""; got != want {
		t.Fatalf("a misspelt column: %s, want %s", got, want)
	}
	e.change(name, textChange{nil, "a"})
	if got, want := e.codes(name), `3 nothing-to-work-out "a"`; got != want {
		t.Fatalf("no block: %s, want %s", got, want)
	}
	e.change(name, textChange{nil, "a\n\"b"})
	if got, want := e.codes(name), `1 damaged-file "\"b"`; got != want {
		t.Fatalf("an open quote: %s, want %s", got, want)
	}
	e.change(name, textChange{nil, ""}, textChange{&textRange{}, northSheet})
	e.found(name)
	e.notify("textDocument/didClose", map[string]any{"textDocument": map[string]any{"uri": e.uri(name)}})
	for e.shown[e.uri(name)].Version != nil {
		e.take()
	}
	if p := e.shown[e.uri(name)]; p.Diagnostics == nil || len(p.Diagnostics) != 0 {
		t.Errorf("closed: %+v", p)
	}
	e.leave()
}

func TestFindingsHaveTheirSeverities(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "a.calculations.csv"
	e.open(name, "default confidense,90%\n\nwork out,sample,confidence,> mean,> note\nmean-interval,12; 13; 14,95,,\nmean-interval,1; 2,0.9,,\nmean-intervall,1; 2,,,\n")
	got := e.codes(name)
	for _, want := range []string{`2 unknown-name "confidense"`, `1 bad-value "95"`, `2 few-values "1; 2"`, `1 unknown-name "mean-intervall"`, `3 results-not-filled "work out"`} {
		if !strings.Contains(got, want) {
			t.Errorf("%s is not among\n%s", want, got)
		}
	}
	e.leave()
}

// A finding leads to the cells that it names: of the sheet, and of a text file
// beside it.
func TestFindingsLeadToTheirCells(t *testing.T) {
	data := "depot,minutes\n\"North,\nnew\",12\nNorth,13\nNorth,n/a\nNorth,14\nNorth,12\nNorth,10\n"
	for capabilities, want := range map[string]bool{everything: true, `{}`: false} {
		e := newTextEditor(t, capabilities, "", map[string]string{"old trips.csv": data})
		const name = "a.calculations.csv"
		e.open(name, "work out,sample,sample,> mean\nmean-interval,1; 2,,\n\nwork out,sample,> mean\nmean-interval,\"minutes in \"\"old trips.csv\"\"\",\n")
		var got []string
		for _, d := range e.found(name) {
			for _, r := range d.Related {
				got = append(got, fmt.Sprint(d.Code, " ", r.Message, " ", r.Location.URI == e.uri("old trips.csv"), " ", r.Location.Range))
			}
			if (d.Data != nil) != want && d.Code == "cells-skipped" {
				t.Errorf("data: %+v", d)
			}
		}
		places := `given-twice C1 false {{0 16} {0 22}}, cells-skipped "old trips.csv"!B4 true {{4 6} {4 9}}`
		if !want {
			places = ""
		}
		if strings.Join(got, ", ") != places {
			t.Errorf("related places %q, want %q", got, places)
		}
		e.leave()
	}
}

func TestEveryVersionSentIsNewerAndTheLastIsTheNewest(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "a.calculations.csv"
	e.open(name, northSheet)
	for i := range 300 {
		if i%2 == 0 {
			e.replace(name, "North", "Quay")
		} else {
			e.replace(name, "Quay", "North")
		}
	}
	e.found(name)
	e.leave()
	last := 0
	for _, p := range e.sent {
		if *p.Version <= last {
			t.Fatalf("version %d after %d", *p.Version, last)
		}
		last = *p.Version
	}
	if last != 301 {
		t.Errorf("the last version sent is %d, want 301", last)
	}
}

func TestOtherDocumentsHaveNoAnswersAndNoErrors(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	e.open("notes.txt", "work out")
	e.replace("notes.txt", "work", "walk")
	for _, method := range []string{"completion", "hover", "signatureHelp", "codeAction", "documentSymbol", "inlayHint", "codeLens"} {
		if got := e.askAt("textDocument/"+method, "notes.txt", "walk|"); string(got) != "null" {
			t.Errorf("%s: %s", method, got)
		}
	}
	e.notify("textDocument/didSave", map[string]any{"textDocument": map[string]any{"uri": e.uri("notes.txt")}})
	e.notify("textDocument/didClose", map[string]any{"textDocument": map[string]any{"uri": e.uri("notes.txt")}})
	e.notify("workspace/didChangeConfiguration", map[string]any{"settings": nil})
	e.leave()
	if e.remarks.String() != "" || len(e.sent) > 0 {
		t.Errorf("remarks %q, diagnostics %v", e.remarks, e.sent)
	}
}

func TestDataFilesAreReadAgainWhenTheyChange(t *testing.T) {
	for _, watched := range []bool{true, false} {
		capabilities := everything
		if !watched {
			capabilities = `{}`
		}
		e := newTextEditor(t, capabilities, "", map[string]string{"trips.csv": tripsFile})
		const name = "a.calculations.csv"
		e.open(name, strings.Replace(northSheet, "North,\n", "North,12\n", 1))
		if got := e.codes(name); strings.Contains(got, "out-of-date") {
			t.Fatalf("at first: %s", got)
		}
		e.write("trips.csv", strings.Replace(tripsFile, "North,10", "North,22", 1)+"\n")
		changed := map[string]any{"changes": []any{map[string]any{"uri": e.uri("trips.csv"), "type": 2}}}
		delete(e.shown, e.uri(name))
		if watched {
			e.notify("workspace/didChangeWatchedFiles", changed)
		} else {
			e.notify("textDocument/didSave", map[string]any{"textDocument": map[string]any{"uri": e.uri(name)}})
		}
		if got := e.codes(name); !strings.Contains(got, `2 results-out-of-date "12"`) {
			t.Errorf("watched %v: %s", watched, got)
		}
		if err := os.Remove(e.folder + "/trips.csv"); err != nil {
			t.Fatal(err)
		}
		e.replace(name, "mean-interval", "mean-interval")
		if got := e.codes(name); !strings.Contains(got, "1 unreadable-file") {
			t.Errorf("removed, watched %v: %s", watched, got)
		}
		if registered := strings.Contains(strings.Join(e.asked, " "), "client/registerCapability"); registered != watched {
			t.Errorf("asked the client to watch: %v, but it announced %v", registered, watched)
		}
		e.leave()
	}
}

func TestDataFilesOutsideTheOpenFoldersAreNotRead(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "a.calculations.csv"
	e.notify("workspace/didChangeWorkspaceFolders", map[string]any{"event": map[string]any{"added": []any{}, "removed": []any{map[string]any{"uri": uriOf(e.folder), "name": "x"}}}})
	e.open(name, northSheet)
	if list := e.found(name); len(list) == 0 || list[0].Code != "unreadable-file" && list[len(list)-1].Code != "unreadable-file" || !strings.Contains(fmt.Sprint(list), "open in the editor") {
		t.Errorf("without a folder: %+v", list)
	}
	delete(e.shown, e.uri(name))
	e.notify("workspace/didChangeWorkspaceFolders", map[string]any{"event": map[string]any{"removed": []any{}, "added": []any{map[string]any{"uri": uriOf(e.folder), "name": "x"}}}})
	if got := e.codes(name); strings.Contains(got, "unreadable-file") {
		t.Errorf("with the folder: %s", got)
	}
	e.leave()
}

func TestUTF8ColumnsWhereTheClientOffersThem(t *testing.T) {
	e := newTextEditor(t, `{"general":{"positionEncodings":["utf-8","utf-16"]}}`, "", nil)
	const name = "ä.calculations.csv"
	text := "work out,label,sample,confidence,> mean\nmean-interval,täglich 😀,1; 2; 3; 4; 5; 6,95,\n"
	e.open(name, text)
	e.buffers[name] = newLines(text, true)
	e.replace(name, "täglich 😀", "é😀")
	if got := e.codes(name); !strings.Contains(got, `1 bad-value "95"`) {
		t.Errorf("%s", got)
	}
	e.leave()
}

func TestAClientThatNeverAnswersHoldsNothingUp(t *testing.T) {
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	e.silent = true
	const name = "a.calculations.csv"
	e.open(name, northSheet)
	for i := range 20 {
		e.replace(name, "North", fmt.Sprintf("North%d", i))
		e.found(name)
		e.replace(name, fmt.Sprintf("North%d", i), "North")
	}
	e.found(name)
	e.in.Close()
	select {
	case <-e.code:
	case <-time.After(patience): // it would wait twice as long for what is under way
		t.Fatal("the server waits for its client")
	}
}

func TestAFaultyChangeIsTold(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, northSheet)
	e.open(name, northSheet)
	e.versions[name] = -5
	e.change(name, textChange{nil, northSheet})
	e.found(name)
	e.leave()
	for _, want := range []string{"opened again", "versions should rise"} {
		if !strings.Contains(e.remarks.String(), want) {
			t.Errorf("%q is not among the remarks: %s", want, e.remarks)
		}
	}
}

func TestAsManySheetsAsTheLimitAreOpen(t *testing.T) {
	c := begin(t, Options{Limits: Limits{OpenSheets: 1}, settle: time.Millisecond})
	c.initialize()
	for _, name := range []string{"a", "b"} {
		c.send(`{"jsonrpc":"2.0","method":"textDocument/didOpen","params":{"textDocument":{"uri":"file:///%s.calculations.csv","languageId":"csv","version":1,"text":""}}}`, name)
	}
	both := c.next() + c.next()
	if !strings.Contains(both, `"method":"textDocument/publishDiagnostics"`) || !strings.Contains(both, `"method":"window/logMessage"`) || !strings.Contains(both, "the limit") {
		t.Errorf("got %s", both)
	}
	c.leave()
	if !strings.Contains(c.remarks.String(), "the limit") {
		t.Errorf("remarks: %s", c.remarks)
	}
}

// With an hour for a pause, no keystroke ever comes after one.
func TestADocumentThatNeverPausesIsPublished(t *testing.T) {
	c := begin(t, Options{settle: time.Hour})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","method":"textDocument/didOpen","params":{"textDocument":{"uri":"file:///a.calculations.csv","languageId":"csv","version":1,"text":""}}}`)
	for version := 1; version <= 3; version++ {
		c.wantPart(`"method":"textDocument/publishDiagnostics"`, fmt.Sprintf(`"version":%d`, version))
		c.send(`{"jsonrpc":"2.0","method":"textDocument/didChange","params":{"textDocument":{"uri":"file:///a.calculations.csv","version":%d},"contentChanges":[{"text":"%s"}]}}`, version+1, strings.Repeat("x", version))
	}
	c.wantPart(`"version":4`)
	c.leave()
}

// Keystrokes in a sheet of 5,000 rows are taken at once, however long the sheet
// takes to be worked out.
func TestKeystrokesInALongSheetAreTakenAtOnce(t *testing.T) {
	if testing.Short() {
		t.Skip("works out 5,000 rows")
	}
	e := newTextEditor(t, everything, "", map[string]string{"trips.csv": tripsFile})
	const name = "long.calculations.csv"
	var b strings.Builder
	b.WriteString("work out,label,sample,> mean,> lower,> upper,> note\n")
	for i := range 5000 {
		fmt.Fprintf(&b, "mean-interval,row %d,minutes in trips.csv where minutes > %d,,,,\n", i, i%9)
	}
	e.open(name, b.String())
	// The echo comes from the goroutine that reads messages, behind the change.
	var waits []time.Duration
	for i := range 50 {
		e.replace(name, "row 2500", "row 2500x")
		start := time.Now()
		e.ask("test/echo", map[string]int{"i": i})
		waits = append(waits, time.Since(start))
		e.replace(name, "row 2500x", "row 2500")
	}
	slices.Sort(waits)
	if most := waits[40]; most > time.Second { // the slowest fifth may be the machine's
		t.Errorf("a message behind a keystroke waited %v", most)
	}
	start := time.Now()
	e.found(name)
	t.Logf("keystrokes %v to %v, half within %v; diagnostics after %v", waits[0], waits[49], waits[25], time.Since(start))
	e.leave()
}

// FuzzTextDocument takes any text and any question about it without a fault.
func FuzzTextDocument(f *testing.F) {
	f.Add(northSheet, 1, 20)
	f.Add("work out: mean-interval;sample;> mean\nx;\"12; 13\n", 1, 8)
	f.Add("\"", -83, 8)
	f.Add("default confidence\t95%\n\"work out\"\tsample\t> mean\n", 0, 9)
	f.Fuzz(func(t *testing.T, text string, line, character int) {
		if strings.ToValidUTF8(text, "") != text || strings.Contains(text, "resamples") || strings.Contains(text, "-size") || strings.Contains(text, "coverage") || strings.Contains(text, "power") {
			return // long computations are not what is sought here
		}
		c := begin(t, Options{settle: time.Microsecond})
		c.send(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{"capabilities":%s,"initializationOptions":{"results":"inlayHints"}}}`, everything)
		c.wantPart(`"id":"start"`)
		quoted, _ := json.Marshal(text)
		c.send(`{"jsonrpc":"2.0","method":"textDocument/didOpen","params":{"textDocument":{"uri":"untitled:x.calculations.csv","version":1,"text":%s}}}`, quoted)
		for i, method := range []string{"completion", "hover", "signatureHelp", "codeAction", "documentSymbol", "inlayHint"} {
			c.send(`{"jsonrpc":"2.0","id":%d,"method":"textDocument/%s","params":{"textDocument":{"uri":"untitled:x.calculations.csv"},"position":{"line":%d,"character":%d},"range":{"start":{"line":0,"character":0},"end":{"line":%d,"character":0}}}}`,
				i, method, line, character, line)
		}
		for answered := 0; answered < 6; {
			m := c.next()
			if strings.Contains(m, `"error":`) && strings.Contains(m, `-32603`) {
				t.Fatal(m)
			}
			if strings.HasPrefix(m, `{"jsonrpc":"2.0","id":`) && !strings.Contains(m, `"method":`) {
				answered++
			}
		}
		if r := c.remarks.String(); strings.Contains(r, "fault") {
			t.Fatal(r)
		}
	})
}
