package dist

import "math"

// Normal is the standard normal law.
type Normal struct{}

// CDF is P(Z <= z).
func (Normal) CDF(z float64) float64 { return math.Erfc(-z/math.Sqrt2) / 2 }

// SF is P(Z > z).
func (Normal) SF(z float64) float64 { return math.Erfc(z/math.Sqrt2) / 2 }

// Density is the normal density at z.
func (Normal) Density(z float64) float64 { return math.Exp(-z*z/2) / math.Sqrt(2*math.Pi) }

// Between is P(a <= Z <= b).
func (n Normal) Between(a, b float64) float64 { return difference(n, a, b) }

// Quantile is z with P(Z <= z) = p.
func (Normal) Quantile(p float64) float64 { return -math.Sqrt2 * math.Erfcinv(2*p) }

// UpperQuantile is z with P(Z > z) = q.
func (Normal) UpperQuantile(q float64) float64 { return math.Sqrt2 * math.Erfcinv(2*q) }

// NormalLogSF is log P(Z > z), right also where the tail itself underflows.
func NormalLogSF(z float64) float64 {
	if z < 30 {
		return math.Log(Normal{}.SF(z))
	}
	r := 1 / (z * z)
	return -z*z/2 - math.Log(z*math.Sqrt(2*math.Pi)) + math.Log1p(-r*(1-r*(3-r*(15-105*r))))
}

// NormalLogCDF is log P(Z <= z).
func NormalLogCDF(z float64) float64 { return NormalLogSF(-z) }
