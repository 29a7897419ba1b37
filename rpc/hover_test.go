package rpc

import (
	"strings"
	"testing"
)

func TestHover(t *testing.T) {
	const sheet = "work out,label,sample,confidence,> mean,> status\nmean-interval,North *,1; 2; 3; 4; 5.5,95%,3.1,\nmean-interval,few,1; 2,,,\nmean-intervall,,1; 2,,,\n"
	for _, c := range []struct {
		marked string
		want   []string
		not    string
	}{
		{"mean-in|terval,North", []string{"## mean-interval", "Inputs:", "- `sample` (sample; "}, "status"},
		{"work |out", []string{"**work out**"}, ""},
		{"conf|idence", []string{"**confidence**", "(level: ", "left out: 0.95"}, ""},
		{"> mea|n", []string{"**mean**"}, ""},
		{"lab|el", []string{"**label**"}, ""},
		{"1; 2; 3|", []string{"**sample**", `North \*, mean-interval: **ok**`, "- mean: 3.1\n", "- used: 5", "The mean is 3.1"}, "refused"},
		{"5.5,95|%", []string{"**confidence**"}, ""},
		{"few,1; |2", []string{"**caution**", "- caution: The sample has only 2 values"}, "refused"},
		{"mean-intervall,|,1", []string{"**refused**", "- refused: A4 names no function"}, "mean:"},
	} {
		for _, capabilities := range []string{everything, `{}`} {
			e := newTextEditor(t, capabilities, "", nil)
			const name = "a.calculations.csv"
			e.open(name, sheet)
			result := e.askAt("textDocument/hover", name, c.marked)
			h := into[hoverAnswer](t, result)
			kind := "plaintext"
			if capabilities == everything {
				kind = "markdown"
			}
			text := h.Contents.Value
			for _, want := range c.want {
				if kind == "plaintext" {
					want = strings.NewReplacer("**", "", `\*`, "*", "## ", "", "`", "").Replace(want)
				}
				if h.Contents.Kind != kind || !strings.Contains(text, want) {
					t.Errorf("%s: %s lacks %q", c.marked, result, want)
				}
			}
			if c.not != "" && strings.Contains(text, c.not) {
				t.Errorf("%s: %s holds %q", c.marked, result, c.not)
			}
			e.leave()
		}
	}
}

func TestHoverOutsideBlocksIsNothing(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, "a remark\n\nwork out,sample,> mean,mine\nmean-interval,1; 2,,x\n")
	for _, marked := range []string{"a rem|ark", "mi|ne"} {
		if got := e.askAt("textDocument/hover", name, marked); string(got) != "null" {
			t.Errorf("%s: %s", marked, got)
		}
	}
	e.leave()
}

func TestSignatureHelpFollowsTheColumn(t *testing.T) {
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, "work out,label,sample,confidence,> mean\nmean-interval,a,1; 2,95%,\nxx,,1,,\n")
	for marked, want := range map[string]string{"a,1|; 2": "sample", "2,95|%": "confidence", "2,|95%": "confidence"} {
		h := into[signatureHelp](t, e.askAt("textDocument/signatureHelp", name, marked))
		s := h.Signatures[0]
		span := s.Parameters[h.ActiveParameter].Label.([]any)
		if got := s.Label[int(span[0].(float64)):int(span[1].(float64))]; got != want || !strings.HasPrefix(s.Label, "mean-interval(sample, ") {
			t.Errorf("%s: %s of %s, want %s", marked, got, s.Label, want)
		}
	}
	for _, marked := range []string{"mean-int|erval", "xx,,1|", "work|", "a|,1"} {
		if got := e.askAt("textDocument/signatureHelp", name, marked); string(got) != "null" {
			t.Errorf("%s: %s", marked, got)
		}
	}
	e.leave()
}

func TestSymbolsNameTheCalculations(t *testing.T) {
	const text = "work out,label,sample,> mean\nmean-interval,North,1; 2,\nmean-interval,,1; 2,\n,,1,\n\nx,work out: sd-interval,sample,> sd\n,a,1; 2,\n"
	e := newTextEditor(t, everything, "", nil)
	const name = "a.calculations.csv"
	e.open(name, text)
	list := into[[]documentSymbol](t, e.askAt("textDocument/documentSymbol", name, "work|"))
	var names []string
	within := func(inner, outer textRange) bool {
		l := e.buffers[name]
		return l.offset(outer.Start) <= l.offset(inner.Start) && l.offset(inner.End) <= l.offset(outer.End)
	}
	var walk func(list []documentSymbol, outer textRange)
	walk = func(list []documentSymbol, outer textRange) {
		for _, s := range list {
			names = append(names, s.Name)
			if !within(s.SelectionRange, s.Range) || !within(s.Range, outer) {
				t.Errorf("%+v does not lie in %+v", s, outer)
			}
			walk(s.Children, s.Range)
		}
	}
	walk(list, textRange{position{}, position{99, 0}})
	if got := strings.Join(names, "; "); got != "work out; North; mean-interval; row 4; work out: sd-interval; a" {
		t.Errorf("the symbols are %s", got)
	}
	e.leave()

	e = newTextEditor(t, `{}`, "", nil)
	e.open(name, text)
	flat := into[[]symbolInformation](t, e.askAt("textDocument/documentSymbol", name, "work|"))
	if len(flat) != 6 || flat[1].Name != "North" || flat[1].Container != "work out" || flat[1].Location.URI != e.uri(name) {
		t.Errorf("the flat symbols are %+v", flat)
	}
	e.leave()
}
