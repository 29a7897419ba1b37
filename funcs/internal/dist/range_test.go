package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// studentized_range.csv of testdata/references/numerics, two integrals with little in
// common, and of further, the second of them over the whole domain.
func TestStudentizedRangeMatchesHighPrecision(t *testing.T) {
	for _, r := range append(highPrecisionRows(t, "studentized_range.csv"), readRows(t, "further", "studentized_range.csv")...) {
		df := math.Inf(1)
		if r["df"] != "inf" {
			df = r.number(t, "df")
		}
		d := StudentizedRange{Groups: r.count(t, "k"), DF: df}
		var got float64
		tolerance := 1e-12
		switch strings.TrimPrefix(r.function(), "studentized_range_") {
		case "cdf":
			got = d.CDF(r.number(t, "q"))
		case "sf":
			got = d.SF(r.number(t, "q"))
		case "quantile":
			got, tolerance = d.Quantile(r.number(t, "p")), 1e-11
		case "upper_quantile":
			got, tolerance = d.UpperQuantile(r.number(t, "q")), 1e-11
		default:
			t.Fatalf("unknown function %q", r.function())
		}
		wantDigits(t, r, got, r.number(t, "value"), tolerance)
	}
}

// Harter 1960, upper 5% points as handbooks carry them.
func TestStudentizedRangeReproducesPrintedTable(t *testing.T) {
	for _, r := range publishedTable(t, "studentized-range-095") {
		var of struct {
			P      float64
			Groups int
			DF     tableNumber
		}
		parameters(t, r, &of)
		wantPrinted(t, r, StudentizedRange{Groups: of.Groups, DF: float64(of.DF)}.Quantile(of.P))
	}
}

// Identity: the range of two is sqrt(2) times the size of a Student t, by the
// integral that serves any number of groups.
func TestStudentizedRangeOfTwoIsStudent(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	for range 60 {
		df := math.Exp(rng.Float64()*14 - 2)
		q := math.Exp(rng.NormFloat64() + 0.5)
		law := StudentizedRange{Groups: 2, DF: df}.law()
		what := fmt.Sprint("q=", q, " df=", df)
		wantDigits(t, what, law.probability(q, true), 2*Student{df}.SF(q/math.Sqrt2), 1e-12)
		wantDigits(t, what, law.probability(q, false), Student{df}.Between(-q/math.Sqrt2, q/math.Sqrt2), 1e-12)
	}
}

// Tippett 1925, Biometrika 17, 364-387: mean range of n normal values in sds, the
// d2 of control charts. The mean is the integral of the upper tail.
func TestRangeHasTippettsMean(t *testing.T) {
	for n, want := range map[int]float64{2: 1.12838, 3: 1.69257, 5: 2.32593, 10: 3.07751, 100: 5.01519} {
		const h = 0.01
		mean := h / 2
		for w := h; w < 15; w += h {
			mean += h * StudentizedRange{Groups: n, DF: math.Inf(1)}.SF(w)
		}
		// The rule is exact here but for h^2/12 times the slope at 0, which is
		// the density 1/sqrt(pi) for n = 2 and 0 for more.
		slack := 0.5e-5
		if n == 2 {
			slack += h * h / 12
		}
		if math.Abs(mean-want) > slack {
			t.Errorf("mean range of %d: got %.6f, want %v", n, mean, want)
		}
	}
}

func TestStudentizedRangeTailsAndQuantilesAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 2))
	for range 60 {
		d := StudentizedRange{Groups: 2 + int(math.Exp(6*rng.Float64())), DF: math.Exp(rng.Float64()*15 - 1)}
		q := math.Sqrt(2*math.Log(float64(d.Groups))+1) * math.Exp(rng.NormFloat64()/2)
		what := fmt.Sprint("q=", q, " ", d)
		low, high := d.CDF(q), d.SF(q)
		wantDigits(t, what, low+high, 1, 1e-13)
		if next := d.CDF(q * (1 + 1e-6)); !(next > low || low == 0 || low > 1-1e-12) {
			t.Errorf("%s: lower tail falls from %v to %v", what, low, next)
		}
		if next := d.SF(q * (1 + 1e-6)); !(next < high || high == 0 || high > 1-1e-12) {
			t.Errorf("%s: upper tail rises from %v to %v", what, high, next)
		}
		if more := (StudentizedRange{Groups: d.Groups + 1, DF: d.DF}).SF(q); !(more > high || high > 1-1e-12) {
			t.Errorf("%s: another group takes the upper tail from %v to %v", what, high, more)
		}
		p := math.Exp(-50 * rng.Float64() * rng.Float64())
		// Rounding q moves a tail by its slope: at most k-1 below, df above.
		slack := 1e-12 + 2e-16*max(float64(d.Groups), min(d.DF, 1e4))
		wantDigits(t, fmt.Sprint("p=", p, d), d.CDF(d.Quantile(p)), p, slack)
		wantDigits(t, fmt.Sprint("p=", p, d), d.SF(d.UpperQuantile(p)), p, slack)
	}
}

