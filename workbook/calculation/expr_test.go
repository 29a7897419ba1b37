package calculation

import (
	"errors"
	"strings"
	"testing"
)

func TestEveryFormOfTheGrammarIsReadAndWrittenCanonically(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		// Numbers, written out.
		{"12.1; 11.8; 12.6", "12.1; 11.8; 12.6"},
		{"  -3 ;+4; 1e3 ;.5", "-3; 4; 1000; 0.5"},
		{"−3", "-3"},
		{"95%", "0.95"},
		{"95 %", "0.95"},
		{"0.1%", "0.001"},
		{"7%; 1e1%", "0.07; 0.1"},
		{"North = 120; Quay = 80", "North = 120; Quay = 80"},
		{"\"Mill 2\"=3;'Fell'=4", `"Mill 2" = 3; Fell = 4`},
		{"B7; $C$8", "B7; C8"},
		{"North = B7", "North = B7"},

		// Ranges.
		{"Trips!C2:C61", "Trips!C2:C61"},
		{`"Night shift"!C:C`, `"Night shift"!C:C`},
		{"'Night shift'!$c$61:$c$2", `"Night shift"!C2:C61`},
		{"Night shift'!C:C", `"Night shift"!C:C`}, // the leading quote swallowed
		{"“Night shift”!C:C", `"Night shift"!C:C`},
		{"„Night shift“!3:4", `"Night shift"!3:4`},
		{"‘Driver’’s log’!C2", `"Driver’s log"!C2`},
		{"Driver’s!C2", "Driver’s!C2"},
		{"B7", "B7"},
		{"b7:b9", "B7:B9"},
		{"other-book.xlsx/Trips!C2:C61", "other-book.xlsx/Trips!C2:C61"},
		{"other-book.xlsx/'Night shift'!C2", `other-book.xlsx/"Night shift"!C2`},
		{"'my book.xlsx'/'Night shift'!C2", `"my book.xlsx"/"Night shift"!C2`},

		// Columns.
		{"minutes in Trips", "minutes in Trips"},
		{"MINUTES IN Trips", "MINUTES in Trips"},
		{"minutes\u00a0in\nTrips", "minutes in Trips"},
		{"2024 in Sales", "2024 in Sales"},
		{"Q1 in Sales", "Q1 in Sales"},
		{`"sum" in Trips`, `"sum" in Trips`},
		{`sum in Trips`, `"sum" in Trips`},
		{`"say ""when""" in Trips`, `"say ""when""" in Trips`},
		{"handling time' in Trips", `"handling time" in Trips`},
		{"\"handling time\" (minutes) in Trips", `"handling time" (minutes) in Trips`},
		{"wait (Hour) in Trips", "wait (hours) in Trips"},
		{"minutes in Trips where depot = North and minutes > 0", "minutes in Trips where depot = North and minutes > 0"},
		{"minutes in Trips where a<>\"b\" and c<=1 and d>=2 and e<-3", `minutes in Trips where a <> "b" and c <= 1 and d >= 2 and e < -3`},
		{"minutes in Trips where a ≤ 1 and b ≥ 2 and c ≠ 3 and d != 4", "minutes in Trips where a <= 1 and b >= 2 and c <> 3 and d <> 4"},
		{"minutes in Trips where depot is missing and x is present", "minutes in Trips where depot is missing and x is present"},
		{"minutes in Trips where depot is one of North; 'Quay';3 and row is visible",
			`minutes in Trips where depot is one of North; "Quay"; 3 and row is visible`},
		{"minutes in Trips where row is missing", `minutes in Trips where "row" is missing`},
		{"minutes in Trips where count > 3", `minutes in Trips where "count" > 3`},
		{"minutes in Trips where day >= 2024-03-01 and day < 2024-03-02 08:30", "minutes in Trips where day >= 2024-03-01 and day < 2024-03-02T08:30:00"},
		{"minutes in Trips where day = 2024-02-30", "minutes in Trips where day = 2024-02-30"},
		{"minutes in Trips where share > 5%", "minutes in Trips where share > 0.05"},
		{"minutes in Trips where share > 5 % and a = b", "minutes in Trips where share > 0.05 and a = b"},
		{"minutes in Trips for each depot", "minutes in Trips for each depot"},
		{"columns North, Quay, \"Mill 2\" in Trips", `columns North, Quay, "Mill 2" in Trips`},
		{"before in Trips where x = y matched by trip-id", "before in Trips where x = y matched by trip-id"},
		{"count in Trips where damaged = yes", "count in Trips where damaged = yes"},
		{"Count in Trips for each depot", "count in Trips for each depot"},
		{"sum of parcels in Trips where depot = North", "sum of parcels in Trips where depot = North"},
		{"minutes in header row 3 in Trips", "minutes in header row 3 in Trips"},
		{"minutes header row 3 in Trips", "minutes in header row 3 in Trips"},
		{"header row 3 in minutes in Trips where a = 1", "minutes in header row 3 in Trips where a = 1"},
		{"count in header row 3 in Trips", "count in header row 3 in Trips"},

		// Files.
		{"minutes in trips.csv where shift <> night", "minutes in trips.csv where shift <> night"},
		{"minutes in other-book.xlsx/Trips", "minutes in other-book.xlsx/Trips"},
		{"minutes in 'my book.xlsx'/Trips", `minutes in "my book.xlsx"/Trips`},
		{"minutes in week/trips.TSV", "minutes in week/trips.TSV"},
		{`minutes in "trips.csv"`, `minutes in "trips.csv"`}, // a sheet of that name
	} {
		e, err := ParseExpression(c.text)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		if got := e.String(); got != c.want {
			t.Errorf("%s is written %s, want %s", c.text, got, c.want)
		}
		checkCanonical(t, e)
	}
}

