package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// testdata/references/numerics/noncentral_t.csv: quadrature and series at 60 digits.
func TestNoncentralTMatchesHighPrecision(t *testing.T) {
	for _, r := range highPrecisionRows(t, "noncentral_t.csv") {
		d := NoncentralT{r.number(t, "df"), r.number(t, "delta")}
		x, want := r.number(t, "t"), r.number(t, "value")
		got := d.CDF(x)
		if r.function() == "noncentral_t_sf" {
			got = d.SF(x)
		}
		wantDigits(t, r, got, want, 1e-12)
	}
}

// testdata/references/numerics/t_power.csv: noncentral t at 60 digits beyond the
// critical value of Student's t.
func TestTPowerMatchesHighPrecision(t *testing.T) {
	for _, r := range highPrecisionRows(t, "t_power.csv") {
		sides, effect := r.number(t, "sides"), r.number(t, "diff")/r.number(t, "sd")
		var df, delta float64
		if r.function() == "t_power_one_sample" {
			n := r.number(t, "n")
			df, delta = n-1, effect*math.Sqrt(n)
		} else {
			n1, n2 := r.number(t, "n1"), r.number(t, "n2")
			df, delta = n1+n2-2, effect/math.Sqrt(1/n1+1/n2)
		}
		critical := Student{df}.UpperQuantile(r.number(t, "alpha") / sides)
		wantDigits(t, r, TPower(df, delta, critical, sides == 2), r.number(t, "value"), 1e-12)
	}
}

// Identity: noncentrality 0 is Student's t.
func TestNoncentralTAtZeroIsStudent(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 11))
	for range 300 {
		df := math.Exp(rng.Float64()*14 - 2)
		x := rng.NormFloat64() * 4
		wantDigits(t, fmt.Sprint("t=", x, " df=", df), NoncentralT{df, 0}.SF(x), Student{df}.SF(x), 1e-12)
	}
}

// Identity: the two ways of ordering the double integral are the same number.
func TestNoncentralTBothOrdersOfIntegrationAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 12))
	for range 300 {
		df := math.Exp(rng.Float64()*6 - 0.5)
		delta := 60 + 60*rng.Float64()
		d := NoncentralT{df, delta}
		spread := math.Sqrt(1 + delta*delta/(2*df))
		x := max(delta+4*spread*rng.NormFloat64(), 0.4*delta)
		what := fmt.Sprint("t=", x, " ", d)
		if low := d.mirror().logSFOverZ(-x); low > -600 {
			wantDigits(t, what, math.Exp(d.mirror().logSFOverScale(-x)-low), 1, 1e-12)
		}
		if high := d.logSFOverZ(x); high > -600 {
			wantDigits(t, what, math.Exp(d.logSFOverScale(x)-high), 1, 1e-12)
		}
	}
}

// Identities: tails sum to 1, are monotone in t and in the noncentrality, and
// quantiles give the tail back.
func TestNoncentralTTailsAndQuantilesAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 13))
	for range 400 {
		d := NoncentralT{math.Exp(rng.Float64()*16 - 2), 30 * rng.NormFloat64()}
		spread := math.Sqrt(1 + d.Noncentrality*d.Noncentrality/(2*d.DF))
		x := d.Noncentrality + 3*spread*rng.NormFloat64()
		low, high := d.CDF(x), d.SF(x)
		what := fmt.Sprint("t=", x, " ", d)
		wantDigits(t, what, low+high, 1, 1e-13)
		if next := d.SF(x + 0.001*spread); !(next < high || high > 1-1e-12 || high == 0) {
			t.Errorf("%s: upper tail rises from %v to %v", what, high, next)
		}
		if next := (NoncentralT{d.DF, d.Noncentrality + 0.01}).SF(x); !(next > high || high > 1-1e-12 || high == 0) {
			t.Errorf("%s: upper tail falls from %v to %v with the noncentrality", what, high, next)
		}
		p := math.Exp(-60 * rng.Float64() * rng.Float64())
		// What rounding the quantile itself may move: half an ulp of t.
		for _, side := range []struct {
			x    float64
			tail func(float64) float64
		}{{d.Quantile(p), d.CDF}, {d.UpperQuantile(p), d.SF}} {
			slack := 2 * math.Abs(side.tail(math.Nextafter(side.x, 1e300))/side.tail(math.Nextafter(side.x, -1e300))-1)
			wantDigits(t, fmt.Sprint("p=", p, " ", d), side.tail(side.x), p, 1e-12+slack)
		}
	}
}

