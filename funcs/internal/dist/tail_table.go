package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// tailTable gives the tails of a statistic M of normal variables of known spread
// from polynomials, so that many laws of M/s share the integrals at a few hundred w.
//
// Interpolated is the logarithm of the lower tail, and up to its median what is
// left of 1 gives the upper tail; past it, the quotient of the upper tail and a
// bound that it approaches. Both are smooth, whatever the number of variables, and
// keep the relative error of either tail below 1e-12.
type tailTable struct {
	tail         func(w float64, upper bool) float64 // by integration
	bound        func(w float64) float64             // above the upper tail, near it far out
	signed       bool                                // whether M may be negative
	lower, upper [tablePanels]panel
}

// Panels are even in w, but where M is positive in log w up to w = 1: in u, which
// is then log w below 0 and w - 1 above. They are wide far out, where only the
// quotient is in use and changes slowly, and narrow again where doubles end.
const tablePanels = 48 + 11 + 4 // from u = -16, 8 and 52, to 54, past which no upper tail is a float64

// panelAt is the number and the ends of the panel that holds u.
func panelAt(u float64) (index int, lo, hi float64, ok bool) {
	from, width, before := -16.0, 0.5, 0
	switch {
	case !(u >= -16 && u < 54):
		return 0, 0, 0, false
	case u >= 52:
		from, before = 52, 48+11
	case u >= 8:
		from, width, before = 8, 4, 48
	}
	number := math.Floor((u - from) / width)
	lo = from + float64(number*width)
	return before + int(number), lo, lo + width, true
}

func (t *tailTable) place(w float64) (u float64) {
	switch {
	case t.signed:
		return w
	case w < 1:
		return num.Log(w)
	}
	return w - 1
}

func (t *tailTable) width(u float64) (w float64) {
	switch {
	case t.signed:
		return u
	case u < 0:
		return num.Exp(u)
	}
	return 1 + u
}

// at is P(M <= w) or P(M > w).
func (t *tailTable) at(w float64, upper bool) float64 {
	u := t.place(w)
	index, lo, hi, ok := panelAt(u)
	if !ok {
		return t.tail(w, upper)
	}
	x := 2*(u-lo)/(hi-lo) - 1
	// Where the bound leaves more than half to the lower tail on the whole panel, the
	// upper tail is a quotient in any case.
	if !(upper && t.bound(t.width(lo)) < 0.5) {
		lower := &t.lower[index]
		lower.fill.Do(func() {
			lower.fit(lo, hi, false, func(u float64) float64 { return num.Log(t.tail(t.width(u), false)) })
		})
		switch {
		case lower.end < -45 && upper:
			return 1
		case lower.good && !upper:
			return num.Exp(lower.value(x))
		case !upper:
			return t.tail(w, false)
		case lower.good:
			if l := lower.value(x); l < -0.7 {
				return -num.Expm1(l)
			}
		}
	}
	quotient := &t.upper[index]
	quotient.fill.Do(func() {
		quotient.fit(lo, hi, true, func(u float64) float64 { return t.tail(t.width(u), true) / t.bound(t.width(u)) })
	})
	if !quotient.good {
		return t.tail(w, true)
	}
	return quotient.value(x) * t.bound(w)
}
