package page

import (
	"cmp"
	"slices"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// severityWords begin a finding, so that its form alone does not carry it.
var severityWords = map[funcs.Severity]string{funcs.Refused: "Refused.", funcs.Caution: "Caution.", funcs.Information: "Note."}

func newFinding(d calculation.Diagnostic) finding {
	return finding{Severity: d.Severity.String(), Word: severityWords[d.Severity], Message: d.Message}
}

// ofReading are the findings about how cells were read: of cautions, they come
// after those about what the values say.
var ofReading = map[string]bool{"cells-skipped": true, "text-looks-like-number": true, "saved-formula-values": true,
	"hidden-rows-counted": true, "gap-in-table": true, "repeated-header": true}

// mostLinks is how many calculations a finding of the summary names.
const mostLinks = 12

// firstFindings are the refusals and cautions of all calculations, the most
// serious first, each kind once, with the calculations that have it.
func firstFindings(rows []*calculation.RowResult, cards []card) []finding {
	type kind struct {
		finding
		severity funcs.Severity
		code     string
		last     int // the calculation named last
	}
	var kinds []*kind
	for i, row := range rows {
		for _, d := range row.Findings {
			if d.Severity == funcs.Information {
				continue
			}
			at := slices.IndexFunc(kinds, func(k *kind) bool { return k.code == d.Code && k.severity == d.Severity })
			if at < 0 {
				at = len(kinds)
				kinds = append(kinds, &kind{finding: newFinding(d), severity: d.Severity, code: d.Code, last: -1})
			}
			k := kinds[at]
			if k.last == i {
				continue
			}
			k.last = i
			if len(k.Cards) < mostLinks {
				k.Cards = append(k.Cards, link{cards[i].ID, cards[i].Title})
			} else {
				k.More++
			}
		}
	}
	slices.SortStableFunc(kinds, func(a, b *kind) int {
		return cmp.Or(cmp.Compare(b.severity, a.severity), cmp.Compare(rank(a.code), rank(b.code)))
	})
	out := make([]finding, len(kinds))
	for i, k := range kinds {
		out[i] = k.finding
	}
	return out
}

func rank(code string) int {
	if ofReading[code] {
		return 1
	}
	return 0
}
