package num

import "math"

// Root finds where the monotone function f changes sign between lo and hi, down
// to neighbouring doubles: inverse quadratic interpolation guarded by bisection
// (T. Chandrupatla 1997, Advances in Engineering Software 28, 145-149), and
// bisection over the doubles in the bracket whenever three steps have not halved
// their number, so that no more than about 260 calls are ever made. f may be
// infinite. ok is false when f has the same sign at both ends or is NaN on the way.
func Root(f func(float64) float64, lo, hi float64) (x float64, ok bool) {
	a, b := lo, hi
	fa, fb := f(a), f(b)
	switch {
	case fa == 0:
		return a, true
	case fb == 0:
		return b, true
	case !(fa < 0 && fb > 0) && !(fa > 0 && fb < 0):
		return math.NaN(), false
	}
	t := 0.5
	width, steps := doublesBetween(a, b), 0
	for {
		count := doublesBetween(a, b)
		if count <= 1 {
			if math.Abs(fb) < math.Abs(fa) {
				return b, true
			}
			return a, true
		}
		if count <= width/2 {
			width, steps = count, 0
		}
		x = a + float64(t*(b-a))
		if steps++; steps > 3 || !(x > min(a, b) && x < max(a, b)) {
			x = middleDouble(a, b)
			width, steps = count, 0
		}
		fx := f(x)
		if fx == 0 {
			return x, true
		}
		if math.IsNaN(fx) {
			return math.NaN(), false
		}
		c, fc := a, fa
		if (fx < 0) != (fa < 0) {
			c, fc = b, fb
			b, fb = a, fa
		}
		a, fa = x, fx
		t = Interpolated(a, fa, b, fb, c, fc)
		// Off the ends by a few doubles, so that the far end comes near as well.
		edge := 4 * 0x1p-53 * math.Abs(a) / math.Abs(b-a)
		if !(t >= edge) {
			t = min(edge, 0.5)
		}
		t = min(t, 1-min(edge, 0.5))
	}
}

// Interpolated is where on the way from a, the newest point, to b, across the root
// from it, a function seems to be 0: by inverse quadratic interpolation through
// these two and c, the point before a, where Chandrupatla's condition allows it,
// else halfway.
func Interpolated(a, fa, b, fb, c, fc float64) (share float64) {
	xi, phi := (a-b)/(c-b), (fa-fb)/(fc-fb)
	if float64(phi*phi) < xi && float64((1-phi)*(1-phi)) < 1-xi {
		return float64(fa/(fb-fa)*(fc/(fb-fc))) + float64((c-a)/(b-a)*(fa/(fc-fa))*(fb/(fc-fb)))
	}
	return 0.5
}

// doublesBetween is how many steps to a neighbouring double lead from a to b.
func doublesBetween(a, b float64) uint64 {
	i, j := orderOf(a), orderOf(b)
	return max(i, j) - min(i, j)
}

// middleDouble is the double in the middle of all doubles from a to b.
func middleDouble(a, b float64) float64 {
	i, j := orderOf(a), orderOf(b)
	return ofOrder(min(i, j) + (max(i, j)-min(i, j))/2)
}

// Smallest is the smallest n in [lo, hi] for which ok holds, where ok, once it
// holds, holds for every larger n. The search goes out from start in doubling
// steps and then halves what is left, so that it asks about 2 log2 of the
// distance from start. found is false when ok does not hold at hi.
func Smallest(lo, hi, start int, ok func(n int) bool) (n int, found bool) {
	if lo > hi {
		return 0, false
	}
	// ok fails at low (or low is below lo) and holds at high.
	low, high := lo-1, hi
	start = min(max(start, lo), hi)
	if ok(start) {
		high = start
		for step := 1; high > lo; step *= 2 {
			next := lo
			if high-lo > step {
				next = high - step
			}
			if !ok(next) {
				low = next
				break
			}
			high = next
		}
	} else {
		low = start
		for step := 1; ; step *= 2 {
			if low == hi {
				return 0, false
			}
			next := hi
			if hi-low > step {
				next = low + step
			}
			if ok(next) {
				high = next
				break
			}
			low = next
		}
	}
	for high-low > 1 {
		if mid := low + (high-low)/2; ok(mid) {
			high = mid
		} else {
			low = mid
		}
	}
	return high, true
}
