package texttab

import (
	"strings"
	"testing"
)

var wideTable = &Table{
	Columns: []Column{{Name: "row", Right: true, Key: true}, {Name: "label", Key: true}, {Name: "mean", Right: true},
		{Name: "lower", Right: true}, {Name: "upper", Right: true}, {Name: "status", Strong: []string{"refused"}}},
	Rows: []Row{
		{Cells: []any{7, "minutes of a trip from the depot North to the coast", 31.25, 30.0, 32.5, "ok"}},
		{Cells: []any{12, "東京 depot", 3e-18, nil, 1234567.0, "refused"}, Notes: []string{"The sample holds no number. Check the column and the conditions."}},
	},
}

func longestLine(text string) int {
	longest := 0
	for line := range strings.Lines(text) {
		longest = max(longest, cells(strings.TrimSuffix(line, "\n")))
	}
	return longest
}

func TestTextsAreBrokenWhereATableIsTooWide(t *testing.T) {
	want := `row  label                                  mean  lower      upper  status
  7  minutes of a trip from the depot     31.25      30       32.5  ok
     North to the coast
 12  東京 depot                            3e-18         1234567    refused  [1]

[1] The sample holds no number. Check the column and the conditions.
`
	got := wideTable.layout(Screen{Width: 80, Terminal: true})
	if longestLine(got) > 80 {
		t.Errorf("a line is too long:\n%s", got)
	}
	if got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestATableOfManyColumnsGoesOnBelow(t *testing.T) {
	got := wideTable.layout(Screen{Width: 50, Terminal: true})
	if longestLine(got) > 50 {
		t.Errorf("a line is too long:\n%s", got)
	}
	if strings.Count(got, "row  label") < 2 || strings.Count(got, "東京 depot") != strings.Count(got, "row  label") {
		t.Errorf("the key columns are not repeated:\n%s", got)
	}
	for _, once := range []string{"mean", "lower", "upper", "status", "32.5"} {
		if strings.Count(got, once) != 1 {
			t.Errorf("%s stands %d times:\n%s", once, strings.Count(got, once), got)
		}
	}
}

func TestOnlyStyleDistinguishesAStyledTable(t *testing.T) {
	styled := wideTable.layout(Screen{Width: 80, Terminal: true, Styled: true})
	if !strings.Contains(styled, bold("refused")) || strings.Contains(styled, bold("ok")) || !strings.Contains(styled, bold("mean")) {
		t.Errorf("got\n%q", styled)
	}
	plain := strings.NewReplacer("\x1b[1m", "", "\x1b[0m", "").Replace(styled)
	var trimmed strings.Builder
	for line := range strings.Lines(plain) {
		trimmed.WriteString(strings.TrimRight(line, " \n") + "\n")
	}
	if want := wideTable.layout(Screen{Width: 80, Terminal: true}); trimmed.String() != want {
		t.Errorf("got\n%s\nwant\n%s", trimmed.String(), want)
	}
}

func TestFootnotesStandInTheNotedColumn(t *testing.T) {
	table := &Table{Columns: []Column{{Name: "status", Noted: true, Strong: []string{"refused"}}, {Name: "mean", Right: true}},
		Rows: []Row{{Cells: []any{"ok", 3.5}}, {Cells: []any{"refused", nil}, Notes: []string{"No number."}}}}
	want := "status       mean\nok            3.5\nrefused [1]\n\n[1] No number.\n"
	if got := table.layout(Screen{Width: 80}); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
	if got := table.layout(Screen{Width: 80, Terminal: true, Styled: true}); !strings.Contains(got, bold("refused [1]")) {
		t.Errorf("got\n%q", got)
	}
}

func TestTextsDoNotSteerTheTerminal(t *testing.T) {
	table := &Table{Columns: []Column{{Name: "label"}}, Rows: []Row{{Cells: []any{"\x1b[2J\u202edepot"}, Notes: []string{"holds \a"}}}}
	got := table.layout(Screen{Width: 80, Terminal: true})
	if strings.ContainsAny(got, "\x1b\a\u202e") || !strings.Contains(got, "depot") {
		t.Errorf("got %q", got)
	}
}

// The widths are those of Unicode Standard Annex 11.
func TestCharactersTakeTheirPlaces(t *testing.T) {
	for text, want := range map[string]int{"depot": 5, "Québec": 6, "Que\u0301bec": 6, "東京": 4, "ﾄﾗｯｸ": 4, "전체": 4, "📦": 2} {
		if got := cells(text); got != want {
			t.Errorf("%s takes %d places, want %d", text, got, want)
		}
	}
}

func TestOffATerminalEachRowIsOneLine(t *testing.T) {
	var b strings.Builder
	if err := wideTable.Write(&b, Text); err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(b.String(), "minutes of a trip from the depot North to the coast") || strings.Contains(b.String(), "\x1b") {
		t.Errorf("got\n%s", b.String())
	}
	if got := ScreenOf(&strings.Builder{}); got != (Screen{Width: Width}) {
		t.Errorf("got %+v", got)
	}
}
