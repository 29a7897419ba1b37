package dist

import "math"

// outwards integrates f by the trapezoidal rule, with nodes from centre outwards
// in both directions until, beyond lo and hi, a term is 1e-18 of the largest.
// The step is halved until two sums agree to 1e-8; as the rule converges
// exponentially, the second is then good to 1e-16.
func outwards(f func(float64) float64, centre, lo, hi, step float64) float64 {
	return halving(step, func(first, h float64) float64 {
		left, right := walk(f, centre-first, -h, lo), 0.0
		if first == 0 {
			right = walk(f, centre+h, h, hi)
		} else {
			right = walk(f, centre+first, h, hi)
		}
		return left + right
	})
}

// evenIntegral is the same for an f with f(-x) = f(x), from 0 to reach at least.
func evenIntegral(f func(float64) float64, reach, step float64) float64 {
	return 2 * halving(step, func(first, h float64) float64 {
		if first == 0 {
			return f(0)/2 + walk(f, h, h, reach)
		}
		return walk(f, first, h, reach)
	})
}

// walk sums f at x, x+h, ... until past end a term is 1e-18 of the largest.
func walk(f func(float64) float64, x, h, end float64) float64 {
	sum, peak := 0.0, 0.0
	for range 1000000 {
		y := f(x)
		sum += y
		peak = max(peak, y)
		if !(y > peak*1e-18) && (x-end)*h >= 0 {
			break
		}
		x += h
	}
	return sum
}

// halving is the integral from sums over nodes first, first+h, ... on each side.
func halving(h float64, sum func(first, h float64) float64) float64 {
	total := sum(0, h)
	for range 12 {
		old := total
		total += sum(h/2, h)
		h /= 2
		// Below 1e-315 the terms themselves have few digits left to agree in.
		if !(math.Abs(total-2*old) > max(1e-8*total, 1e-315)) {
			break
		}
	}
	return total * h
}
