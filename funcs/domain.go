package funcs

import (
	"math"
	"strconv"
)

// Domain is an interval of numbers. Its String is the one wording used in
// documentation, errors and schemas.
type Domain struct {
	Low, High         float64
	LowOpen, HighOpen bool // the end itself is left out
	Whole             bool // whole numbers only
}

// The intervals that the catalogue uses by name.
var (
	anyNumber         = Domain{Low: math.Inf(-1), High: math.Inf(1), LowOpen: true, HighOpen: true}
	positive          = Domain{Low: 0, High: math.Inf(1), LowOpen: true, HighOpen: true}
	nonNegative       = Domain{Low: 0, High: math.Inf(1), HighOpen: true}
	betweenZeroAndOne = Domain{Low: 0, High: 1, LowOpen: true, HighOpen: true}
	fromZeroToOne     = Domain{Low: 0, High: 1}
)

// atLeast is the domain of numbers from low upward.
func atLeast(low float64) Domain { return Domain{Low: low, High: math.Inf(1), HighOpen: true} }

// Contains reports whether x lies in the interval; NaN lies in none.
func (d Domain) Contains(x float64) bool {
	above := x > d.Low || (x == d.Low && !d.LowOpen)
	below := x < d.High || (x == d.High && !d.HighOpen)
	return above && below && (!d.Whole || x == math.Trunc(x))
}

// String words the interval: "greater than 0", "a whole number from 0 to 1".
func (d Domain) String() string {
	if d.Whole {
		d.Whole = false
		if d.High == largestCount {
			d.High, d.HighOpen = math.Inf(1), true
		}
		return "a whole number, " + d.String()
	}
	low, high := !math.IsInf(d.Low, -1), !math.IsInf(d.High, 1)
	lo, hi := FormatNumber(d.Low), FormatNumber(d.High)
	switch {
	case !low && !high:
		return "any number"
	case low && !high && d.LowOpen:
		return "greater than " + lo
	case low && !high:
		return lo + " or more"
	case !low && d.HighOpen:
		return "less than " + hi
	case !low:
		return hi + " or less"
	case d.LowOpen && d.HighOpen:
		return "strictly between " + lo + " and " + hi
	case d.LowOpen:
		return "greater than " + lo + ", at most " + hi
	case d.HighOpen:
		return "at least " + lo + ", less than " + hi
	default:
		return "from " + lo + " to " + hi
	}
}

// FormatNumber writes x in the shortest form that parses back to the same double.
func FormatNumber(x float64) string {
	if a := math.Abs(x); a != 0 && (a < 1e-5 || a >= 1e21) {
		return strconv.FormatFloat(x, 'e', -1, 64)
	}
	return strconv.FormatFloat(x, 'f', -1, 64)
}
