package dist

import "math"

// Student is Student's t law; DF may be infinite, which is the normal law.
type Student struct{ DF float64 }

// SF is P(T > t).
func (s Student) SF(t float64) float64 {
	if math.IsInf(s.DF, 1) {
		return Normal{}.SF(t)
	}
	if math.IsInf(t, 0) {
		return Normal{}.SF(t)
	}
	if math.Abs(t) > 1e150 {
		t = math.Copysign(1e150, t)
	}
	q := s.DF + t*t
	half, central := BetaTails(s.DF/q, t*t/q, s.DF/2, 0.5)
	if t >= 0 {
		return half / 2
	}
	return 0.5 + central/2
}

// CDF is P(T <= t).
func (s Student) CDF(t float64) float64 { return s.SF(-t) }

// Between is P(a <= T <= b).
func (s Student) Between(a, b float64) float64 { return difference(s, a, b) }

// UpperQuantile is t with P(T > t) = q.
func (s Student) UpperQuantile(q float64) float64 {
	if math.IsInf(s.DF, 1) {
		return Normal{}.UpperQuantile(q)
	}
	if q > 0.5 {
		return -invert(s.SF, 1-q, 0, math.MaxFloat64, false)
	}
	return invert(s.SF, q, 0, math.MaxFloat64, false)
}

// Quantile is t with P(T <= t) = p.
func (s Student) Quantile(p float64) float64 { return -s.UpperQuantile(p) }
