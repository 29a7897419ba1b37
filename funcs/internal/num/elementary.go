package num

import "math"

// The elementary functions below give the same digits on every processor: the
// standard library's Exp and Log are assembly on some and may be fused on
// others, so a result written on one machine could differ in its last digit on
// the next. Each product is rounded on its own. Largest relative errors seen:
// Exp and Log 1.2e-16, Log1p 1.3e-16, Expm1 2.7e-16, Log1pmx 3.5e-16.

const (
	ln2Hi = 0x1.62e42fefap-1 // 37 bits, so that k*ln2Hi is exact for |k| < 2^16
	ln2Lo = math.Ln2 - ln2Hi
)

// Exp is e**x.
func Exp(x float64) float64 { return expSum(x, 0) }

// ExpWide is e**w, with the low part of w taken into account.
func ExpWide(w Wide) float64 { return expSum(w.Hi, w.Lo) }

// expSum is e**(x+low) for a small low: x = k ln 2 + r, the Taylor series of
// degree 13 in |r| <= 0.35, then scaling by 2**k.
func expSum(x, low float64) float64 {
	switch {
	case math.IsNaN(x):
		return x
	case x > 709.8:
		return math.Inf(1)
	case x < -745.2:
		return 0
	}
	k := math.Floor(float64(x*math.Log2E) + 0.5)
	hi := x - float64(k*ln2Hi)
	lo := float64(k*ln2Lo) - low
	r := hi - lo
	y := 1 + (hi + (float64(float64(r*r)*expTail(r)) - lo))
	return scale(y, int(k))
}

// expTail is (e**r - 1 - r)/r**2 by its Taylor series, for |r| <= 0.5.
func expTail(r float64) float64 {
	z := float64(r * r)
	p := 1.0/1307674368000 + float64(r*(1.0/20922789888000))
	p = 1.0/6227020800 + float64(r*(1.0/87178291200)) + float64(z*p)
	p = 1.0/39916800 + float64(r*(1.0/479001600)) + float64(z*p)
	p = 1.0/362880 + float64(r*(1.0/3628800)) + float64(z*p)
	p = 1.0/5040 + float64(r*(1.0/40320)) + float64(z*p)
	p = 1.0/120 + float64(r*(1.0/720)) + float64(z*p)
	p = 1.0/6 + float64(r*(1.0/24)) + float64(z*p)
	return 0.5 + float64(r*p)
}

// scale is y * 2**k for y near 1, down into the subnormal numbers.
func scale(y float64, k int) float64 {
	if k < -1021 {
		return float64(y*math.Float64frombits(uint64(k+1023+100)<<52)) * 0x1p-100
	}
	if k > 1023 {
		return float64(y*0x1p1023) * 2
	}
	return y * math.Float64frombits(uint64(k+1023)<<52)
}

// Expm1 is e**x - 1, right also for small x.
func Expm1(x float64) float64 {
	if math.Abs(x) > 0.4 {
		return Exp(x) - 1
	}
	return x + float64(float64(x*x)*expTail(x))
}

// split writes x = 2**k (1 + f) with 1 + f between 0.7 and 1.42.
func split(x float64) (k, f float64) {
	frac, e := math.Frexp(x)
	if frac < math.Sqrt2/2 {
		frac *= 2
		e--
	}
	return float64(e), frac - 1
}

// atanhTail is (log((1+s)/(1-s))/(2 s) - 1)/s**2 = 1/3 + s**2/5 + ..., to full
// precision for |s| <= 0.25.
func atanhTail(z float64) float64 {
	w := float64(z * z)
	even := 1.0/23 + float64(w*(1.0/27))
	odd := 1.0/25 + float64(w*(1.0/29))
	even = 1.0/19 + float64(w*even)
	odd = 1.0/21 + float64(w*odd)
	even = 1.0/15 + float64(w*even)
	odd = 1.0/17 + float64(w*odd)
	even = 1.0/11 + float64(w*even)
	odd = 1.0/13 + float64(w*odd)
	even = 1.0/7 + float64(w*even)
	odd = 1.0/9 + float64(w*odd)
	even = 1.0/3 + float64(w*even)
	odd = 1.0/5 + float64(w*odd)
	return even + float64(z*odd)
}

