package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
	"time"
)

// testdata/references/numerics: Poisson mixtures and quadratures at 60 digits.
func TestNoncentralChiSquareAndFMatchHighPrecision(t *testing.T) {
	for _, file := range []string{"noncentral_chi_square.csv", "noncentral_f.csv"} {
		for _, r := range highPrecisionRows(t, file) {
			var d Distribution
			if file == "noncentral_f.csv" {
				d = NoncentralF{r.number(t, "df1"), r.number(t, "df2"), r.number(t, "lambda")}
			} else {
				d = NoncentralChiSquare{r.number(t, "df"), r.number(t, "lambda")}
			}
			got := d.CDF(r.number(t, "x"))
			if strings.HasSuffix(r.function(), "_sf") {
				got = d.SF(r.number(t, "x"))
			}
			wantDigits(t, r, got, r.number(t, "value"), 1e-12)
		}
	}
}

// testdata/references/numerics/anova_power.csv: noncentral F at 60 digits.
func TestNoncentralFGivesPowerOfSeveralMeans(t *testing.T) {
	for _, r := range highPrecisionRows(t, "anova_power.csv") {
		var means []float64
		total := 0.0
		for _, s := range strings.Fields(r["means"]) {
			m, err := strconv.ParseFloat(s, 64)
			if err != nil {
				t.Fatal(err)
			}
			means = append(means, m)
			total += m
		}
		n, k, sd := r.number(t, "n_per_group"), float64(len(means)), r.number(t, "sd")
		lambda := 0.0
		for _, m := range means {
			lambda += n * math.Pow((m-total/k)/sd, 2)
		}
		critical := F{k - 1, k * (n - 1)}.UpperQuantile(r.number(t, "alpha"))
		wantDigits(t, r, NoncentralF{k - 1, k * (n - 1), lambda}.SF(critical), r.number(t, "value"), 1e-12)
	}
}

// Identities: one squared normal variable, and the square of noncentral t.
func TestNoncentralOneDegreeOfFreedomIsASquare(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 1))
	for range 300 {
		delta := math.Exp(4*rng.Float64() - 2)
		root := max(delta+4*rng.NormFloat64(), 0.01)
		what := fmt.Sprint("delta ", delta, ", root ", root)
		c := NoncentralChiSquare{1, delta * delta}
		wantDigits(t, what, c.SF(root*root), Normal{}.SF(root-delta)+Normal{}.SF(root+delta), 1e-11)
		wantDigits(t, what, c.CDF(root*root), Normal{}.Between(-root-delta, root-delta), 1e-11)
		df := math.Exp(5 * rng.Float64())
		f, s := NoncentralF{1, df, delta * delta}, NoncentralT{df, delta}
		wantDigits(t, fmt.Sprint(what, " df ", df), f.SF(root*root), s.SF(root)+s.CDF(-root), 1e-12)
	}
}

// Identity: for 2 degrees of freedom and t = x, the tails are those of two
// Poisson counts: P(X > x) = P(N1 <= N2), N1 of mean x/2, N2 of mean lambda/2.
func TestNoncentralChiSquareComparesTwoPoissonCounts(t *testing.T) {
	for _, c := range [][2]float64{{3, 5}, {20, 8}, {1, 40}, {60, 2}} {
		x, lambda := c[0], c[1]
		var want float64
		below, weight1 := 0.0, math.Exp(-x/2)
		weight2 := math.Exp(-lambda / 2)
		for j := 0.0; j < 300; j++ {
			below += weight1
			want += weight2 * below
			weight1 *= x / 2 / (j + 1)
			weight2 *= lambda / 2 / (j + 1)
		}
		wantDigits(t, c, NoncentralChiSquare{2, lambda}.SF(x), want, 1e-13)
	}
}

func TestNoncentralMixtureTailsAndQuantilesAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 3))
	for i := range 400 {
		lambda := math.Exp(12*rng.Float64() - 3)
		df := math.Exp(8*rng.Float64() - 1)
		mean := df + lambda
		var d Distribution = NoncentralChiSquare{df, lambda}
		x := mean * math.Exp(3*rng.NormFloat64()*math.Sqrt(2*(mean+lambda))/mean)
		if i%2 == 1 {
			df2 := math.Exp(8*rng.Float64() - 1)
			d = NoncentralF{df, df2, lambda}
			x /= df
		}
		what := fmt.Sprintf("x=%v %T%v", x, d, d)
		low, high := d.CDF(x), d.SF(x)
		wantDigits(t, what, low+high, 1, 1e-12)
		if next := d.CDF(x * (1 + 1e-6)); !(next > low || low == 0 || low > 1-1e-11) {
			t.Errorf("%s: lower tail falls from %v to %v", what, low, next)
		}
		p := math.Exp(-40 * rng.Float64() * rng.Float64())
		wantDigits(t, what, d.CDF(d.Quantile(p)), p, 1e-11)
		wantDigits(t, what, d.SF(d.UpperQuantile(p)), p, 1e-11)
	}
}

