package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// Laws that have a closed form, or are another law under a transformation that
// costs no digits.
func TestLawsAgreeWithTheirClosedForms(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 30))
	for range 500 {
		x := spread(rng, -8, 2.5)
		df := spread(rng, -0.5, 6)
		u := x / (1 + x) // below 1
		logU := math.Log(u)
		if u > 0.5 {
			logU = math.Log1p(-(1 - u))
		}
		for _, c := range []struct {
			name      string
			got, want float64
		}{
			{"chi-square with 2 df", ChiSquare{2}.SF(x), math.Exp(-x / 2)},
			{"exponential", Gamma{1}.CDF(x), -math.Expm1(-x)},
			{"Erlang, 2 stages", Gamma{2}.SF(x), (1 + x) * math.Exp(-x)},
			{"Cauchy", Student{1}.SF(x), math.Atan2(1, x) / math.Pi},
			{"t with 2 df", Student{2}.SF(x), 1 / ((x*x + 2) * (1 + x/math.Sqrt(x*x+2)))},
			{"F with 2 and df", F{2, df}.SF(x), math.Exp(-df / 2 * math.Log1p(2*x/df))},
			{"F with df and 2", F{df, 2}.CDF(x), math.Exp(-df / 2 * math.Log1p(2/(df*x)))},
			{"power law", Beta{df, 1}.CDF(u), math.Exp(df * logU)},
			{"arc sine law", Beta{0.5, 0.5}.CDF(u), 2 / math.Pi * math.Asin(math.Sqrt(u))},
			{"t squared is F", F{1, df}.SF(x), 2 * Student{df}.SF(math.Sqrt(x))},
			{"normal squared is chi-square", ChiSquare{1}.SF(x), 2 * Normal{}.SF(math.Sqrt(x))},
			{"F with infinite df2", F{df, math.Inf(1)}.SF(x), ChiSquare{df}.SF(df * x)},
			{"F with infinite df1", F{math.Inf(1), df}.CDF(x), ChiSquare{df}.SF(df / x)},
			{"F with infinite df2, quantile", F{df, math.Inf(1)}.UpperQuantile(u), ChiSquare{df}.UpperQuantile(u) / df},
			{"F swapped", F{df, 7}.CDF(x), F{7, df}.SF(1 / x)},
			{"F swapped, quantile", F{df, 7}.Quantile(u), 1 / F{7, df}.UpperQuantile(u)},
			{"t mirrored", Student{df}.CDF(-x), Student{df}.SF(x)},
			{"t mirrored, quantile", Student{df}.Quantile(u), -Student{df}.UpperQuantile(u)},
			{"t with infinite df", Student{math.Inf(1)}.SF(x), Normal{}.SF(x)},
			{"Cauchy density", Student{1}.Density(x), 1 / (math.Pi * (1 + x*x))},
			{"gamma prefactor", GammaPrefactor(3, x), x * x * x / 2 * math.Exp(-x)},
		} {
			if c.want < 1e-290 {
				continue
			}
			// The rounded argument and the closed form are themselves off by this much.
			allowed := 2e-15 * (4 + math.Abs(math.Log(c.want)))
			switch c.name {
			case "F with infinite df2", "F with infinite df1", "F swapped":
				allowed *= 1 + math.Sqrt(df)
			}
			if e := math.Abs(c.got/c.want - 1); !(e < allowed) {
				t.Errorf("%s: x %v, df %v: got %v, want %v, relative error %.2g", c.name, x, df, c.got, c.want, e)
			}
		}
	}
}

// Beta tails at whole parameters are binomial tails, summed here from their
// terms, which are all positive: I_p(k, n-k+1) = P(at least k successes in n).
func TestBetaTailsAreBinomialSums(t *testing.T) {
	for _, n := range []int{1, 2, 5, 17, 60} {
		for _, p := range []float64{1e-4, 0.01, 0.25, 0.5, 0.9} {
			term := make([]float64, n+1)
			for k := range term {
				c := 1.0
				for j := range k {
					c = c * float64(n-j) / float64(j+1)
				}
				term[k] = c * math.Pow(p, float64(k)) * math.Pow(1-p, float64(n-k))
			}
			for k := 1; k <= n; k++ {
				var below, from float64
				for j := n; j >= k; j-- {
					from += term[j]
				}
				for j := range k {
					below += term[j]
				}
				lower, upper := BetaTails(p, 1-p, float64(k), float64(n-k+1))
				what := fmt.Sprintf("n %d, k %d, p %v", n, k, p)
				wantDigits(t, what, lower, from, 2e-14)
				wantDigits(t, what, upper, below, 2e-14)
			}
		}
	}
}