// The tails pass smoothly from one way of integrating to the other.
func TestNoncentralTHasNoSeam(t *testing.T) {
	for _, df := range []float64{0.5, 3, 40, 190} {
		for _, z := range []float64{-3, -1, 0, 2, 5} {
			delta := farNoncentrality * (1 - 1e-9)
			x := delta + z*math.Sqrt(1+delta*delta/(2*df))
			if x <= 0 {
				continue
			}
			below, above := NoncentralT{df, delta}, NoncentralT{df, farNoncentrality * (1 + 1e-9)}
			ratio := farNoncentrality * (1 + 1e-9) / delta
			// Both delta and t move by 2e-9, so a tail may move by about that times its slope.
			for _, pair := range [][2]float64{{below.SF(x), above.SF(x * ratio)}, {below.CDF(x), above.CDF(x * ratio)}} {
				wantDigits(t, fmt.Sprint(x, below), pair[1], pair[0], 3e-7)
			}
		}
	}
}

// Identity: what lies between is the sum of its pieces, and a narrow piece is its
// width times the density, which is the mean of the ends to the third order.
func TestNoncentralTBetweenKeepsItsDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 14))
	for i := range 200 {
		delta := 10 * rng.NormFloat64()
		if i%4 == 0 {
			delta = 150 + 100*rng.Float64()
		}
		d := NoncentralT{math.Exp(6 * rng.Float64()), delta}
		spread := math.Hypot(1, delta/math.Sqrt(2*d.DF))
		a := delta + 2*spread*rng.NormFloat64()
		b := a + spread*math.Exp(-20*rng.Float64())
		if delta > 100 && a < 50 {
			continue
		}
		what := fmt.Sprint(d, a, b)
		p := d.Between(a, b)
		// A tail of 1e-13 of the mass is lost where the difference is taken.
		tails := d.CDF(b) - d.CDF(a)
		if d.CDF(a) > 0.5 {
			tails = d.SF(a) - d.SF(b)
		}
		if math.Abs(p-tails) > 1e-13*min(d.CDF(b), d.SF(a)) {
			t.Errorf("%s: %v between, tails differ by %v", what, p, tails)
		}
		third := (b - a) / 3
		parts := d.Between(a, a+third) + d.Between(a+third, b-third) + d.Between(b-third, b)
		// Rounding the ends moves the pieces by half an ulp of a over their width.
		wantDigits(t, what, parts, p, 1e-12+4e-16*math.Abs(a)/(b-a))
	}
}

func TestNoncentralTStandsAnyArgument(t *testing.T) {
	odd := []float64{0, 5e-324, 1e-9, 1, 39.9, 101, 1e6, 1e154, math.MaxFloat64, math.Inf(1)}
	for _, df := range []float64{math.NaN(), -1, 0, 0.1, 1, 30, 1e6, 1e18, 1e300, math.Inf(1)} {
		for _, a := range odd {
			for _, delta := range []float64{a, -a} {
				d := NoncentralT{df, delta}
				for _, size := range odd {
					for _, x := range []float64{size, -size} {
						low, high := d.CDF(x), d.SF(x)
						if df > 0 != (low >= 0 && high >= 0 && math.Abs(low+high-1) < 1e-11) || !(df > 0) && !math.IsNaN(low) {
							t.Errorf("%v at %v: tails %v and %v", d, x, low, high)
						}
					}
				}
				for _, p := range []float64{0, 1e-300, 1e-17, 0.3, 1 - 1e-16, 1} {
					if q := d.Quantile(p); df > 0 == math.IsNaN(q) {
						t.Errorf("%v: quantile of %v is %v", d, p, q)
					}
				}
			}
		}
	}
}

func BenchmarkNoncentralT(b *testing.B) {
	for b.Loop() {
		NoncentralT{19, 3.2}.SF(2.093)
	}
}

func BenchmarkNoncentralTQuantile(b *testing.B) {
	for b.Loop() {
		NoncentralT{19, 3.2}.UpperQuantile(0.1)
	}
}
