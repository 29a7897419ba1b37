package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// OwensT is the probability of 0 < Y < aX and X > h for independent standard
// normal X and Y (Owen 1956, Annals of Mathematical Statistics 27, 1075-1090):
//
//	T(h, a) = 1/(2 pi) times the integral over x from 0 to a of exp(-h^2 (1+x^2)/2)/(1+x^2)
//
// for any h and a; even in h, odd in a. Relative error 1e-13.
func OwensT(h, a float64) float64 {
	h = math.Abs(h)
	switch {
	case math.IsNaN(h) || math.IsNaN(a):
		return math.NaN()
	case a < 0:
		return -OwensT(h, -a)
	case a > 1:
		// Both wedges beside the corner at (h, ah) together, less the other one
		// (Patefield & Tandy 2000, Journal of Statistical Software 5(5), eq. 3).
		// The difference is at least half of the larger term.
		near, far := Normal{}.SF(h), Normal{}.SF(h*a)
		if h == 0 {
			far = 0.5
		}
		return (near+far)/2 - float64(near*far) - OwensT(orZero(h*a), 1/a)
	case math.IsInf(h, 1):
		return 0
	}
	// Gauss-Legendre panels over the part of 0..a where exp(-h^2 x^2/2) has any
	// weight, short beside both its width 1/h and the poles at x = +-i.
	end := a
	width := 1.0
	if h > 1 {
		end = min(a, 9/h)
		width = 2 / h
	}
	panels := math.Ceil(end / width)
	sum := 0.0
	f := func(x float64) float64 {
		y := h * x
		return num.Exp(-float64(y*y)/2) / (1 + float64(x*x))
	}
	for i := 0.0; i < panels; i++ {
		sum += gauss16(f, end*(i/panels), end*((i+1)/panels))
	}
	return Normal{}.Density(h) * sum / math.Sqrt(2*math.Pi)
}

// orZero is x, or 0 for the product of 0 and infinity.
func orZero(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}