// Gamma tails at whole shapes are Poisson sums: Q(k, m) = P(fewer than k events).
func TestGammaTailsArePoissonSums(t *testing.T) {
	for _, m := range []float64{1e-6, 0.5, 3, 40, 200} {
		term, below := math.Exp(-m), 0.0
		for k := 1; k <= 300; k++ {
			below += term
			term *= m / float64(k)
			_, upper := GammaTails(float64(k), m)
			wantDigits(t, fmt.Sprintf("k %d, mean %v", k, m), upper, below, 5e-14)
		}
	}
}

// log P(Z > z): the logarithm of the tail, and past its range Laplace's
// continued fraction.
func TestNormalLogTailGoesOnPastUnderflow(t *testing.T) {
	for z := -38.0; z <= 37.5; z += 0.37 {
		got, want := NormalLogSF(z), math.Log(Normal{}.SF(z))
		if z < -2 {
			// log(1 - q) by its power series.
			q, power := Normal{}.SF(-z), 1.0
			want = 0
			for k := 1.0; k < 12; k++ {
				power *= q
				want -= power / k
			}
		}
		wantDigits(t, fmt.Sprint("z = ", z), got, want, 1e-14)
	}
	for _, z := range []float64{20, 38, 100, 1e4, 1e8, 1e150} {
		f := z
		for k := 60.0; k >= 1; k-- {
			f = z + k/f
		}
		wantDigits(t, fmt.Sprint("z = ", z), NormalLogSF(z), -z*z/2-math.Log(f*math.Sqrt(2*math.Pi)), 1e-15)
	}
	if got := NormalLogSF(math.Inf(1)); !math.IsInf(got, -1) {
		t.Errorf("at +Inf: %v", got)
	}
	if got := NormalLogCDF(math.Inf(1)); got != 0 {
		t.Errorf("mirrored at +Inf: %v", got)
	}
}

// The quantile pair holds the small side of a beta quantile near 1, which 1 - x
// would lose: for b = 1, a = 1e6 the lower quantile of p is p^(1e-6).
func TestBetaQuantileKeepsTheSmallSide(t *testing.T) {
	for _, p := range []float64{0.3, 0.5, 0.9} {
		x, y := BetaQuantile(p, 1-p, 1e6, 1)
		wantDigits(t, fmt.Sprint("p = ", p), y, -math.Expm1(math.Log(p)/1e6), 1e-14)
		if x != 1-y {
			t.Errorf("x = %v, y = %v", x, y)
		}
	}
}

func BenchmarkStudentSF(b *testing.B) {
	for b.Loop() {
		Student{19}.SF(2.093)
	}
}

func BenchmarkStudentQuantile(b *testing.B) {
	for b.Loop() {
		Student{19}.UpperQuantile(0.025)
	}
}

func BenchmarkChiSquareQuantile(b *testing.B) {
	for b.Loop() {
		ChiSquare{19}.UpperQuantile(0.025)
	}
}

func BenchmarkFQuantileLargeDF(b *testing.B) {
	for b.Loop() {
		F{1e6, 3e5}.UpperQuantile(1e-9)
	}
}

func BenchmarkNormalSF(b *testing.B) {
	for b.Loop() {
		Normal{}.SF(1.7)
	}
}

// What lies between 0 and b is half an incomplete beta function, which tails gives
// by its series; and intervals that adjoin add up.
func TestStudentBetweenKeepsItsDigitsForFewDegreesOfFreedom(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 9))
	for range 300 {
		s := Student{math.Exp(-14 + 16*rng.Float64())}
		a, b := math.Exp(-12+24*rng.Float64()), math.Exp(-12+24*rng.Float64())
		a, b = min(a, b), max(a, b)
		_, toA := s.tails(a)
		_, toB := s.tails(b)
		what := fmt.Sprint(s, a, b)
		wantDigits(t, what, s.narrow(0, b), toB, 1e-12)
		wantDigits(t, what, s.narrow(-a, b), toA+toB, 1e-12)
		if toB > 1.5*toA { // else the difference has lost digits
			wantDigits(t, what, s.narrow(a, b), toB-toA, 4e-12)
		}
	}
}