// Log is the natural logarithm of x.
func Log(x float64) float64 {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 1):
		return x
	case x < 0:
		return math.NaN()
	case x == 0:
		return math.Inf(-1)
	}
	k, f := split(x)
	return logOf(k, f, 0)
}

// logOf is k ln 2 + log(1 + f) + c for a small correction c.
func logOf(k, f, c float64) float64 {
	s := f / (2 + f)
	z := float64(s * s)
	half := float64(0.5 * float64(f*f))
	// log(1+f) = f - half + s (half + 2 z atanhTail(z)).
	r := float64(s * (half + float64(float64(2*z)*atanhTail(z))))
	return float64(k*ln2Hi) - ((half - (r + (float64(k*ln2Lo) + c))) - f)
}

// Log1p is log(1 + x), right also for small x.
func Log1p(x float64) float64 {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 1):
		return x
	case x < -1:
		return math.NaN()
	case x == -1:
		return math.Inf(-1)
	case x > -0.29 && x < 0.41:
		return logOf(0, x, 0)
	}
	u := TwoSum(1, x)
	k, f := split(u.Hi)
	return logOf(k, f, u.Lo/u.Hi)
}

// Log1pmx is log(1 + x) - x, which is about -x**2/2 for small x.
func Log1pmx(x float64) float64 {
	if x > -0.38 && x < 0.62 {
		// With s = x/(2+x): log(1+x) = 2s + 2s**3 (1/3 + ...), 2s - x = -s x.
		s := x / (2 + x)
		z := float64(s * s)
		return float64(s * (float64(float64(2*z)*atanhTail(z)) - x))
	}
	switch {
	case math.IsNaN(x):
		return x
	case x < -1:
		return math.NaN()
	case x == -1 || math.IsInf(x, 1):
		return math.Inf(-1)
	}
	w := LogWide(TwoSum(1, x))
	return (w.Hi - x) + w.Lo
}

// LogWide is the logarithm of w > 0 to about 3e-18 absolute.
func LogWide(w Wide) Wide {
	if !(w.Hi > 0) || math.IsInf(w.Hi, 1) {
		return Wide{Log(w.Hi), 0}
	}
	k, f := split(w.Hi)
	// s = f/(2+f) to double length.
	t := quickTwoSum(2, f)
	s := f / t.Hi
	rest := (math.FMA(-s, t.Hi, f) - float64(s*t.Lo)) / t.Hi
	z := float64(s * s)
	tail := float64(float64(float64(2*z)*s)*atanhTail(z)) + float64(2*rest)
	tail += w.Lo/w.Hi + float64(k*ln2Lo)
	// k ln2Lo is rounded to about 1e-16 of 1e-8.
	sum := TwoSum(float64(k*ln2Hi), float64(2*s))
	return quickTwoSum(sum.Hi, sum.Lo+tail)
}

// Log1pmxWide is log(v) - x to about 3e-17 of its value, where v = 1 + x is given
// besides x so that neither loses digits near its own zero.
func Log1pmxWide(v, x Wide) Wide {
	if x.Hi > -0.38 && x.Hi < 0.62 {
		s := x.Div(x.Plus(2))
		z := float64(s.Hi * s.Hi)
		cubic := float64(float64(float64(2*z)*s.Hi) * atanhTail(z))
		return s.Mul(x).Neg().Plus(cubic)
	}
	return LogWide(v).Sub(x)
}

// PowWide is w**a for w > 0, to nearly full precision also where the result is
// very small or very large.
func PowWide(w Wide, a float64) float64 { return ExpWide(LogWide(w).Times(a)) }

// Hypot is √(x² + y²) without overflow or underflow on the way, to about one
// unit of the last place.
func Hypot(x, y float64) float64 {
	x, y = math.Abs(x), math.Abs(y)
	if x < y {
		x, y = y, x
	}
	if y == 0 || math.IsInf(x, 1) || math.IsNaN(x) {
		return x
	}
	r := y / x
	return float64(x * math.Sqrt(1+float64(r*r)))
}

// Sinh is the hyperbolic sine. Relative error a few units of the last place.
func Sinh(x float64) float64 {
	e := Expm1(math.Abs(x))
	if math.IsInf(e, 1) {
		return math.Copysign(e, x)
	}
	return math.Copysign((e+e/(e+1))/2, x)
}
