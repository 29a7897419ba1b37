package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// largestLog is the logarithm of nearly the largest float64.
const largestLog = 709.78

// crossing finds where the monotone function f passes 0. It walks from x in
// steps that double until f changes sign, within lo and hi, then narrows the
// bracket by inverse quadratic interpolation guarded by bisection (Chandrupatla
// 1997, Advances in Engineering Software 28, 145-149) until it is two units in
// the last place of x wide, or f is as near to 0 as the rounding of numbers of
// the given size lets it come. f may be infinite but not NaN. Where f keeps its
// sign to the end of the interval, that end is the answer.
func crossing(f func(float64) float64, x, step, lo, hi, size float64) float64 {
	return crossingWithin(f, x, step, lo, hi, 2e-16, 4e-16*max(1, size))
}

// crossingWithin is crossing to a bracket of tol*max(1, |x|), or |f| <= near.
func crossingWithin(f func(float64) float64, x, step, lo, hi, tol, near float64) float64 {
	x = min(max(x, lo), hi)
	fx := f(x)
	if math.Abs(fx) <= near || math.IsNaN(fx) {
		return x
	}
	// The side is found by one trial step, so f may rise or fall.
	a, fa := x, fx
	b := min(x+step, hi)
	if b == a {
		step = -step
		b = max(x+step, lo)
	}
	fb := f(b)
	if (fa < 0) == (fb < 0) && math.Abs(fb) > math.Abs(fa) {
		step = -step
		a, fa, b, fb = b, fb, a, fa
	}
	for fb != 0 && (fa < 0) == (fb < 0) {
		if b <= lo || b >= hi {
			return b
		}
		step *= 2
		a, fa = b, fb
		b = min(max(b+step, lo), hi)
		fb = f(b)
		if math.IsNaN(fb) {
			return a
		}
	}
	if fb == 0 {
		return b
	}
	return chandrupatla(f, a, fa, b, fb, tol, near)
}

// chandrupatla narrows the bracket a, b, where f has opposite signs.
func chandrupatla(f func(float64) float64, a, fa, b, fb, tol, near float64) float64 {
	t := 0.5
	if !math.IsInf(fa, 0) && !math.IsInf(fb, 0) {
		t = fa / (fa - fb)
	}
	for range 200 {
		best, fbest := a, fa
		if math.Abs(fb) < math.Abs(fa) {
			best, fbest = b, fb
		}
		width := tol * max(1, math.Abs(best))
		if math.Abs(fbest) <= near || math.Abs(b-a) <= width {
			return best
		}
		// Stay half a tolerance away from both ends, so that the bracket closes.
		edge := min(0.5, width/2/math.Abs(b-a))
		x := a + float64(min(max(t, edge), 1-edge)*(b-a))
		if x == a || x == b {
			return best
		}
		fx := f(x)
		if math.IsNaN(fx) {
			return best
		}
		c, fc := a, fa
		if (fx < 0) != (fa < 0) {
			c, fc = b, fb
			b, fb = a, fa
		}
		a, fa = x, fx
		if t = num.Interpolated(a, fa, b, fb, c, fc); math.IsNaN(t) {
			t = 0.5
		}
	}
	return a/2 + b/2
}