// Identity: what lies between is the sum of its pieces, also where the tails
// nearly cancel.
func TestNoncentralMixtureBetweenKeepsItsDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 4))
	for i := range 120 {
		lambda := math.Exp(9*rng.Float64() - 2)
		df := math.Exp(5*rng.Float64() - 0.5)
		mean := df + lambda
		sd := math.Sqrt(2*df + 4*lambda)
		a := max(mean+2*sd*rng.NormFloat64(), 0.1*mean)
		b := a + sd*math.Exp(-20*rng.Float64())
		var d Distribution = NoncentralChiSquare{df, lambda}
		if i%2 == 1 {
			d = NoncentralF{df, math.Exp(6 * rng.Float64()), lambda}
			a, b = a/df, b/df
		}
		what := fmt.Sprintf("%T%v from %v to %v", d, d, a, b)
		p := d.Between(a, b)
		tails := d.CDF(b) - d.CDF(a)
		if d.CDF(a) > 0.5 {
			tails = d.SF(a) - d.SF(b)
		}
		if math.Abs(p-tails) > 3e-13*min(d.CDF(b), d.SF(a)) {
			t.Errorf("%s: %v between, tails differ by %v", what, p, tails)
		}
		third := (b - a) / 3
		parts := d.Between(a, a+third) + d.Between(a+third, b-third) + d.Between(b-third, b)
		wantDigits(t, what, parts, p, 1e-12+2e-15*a/(b-a))
	}
}

// The sum over every term and the rule that skips terms give the same tails.
func TestNoncentralMixtureHasNoSeam(t *testing.T) {
	for _, df := range []float64{1, 30, 5000} {
		for _, z := range []float64{-6, -2, 0, 2, 6} {
			at := 2.0 * manyTerms
			x := at + df + z*math.Sqrt(4*at+2*df)
			below, above := NoncentralChiSquare{df, at}, NoncentralChiSquare{df, math.Nextafter(at, 1e9)}
			wantDigits(t, fmt.Sprint("lower ", df, z), above.CDF(x), below.CDF(x), 2e-11)
			wantDigits(t, fmt.Sprint("upper ", df, z), above.SF(x), below.SF(x), 2e-11)
		}
	}
}

func TestNoncentralMixturesStandAnyArgument(t *testing.T) {
	check := func(d Distribution, valid bool, x float64) {
		low, high := d.CDF(x), d.SF(x)
		if valid != (low >= 0 && high >= 0 && math.Abs(low+high-1) < 1e-11) || !valid && !math.IsNaN(low) {
			t.Errorf("%T%v at %v: tails %v and %v", d, d, x, low, high)
		}
		if q := d.Quantile(0.3); valid == math.IsNaN(q) {
			t.Errorf("%T%v: quantile %v", d, d, q)
		}
	}
	odd := []float64{math.NaN(), -1, 0, 1e-300, 1e-9, 1, 40, 1e5, 1e12, 1e300, math.Inf(1)}
	for _, df := range []float64{math.NaN(), 0, 1e-9, 1, 40, 1e6, 1e10, math.Inf(1)} {
		for _, lambda := range odd {
			for _, x := range odd[1:] {
				check(NoncentralChiSquare{df, lambda}, df > 0 && !math.IsInf(df, 1) && lambda >= 0, x)
				for _, df2 := range []float64{math.NaN(), 0, 1e-3, 5, 1e6, 1e300, math.Inf(1)} {
					check(NoncentralF{df, df2, lambda}, df > 0 && df2 > 0 && lambda >= 0, x)
				}
			}
		}
	}
}

func BenchmarkNoncentralF(b *testing.B) {
	for b.Loop() {
		NoncentralF{3, 52, 11}.SF(2.8)
	}
}

func BenchmarkNoncentralChiSquareLarge(b *testing.B) {
	for b.Loop() {
		NoncentralChiSquare{3, 1e5}.SF(1e5)
	}
}

// A quantile past the largest float64 is infinite, as for the central laws:
// these are 5e312, and -7e372 by the power of its tail.
func TestNoncentralQuantilesPastTheDoublesAreInfinite(t *testing.T) {
	if x := (NoncentralF{39678368.41742455, 0.5, 1221124.5981556482}).UpperQuantile(1.4428045022166922e-81); !math.IsInf(x, 1) {
		t.Error(x)
	}
	if x := (NoncentralT{0.6648325058958764, -14.429224767070023}).Quantile(6.2186276702489685e-248); !math.IsInf(x, -1) {
		t.Error(x)
	}
}

// Past 2^53 units of the Poisson mean, and where a step of the search for a
// quantile ends far below the doubles, no tail takes long: the bound is a
// hundred times what they take.
func TestHugeNoncentralitiesTakeNoLonger(t *testing.T) {
	start := time.Now()
	for _, lambda := range []float64{2.9e7, 1e16, 1e20, 4e23} {
		d := NoncentralChiSquare{7, lambda}
		x := lambda - 3*math.Sqrt(lambda)
		wantDigits(t, lambda, d.CDF(x)+d.SF(x), 1, 1e-12)
		d.Between(x, x*(1+1e-14))
		d.Quantile(2.4e-250)
	}
	if took := time.Since(start); took > time.Second {
		t.Errorf("took %v", took)
	}
}