// checkCanonical fails where the canonical text is not read back as itself.
func checkCanonical(t *testing.T, e Expr) {
	t.Helper()
	text := e.String()
	again, err := ParseExpression(text)
	if err != nil {
		t.Fatalf("canonical %q is not read: %v", text, err)
	}
	if again.String() != text {
		t.Fatalf("canonical %q is written %q when read again", text, again)
	}
}

func TestSyntaxErrorsNamePositionFoundAndWhatToWrite(t *testing.T) {
	// The part that is wrong stands between ⟦ and ⟧.
	for _, c := range []struct{ marked, want string }{
		{"⟦⟧", "write numbers"},
		{"12⟦,⟧5", ". as the decimal mark"},
		{"12.1⟦,⟧ 11.8", "write numbers with ; between them"},
		{"12;⟦⟧", "write a number here"},
		{"12; ⟦abc⟧", "write a number, with ."},
		{"12 ⟦13⟧", "expected ; between numbers"},
		{"Trips⟦⟧", "write where the column is: Trips in SHEET"},
		{"handling ⟦time⟧ in Trips", "stand in quotes"},
		{"minutes in Trips ⟦wehre⟧ depot = North", `did you mean "where"?`},
		{"minutes in Trips where depot = Night ⟦shift⟧", "stand in quotes"},
		{"minutes in Trips where depot ⟦North⟧", "write =, <>"},
		{"minutes in Trips where depot is ⟦North⟧", "for equal write ="},
		{"minutes in Trips where depot = ⟦⟧", "write a value here"},
		{"minutes in Trips where depot = ⟦and⟧ x = 1", `"and"`},
		{"minutes in Trips where depot is one of North⟦,⟧ Quay", "write ; between the values"},
		{"minutes in Trips where x > 1⟦,⟧5", ". as the decimal mark"},
		{"minutes in Trips where depot = ⟦\"\"⟧", "is missing"},
		{"minutes in Trips for each depot ⟦where⟧ x = 1", "the order is"},
		{"minutes in Trips for ⟦depot⟧", "for each"},
		{"columns A⟦;⟧ B in Trips", "comma"},
		{"columns A, B in Trips ⟦for⟧ each depot", "samples already"},
		{"A⟦,⟧ B in Trips", "columns A"},
		{"weight (⟦kg⟧) in Trips", "seconds, minutes, hours or days"},
		{"wait (⟦minuts⟧) in Trips", `did you mean "minutes"?`},
		{"minutes in ⟦\"Trips⟧", "end the quote"},
		{"minutes in ⟦⟧", "a sheet"},
		{"minutes in ⟦where⟧ x = 1", "in quotes"},
		{"Trips!⟦minutes⟧", "a range such as"},
		{"Trips!C2:C61 ⟦where⟧ x = 1", "need a column"},
		{"count in Trips ⟦matched⟧ by x", "leave it out"},
		{"minutes in header row ⟦x⟧ in Trips", "number of the header's row"},
		{"⟦header⟧ row 3 in 12; 13", "goes with a column"},
		{"ä = ⟦x⟧", "write a number"},
	} {
		before, rest, _ := strings.Cut(c.marked, "⟦")
		part, after, _ := strings.Cut(rest, "⟧")
		text := before + part + after
		_, err := ParseExpression(text)
		var syntax *SyntaxError
		if !errors.As(err, &syntax) {
			t.Errorf("%s: got %v, want a SyntaxError", text, err)
			continue
		}
		if want := (Span{len(before), len(before) + len(part)}); syntax.Span != want {
			t.Errorf("%s: error at %q, want it at %q (%v)", text, text[syntax.Span.Start:syntax.Span.End], part, err)
		}
		if !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %q does not say %q", text, err, c.want)
		}
	}
}

