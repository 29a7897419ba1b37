package num

import "math"

// Trapezoid integrates a positive f over the whole real line by the trapezoidal
// rule with points centre + k step, halving the step until two sums agree to the
// relative tolerance tol. For an analytic f that falls off on both sides the
// error falls exponentially with 1/step (Trefethen & Weideman 2014, SIAM Review
// 56, 385-458), and halving squares it: two sums that agree to 1e-8 leave an
// error of about 1e-16. Each side is summed outwards from centre until f falls
// below 1e-18 of its largest value there, so centre must lie near the peak.
func Trapezoid(f func(float64) float64, centre, step, tol float64) float64 {
	side := func(first, h float64) float64 {
		var s, peak float64
		for i := range 100000 {
			y := f(first + float64(float64(i)*h))
			s += y
			peak = max(peak, y)
			if !(y > peak*1e-18) {
				break
			}
		}
		return s
	}
	h := step
	sum := side(centre, h) + side(centre-h, -h)
	for range 12 {
		finer := sum + side(centre+float64(h/2), h) + side(centre-float64(h/2), -h)
		before, now := float64(sum*h), float64(finer*h/2)
		sum, h = finer, h/2
		if d := now - before; math.Abs(d) <= float64(tol*now) {
			break
		}
	}
	return sum * h
}