// Identity: what lies between is the sum of its pieces, also where the tails
// nearly cancel.
func TestStudentizedRangeBetweenKeepsItsDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 3))
	for i := range 40 {
		d := StudentizedRange{Groups: 3 + rng.IntN(40), DF: math.Exp(rng.Float64()*10 - 0.5)}
		if i%8 == 0 {
			d.DF = math.Inf(1)
		}
		a := 6 * rng.Float64()
		b := a + math.Exp(-18*rng.Float64())
		what := fmt.Sprint(d, a, b)
		p := d.Between(a, b)
		tails := d.CDF(b) - d.CDF(a)
		if d.CDF(a) > 0.5 {
			tails = d.SF(a) - d.SF(b)
		}
		if math.Abs(p-tails) > 3e-14*min(d.CDF(b), d.SF(a)) {
			t.Errorf("%s: %v between, tails differ by %v", what, p, tails)
		}
		third := (b - a) / 3
		parts := d.Between(a, a+third) + d.Between(a+third, b-third) + d.Between(b-third, b)
		wantDigits(t, what, parts, p, 1e-12+1e-15*(1+a)/(b-a))
	}
}

// Many degrees of freedom approach infinitely many like 1/df.
func TestStudentizedRangeApproachesKnownSpread(t *testing.T) {
	for _, k := range []int{3, 20, 200} {
		for _, q := range []float64{2, 4, 8} {
			limit := StudentizedRange{Groups: k, DF: math.Inf(1)}
			for _, df := range []float64{1e6, 1e9, 1e12} {
				d := StudentizedRange{Groups: k, DF: df}
				wantDigits(t, fmt.Sprint("sf", q, d), d.SF(q), limit.SF(q), 1e3/df+1e-12)
				wantDigits(t, fmt.Sprint("cdf", q, d), d.CDF(q), limit.CDF(q), 1e4/df+1e-11)
			}
		}
	}
}

func TestStudentizedRangeStandsAnyArgument(t *testing.T) {
	for _, k := range []int{-1, 1, 2, 3, 200, 20000} {
		for _, df := range []float64{math.NaN(), 0, 0.1, 1, 30, 1e5, 1e15, 1e300, math.Inf(1)} {
			d := StudentizedRange{Groups: k, DF: df}
			for _, q := range []float64{-1, 0, 1e-300, 1e-3, 3, 1e3, 1e300, math.Inf(1)} {
				low, high := d.CDF(q), d.SF(q)
				if k < 2 || !(df > 0) {
					if !math.IsNaN(low) || !math.IsNaN(high) {
						t.Errorf("%v at %v: %v and %v outside the domain", d, q, low, high)
					}
				} else if !(low >= 0 && high >= 0 && math.Abs(low+high-1) < 1e-12) {
					t.Errorf("%v at %v: tails %v and %v", d, q, low, high)
				}
			}
			for _, p := range []float64{0, 1e-30, 0.5, 1 - 1e-16, 1} {
				if k >= 2 && df > 0 && math.IsNaN(d.Quantile(p)) {
					t.Errorf("%v: quantile of %v is NaN", d, p)
				}
			}
		}
	}
}

func benchRange(b *testing.B, k int, df, q float64) {
	for b.Loop() {
		StudentizedRange{Groups: k, DF: df}.SF(q)
	}
}
func BenchmarkRange3_10(b *testing.B)    { benchRange(b, 3, 10, 3.9) }
func BenchmarkRange3_1(b *testing.B)     { benchRange(b, 3, 1, 30) }
func BenchmarkRange20_40(b *testing.B)   { benchRange(b, 20, 40, 5.4) }
func BenchmarkRange200_40(b *testing.B)  { benchRange(b, 200, 40, 7.4) }
func BenchmarkRange200_1(b *testing.B)   { benchRange(b, 200, 1, 70) }
func BenchmarkRange200_Inf(b *testing.B) { benchRange(b, 200, math.Inf(1), 6) }
func BenchmarkRangeQuantile(b *testing.B) {
	for b.Loop() {
		StudentizedRange{Groups: 20, DF: 40}.UpperQuantile(0.05)
	}
}