func TestErrorCountsCharactersNotBytes(t *testing.T) {
	_, err := ParseExpression("Wärme in Trips wehre x = 1")
	if err == nil || !strings.HasPrefix(err.Error(), "character 16, at wehre: ") {
		t.Errorf("got %v, want the position in characters", err)
	}
}

func TestOffsetsConvertBetweenBytesAndUTF16(t *testing.T) {
	text := "a𝔸ä😀b" // 1, 2, 1, 2 and 1 units; 1, 4, 2, 4 and 1 bytes
	for _, c := range []struct{ bytes, units int }{{0, 0}, {1, 1}, {5, 3}, {7, 4}, {11, 6}, {12, 7}} {
		if got := ByteToUTF16(text, c.bytes); got != c.units {
			t.Errorf("byte %d is unit %d, want %d", c.bytes, got, c.units)
		}
		if got := UTF16ToByte(text, c.units); got != c.bytes {
			t.Errorf("unit %d is byte %d, want %d", c.units, got, c.bytes)
		}
	}
	if got := UTF16ToByte(text, 2); got != 1 {
		t.Errorf("inside a pair of units: byte %d, want that of its character, 1", got)
	}
}

func TestAreasAreReadAsA1References(t *testing.T) {
	for text, want := range map[string]string{
		"C2:C61": "C2:C61", "$C$2:$D$61": "C2:D61", "d9:b1": "B1:D9", "C:C": "C:C", "d:b": "B:D", "3:4": "3:4", "XFD1048576": "XFD1048576",
		"XFE1": "", "A0": "", "A01": "", "A1048577": "", "A": "", "7": "", "A1:B": "", "A:7": "", "A$": "", "$": "", "A1:": "", "": "", "ABCD1": "",
	} {
		a, ok := ParseArea(text)
		if got := a.String(); ok != (want != "") || ok && got != want {
			t.Errorf("%q: got %q %v, want %q", text, got, ok, want)
		}
	}
}

func FuzzExpression(f *testing.F) {
	for _, seed := range []string{"12.1; 11.8", "North = 120; \"Q\" = B7", "'Night shift'!C:C", "minutes in Trips where a is one of b; 3 and row is visible for each x",
		"sum of x (minutes) in a.xlsx/\"b c\" where d >= 2024-03-01 08:00 matched by k", "“a”/x.csv", "header row 3 in count in a"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		e, err := ParseExpression(text)
		if err == nil {
			checkCanonical(t, e)
			return
		}
		var syntax *SyntaxError
		if !errors.As(err, &syntax) {
			t.Fatalf("%q: error of type %T", text, err)
		}
		if s := syntax.Span; s.Start < 0 || s.End < s.Start || s.End > len(text) {
			t.Fatalf("%q: error at %v, outside the text", text, s)
		}
		_ = err.Error()
	})
}
