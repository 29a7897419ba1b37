package rpc

import (
	"fmt"
	"strings"
	"testing"
)

const hintSheet = "work out,label,sample,> mean,> status\nmean-interval,a,1; 2; 3; 4; 5.5,,\nmean-interval,b,1; 2; 3; 4; 5,7,ok\nmean-intervall,c,1; 2,,\n"

func TestResultsAsInlayHints(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, hintSheet)
	everywhere := map[string]any{"range": textRange{position{}, position{9, 0}}}
	var got []string
	for _, h := range into[[]inlayHint](t, e.askAt("textDocument/inlayHint", name, "work|", everywhere)) {
		got = append(got, fmt.Sprintf("%d:%d %s | %s", h.Position.Line, h.Position.Character, h.Label, h.Tooltip))
	}
	// 15.5/5 = 3.1 and 15/5 = 3; the second row's status is held by its cell.
	want := []string{
		"1:32 mean 3.1 | mean: 3.1 (arithmetic mean)",
		"1:33 status ok | status: ok (ok, caution or refused)",
		"2:31 mean 3 | mean: 3 (arithmetic mean)",
		"3:23 status refused | status: refused",
	}
	for i, w := range want {
		if i >= len(got) || !strings.HasPrefix(got[i], strings.Split(w, " |")[0]+" |") {
			t.Fatalf("the hints are\n%s\nwant\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
		}
	}
	if len(got) != len(want) || !strings.Contains(got[0], "| mean: 3.1 (") {
		t.Errorf("the hints are\n%s", strings.Join(got, "\n"))
	}
	one := into[[]inlayHint](t, e.askAt("textDocument/inlayHint", name, "work|", map[string]any{"range": textRange{position{2, 0}, position{2, 99}}}))
	if len(one) != 1 || one[0].Position.Line != 2 {
		t.Errorf("for one line: %+v", one)
	}
	e.found(name)
	e.replace(name, "5.5", "6.5")
	e.found(name)
	for !strings.Contains(strings.Join(e.asked, " "), "workspace/inlayHint/refresh") {
		e.take()
	}
	if got := e.askAt("textDocument/codeLens", name, "work|"); string(got) != "[]" {
		t.Errorf("lenses as well: %s", got)
	}
	e.leave()
}

func TestHowResultsAreShown(t *testing.T) {
	for _, c := range []struct {
		capabilities, options string
		want                  resultsAs
	}{
		{`{}`, ``, asDiagnostics},
		{`{"textDocument":{"codeLens":{}}}`, ``, asCodeLenses},
		{`{"textDocument":{"codeLens":{},"inlayHint":{"dynamicRegistration":false}}}`, ``, asInlayHints},
		{`{"textDocument":{"inlayHint":{}}}`, `{"results":"none"}`, asNothing},
		{`{"textDocument":{"inlayHint":{}}}`, `{"results":"diagnostics"}`, asDiagnostics},
		{`{}`, `{"results":"codeLenses"}`, asCodeLenses},
		{`{}`, `{"results":"bars"}`, asDiagnostics},
		{`{}`, `[1]`, asDiagnostics},
	} {
		if got := chooseResultsAs(&Client{Capabilities: []byte(c.capabilities), Options: []byte(c.options)}); got != c.want {
			t.Errorf("%s with %s: %d, want %d", c.capabilities, c.options, got, c.want)
		}
	}
}

func TestResultsAsDiagnostics(t *testing.T) {
	e := newTextEditor(t, `{}`, "", nil)
	const name = "a.calculations.csv"
	e.open(name, hintSheet)
	var got []string
	for _, d := range e.found(name) {
		if d.Severity == severityHint {
			got = append(got, fmt.Sprintf("%d %s", d.Range.Start.Line, d.Message))
		}
	}
	if len(got) != 2 || got[0] != "1 mean 3.1" || got[1] != "2 mean 3" {
		t.Errorf("the hints are %q", got)
	}
	e.leave()
	if len(e.asked) > 0 {
		t.Errorf("a client that announced nothing was asked %q", e.asked)
	}
}

func TestOnlyWhatIsShownIsAnnounced(t *testing.T) {
	for options, want := range map[string]string{`{"results":"inlayHints"}`: "inlayHintProvider", `{"results":"codeLenses"}`: "codeLensProvider", `{"results":"none"}`: ""} {
		c := begin(t, Options{})
		c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"capabilities":{},"initializationOptions":%s}}`, options)
		reply := c.wantPart(`"id":1`, `"hoverProvider":true`, `"documentSymbolProvider":true`, `"codeActionProvider":true`)
		for _, provider := range []string{"inlayHintProvider", "codeLensProvider"} {
			if strings.Contains(reply, provider) != (provider == want) {
				t.Errorf("%s: %s", options, reply)
			}
		}
		c.leave()
	}
}

func TestNumbersAreShownToSixDigits(t *testing.T) {
	for x, want := range map[any]any{1.0 / 3: 0.333333, 1234567.8: 1234570.0, 0.0: 0.0, 12: 12, 2e-9 / 3: 6.66667e-10, 1e300: 1e300, "ok": "ok"} {
		if got := shown6(x); got != want {
			t.Errorf("%v is shown as %v, want %v", x, got, want)
		}
	}
}
