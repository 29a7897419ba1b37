package calculation

import (
	"fmt"
	"math"
	"strings"

	"halfwidth/funcs"
)

// totalFrom is the number of values above from which a value may be their sum
// or mean; totalTolerance is how near, relative to the larger of the two.
const (
	totalFrom      = 5
	totalTolerance = 1e-9
)

// totals looks for rows of a sample that sum up the rows above them: by a text
// that starts like a total, or by their value.
//
// Whole numbers meet the mean or a small sum of those above them by chance so
// often that in the middle of a sample such a meeting counts only with a text,
// or as a sum that passes every value above. At the end of a sample, where
// totals stand, it always counts.
type totals struct {
	all, part runningSum // values that are no suspects: from the start, since the last sure suspect
	parted    bool       // there was one; until then both are the same
	suspects  []suspect
	count     int
}

type suspect struct {
	row, place   int
	byText, sure bool // sure: by value, wherever it stands
	byValue      bool
}

type runningSum struct {
	n            int
	sum, largest float64
	first        float64
	varied       bool
	whole        bool
}

func (r *runningSum) add(x float64) {
	if r.n == 0 {
		r.first, r.whole, r.largest, r.varied, r.sum = x, true, 0, false, 0
	}
	r.n++
	r.sum += x
	r.largest = max(r.largest, math.Abs(x))
	r.varied = r.varied || x != r.first
	r.whole = r.whole && x == math.Trunc(x)
}

// matches reports whether x is the sum or the mean, and whether that is no
// chance.
func (r *runningSum) matches(x float64) (match, sure bool) {
	if r.n < totalFrom || !r.varied {
		return false, false
	}
	// Nearly every value is told from both by little work: from the sum, if it
	// is much smaller, and from the mean without a division, not too sharply.
	size, n := math.Abs(r.sum), float64(r.n)
	if 2*math.Abs(x) < size && math.Abs(x*n-r.sum) > 4*totalTolerance*size {
		return false, false
	}
	if alike(x, r.sum) {
		return true, math.Abs(x) > r.largest
	}
	if alike(x, r.sum/n) {
		return true, !r.whole
	}
	return false, false
}

// alike reports whether two numbers are the same but for rounding.
func alike(x, y float64) bool {
	return math.Abs(x-y) <= totalTolerance*max(math.Abs(x), math.Abs(y))
}

// add takes the next value of the sample and whether its row has a text that
// starts like a total.
func (t *totals) add(row int, x float64, byText bool) {
	t.count++
	match, sure := t.all.matches(x)
	if t.parted {
		two, sureTwo := t.part.matches(x)
		match, sure = match || two, sure || sureTwo
	}
	if byText || match {
		t.suspects = append(t.suspects, suspect{row: row, place: t.count, byText: byText, byValue: match, sure: sure})
	}
	if byText || sure {
		t.part, t.parted = runningSum{}, true
		return
	}
	t.all.add(x)
	if t.parted {
		t.part.add(x)
	}
}

// findings gives the caution for the suspects, or the refusal where text and
// value agree.
func (t *totals) findings(sh *sheet, col int, span Span) []fault {
	last := t.count
	for i := len(t.suspects) - 1; i >= 0 && t.suspects[i].place == last; i-- {
		t.suspects[i].sure = t.suspects[i].sure || t.suspects[i].byValue
		last--
	}
	var some, both []string
	for _, s := range t.suspects {
		at := sh.address(s.row, col)
		switch {
		case s.byText && s.byValue:
			both = append(both, at)
		case s.byText || s.sure:
			some = append(some, at)
		}
	}
	var out []fault
	say := func(severity funcs.Severity, cells []string, format string) {
		out = append(out, fault{Finding: funcs.Finding{Code: "looks-like-total", Severity: severity, Cells: cells, Message: fmt.Sprintf(format, few(cells))}, span: span})
	}
	if both != nil {
		say(funcs.Refused, both, "%s holds the sum or mean of the values above it, in a row that names a total. Leave such rows out by a condition, or end the range above them.")
	}
	if some != nil {
		say(funcs.Caution, some, "%s may be a total and not a measurement, by its value or its row's text. Check it; leave such rows out by a condition.")
	}
	return out
}

// few lists the first addresses.
func few(cells []string) string {
	const most = 3
	if len(cells) > most {
		return strings.Join(cells[:most], ", ") + " and " + decimal(len(cells)-most) + " more"
	}
	return funcs.AndList(cells)
}
