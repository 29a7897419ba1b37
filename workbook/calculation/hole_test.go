package calculation

import (
	"slices"
	"strings"
	"testing"
)

// What may be written where the mark | stands.
func TestWhatMayStandInAnExpression(t *testing.T) {
	for _, c := range []struct {
		text   string
		kind   HoleKind
		begun  string
		words  string // one of those offered
		place  string
		column string
	}{
		{"|", StartHole, "", "count in", "", ""},
		{"min|", StartHole, "min", "", "", ""},
		{"minutes |", WordHole, "", "in", "", ""},
		{"minutes in |", PlaceHole, "", "", "", ""},
		{"minutes in tri|", PlaceHole, "tri", "", "tri", ""},
		{"minutes in book.xlsx/Tri|", PlaceHole, "book.xlsx/Tri", "", "book.xlsx/Tri", ""},
		{`minutes in "Night sh|`, PlaceHole, "Night sh", "", "", ""},
		{"| in trips.csv", StartHole, "", "", "trips.csv", ""},
		{"mi| in trips.csv", StartHole, "mi", "", "trips.csv", ""},
		{"columns North, | in trips.csv", ColumnHole, "", "", "trips.csv", ""},
		{"sum of | in trips.csv", ColumnHole, "", "", "trips.csv", ""},
		{"minutes in trips.csv |", WordHole, "", "where", "trips.csv", ""},
		{"minutes in trips.csv wh|", WordHole, "wh", "for each", "trips.csv", ""},
		{"minutes in trips.csv where |", ColumnHole, "", "row is visible", "trips.csv", ""},
		{"minutes in trips.csv where depot |", WordHole, "", "=", "trips.csv", ""},
		{"minutes in trips.csv where depot = |", ValueHole, "", "", "trips.csv", "depot"},
		{"minutes in trips.csv where depot =No|", ValueHole, "No", "", "trips.csv", "depot"},
		{"minutes in trips.csv where depot is one of North; Q|", ValueHole, "Q", "", "trips.csv", "depot"},
		{"minutes in trips.csv where depot = North |", WordHole, "", "and", "trips.csv", ""},
		{"minutes in trips.csv where depot = North and sh|", ColumnHole, "sh", "", "trips.csv", ""},
		{"minutes in trips.csv where shift is |", WordHole, "", "missing", "trips.csv", ""},
		{"minutes in trips.csv for |", WordHole, "", "each", "trips.csv", ""},
		{"minutes in trips.csv for each |", ColumnHole, "", "", "trips.csv", ""},
		{"minutes in trips.csv matched by |", ColumnHole, "", "", "trips.csv", ""},
		{`"handling time" (|) in trips.csv`, WordHole, "", "minutes", "trips.csv", ""},
		{"count in trips.csv where damaged = |", ValueHole, "", "", "trips.csv", "damaged"},
		{"12.1; 11|", NoHole, "11", "", "", ""},
		{"minutes in trips.csv for each depot |", NoHole, "", "", "trips.csv", ""},
	} {
		text, after, _ := strings.Cut(c.text, "|")
		at := len(text)
		h := HoleAt(text+after, at)
		place := ""
		if h.Place != nil {
			place = h.Place.String()
		}
		if h.Kind != c.kind || h.Begun != c.begun || place != c.place {
			t.Errorf("%s: %+v (%s), want kind %d, begun %q, place %q", c.text, h, place, c.kind, c.begun, c.place)
		}
		if c.words != "" && !slices.Contains(h.Words, c.words) {
			t.Errorf("%s: offers %q, not %q", c.text, h.Words, c.words)
		}
		if h.Kind == ValueHole && h.Column != c.column {
			t.Errorf("%s: the values of %q", c.text, h.Column)
		}
	}
}

// The stretch that a completion replaces goes on behind the place where it is asked.
func TestTheWordRoundAPlaceIsReplacedWhole(t *testing.T) {
	for text, want := range map[string]string{
		"minutes in tri|ps.csv where x = 1":  "trips.csv",
		`minutes in "Night| shift" where x`:  `"Night shift"`,
		`minutes in "Night|`:                 `"Night`,
		"minutes in | trips.csv":             "",
		"minutes in trips.csv where depot=|": "",
	} {
		before, after, _ := strings.Cut(text, "|")
		h := HoleAt(before+after, len(before))
		if got := (before + after)[h.Span.Start:h.Span.End]; got != want {
			t.Errorf("%s: replaces %q, want %q", text, got, want)
		}
	}
}

func FuzzHoleAt(f *testing.F) {
	f.Add(`minutes in "Night shift" where depot is one of North; "Q" for each x`, 20)
	f.Add("columns A, \"B\" in book.xlsx/'T t' where row is visible and x <> 2024-03-01 08:00", 70)
	f.Fuzz(func(t *testing.T, text string, at int) {
		h := HoleAt(text, at)
		if s := h.Span; s.Start < 0 || s.Start > s.End || s.End > len(text) {
			t.Fatalf("the span is %v of %q", s, text)
		}
	})
}
