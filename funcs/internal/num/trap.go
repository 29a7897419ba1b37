package num

// Trapezoid integrates f over the whole real line by the trapezoidal rule,
// starting at centre with the given step and halving it until two sums agree to
// the relative tolerance tol.
func Trapezoid(f func(float64) float64, centre, step, tol float64) float64 {
	side := func(first, h float64) float64 {
		var s, peak float64
		for x, i := first, 0; i < 100000; x, i = x+h, i+1 {
			y := f(x)
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
		finer := sum + side(centre+h/2, h) + side(centre-h/2, -h)
		old, now := sum*h, finer*h/2
		sum, h = finer, h/2
		if d := now - old; d <= tol*now && -d <= tol*now {
			break
		}
	}
	return sum * h
}
