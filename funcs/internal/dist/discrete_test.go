package dist

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// exactBinomial gives P(X = k) for k = 0..n as exact fractions of the float64 p.
func exactBinomial(n int, p float64) []*big.Rat {
	success := new(big.Rat).SetFloat64(p)
	failure := new(big.Rat).Sub(big.NewRat(1, 1), success)
	terms := []*big.Rat{big.NewRat(1, 1)}
	for range n {
		next := make([]*big.Rat, len(terms)+1)
		for k := range next {
			next[k] = new(big.Rat)
			if k < len(terms) {
				next[k].Add(next[k], new(big.Rat).Mul(terms[k], failure))
			}
			if k > 0 {
				next[k].Add(next[k], new(big.Rat).Mul(terms[k-1], success))
			}
		}
		terms = next
	}
	return terms
}

// runningTails adds exact probabilities up to both tails at each k.
func runningTails(terms []*big.Rat) (lower, upper []float64) {
	lower, upper = make([]float64, len(terms)), make([]float64, len(terms))
	sum := new(big.Rat)
	for k, p := range terms {
		sum.Add(sum, p)
		lower[k], _ = sum.Float64()
	}
	sum = new(big.Rat)
	for k := len(terms) - 1; k >= 0; k-- {
		upper[k], _ = sum.Float64()
		sum.Add(sum, terms[k])
	}
	return lower, upper
}

// Exact fractions, term by term.
func TestBinomialMatchesExactFractions(t *testing.T) {
	for _, c := range []Binomial{{1, 0.5}, {12, 0.1}, {40, 0.5}, {35, 0.97}, {30, 1e-5}, {25, 0.3}} {
		terms := exactBinomial(c.N, c.P)
		lower, upper := runningTails(terms)
		for k, p := range terms {
			want, _ := p.Float64()
			what := fmt.Sprint(c, " k=", k)
			wantDigits(t, what, c.PMF(k), want, 1e-13)
			wantDigits(t, what, c.CDF(k), lower[k], 1e-13)
			wantDigits(t, what, c.SF(k), upper[k], 1e-13)
		}
	}
}

func TestBinomialQuantileIsSmallestCountThatReaches(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 1))
	for range 500 {
		d := Binomial{int(math.Exp(14 * rng.Float64())), rng.Float64()}
		p := math.Exp(-30 * rng.Float64() * rng.Float64())
		if k := d.Quantile(p); p <= 0.5 && !(d.CDF(k) >= p && (k == 0 || d.CDF(k-1) < p)) {
			t.Errorf("%v: quantile %v of %v: CDF %v there and %v before", d, k, p, d.CDF(k), d.CDF(k-1))
		}
		if k := d.UpperQuantile(p); !(d.SF(k) <= p && (k == 0 || d.SF(k-1) > p)) {
			t.Errorf("%v: upper quantile %v of %v: SF %v there and %v before", d, k, p, d.SF(k), d.SF(k-1))
		}
	}
}

// testdata/references/numerics: at a Clopper-Pearson or Garwood limit the tail
// is half of what the interval leaves outside.
func TestExactLimitsLeaveTheirTail(t *testing.T) {
	for _, file := range []string{"proportion.csv", "poisson.csv"} {
		seen := 0
		for _, r := range highPrecisionRows(t, file) {
			limit := r.number(t, "value")
			if limit == 0 || limit == 1 {
				continue
			}
			var got, slope float64
			switch r.function() {
			case "clopper_pearson_lower":
				d, x := Binomial{r.count(t, "n"), limit}, r.count(t, "x")
				got, slope = d.SF(x-1), float64(x)
			case "clopper_pearson_upper":
				d, x := Binomial{r.count(t, "n"), limit}, r.count(t, "x")
				got, slope = d.CDF(x), float64(d.N-x)*limit/(1-limit)
			case "poisson_garwood_lower":
				x := r.count(t, "x")
				got, slope = Poisson{limit}.SF(x-1), float64(x)
			case "poisson_garwood_upper":
				got, slope = Poisson{limit}.CDF(r.count(t, "x")), limit
			default:
				continue
			}
			seen++
			// Half an ulp of the limit moves the tail by its logarithmic slope.
			wantDigits(t, r, got, (1-r.number(t, "conf"))/2, 1e-13+2e-16*(slope+1))
		}
		if seen < 10 {
			t.Errorf("%s: only %d rows used", file, seen)
		}
	}
}

// The recurrence from exp(-mean), upwards in exact order, in 200-bit arithmetic.
func TestPoissonMatchesTheSeries(t *testing.T) {
	for _, mean := range []float64{1e-9, 0.3, 4, 37.5, 150} {
		m := new(big.Float).SetPrec(200).SetFloat64(mean)
		// exp(-mean) = 1/sum of mean^j/j!, the sum taken exactly enough.
		terms := []*big.Float{big.NewFloat(1).SetPrec(200)}
		total := new(big.Float).SetPrec(200).SetInt64(1)
		for j := int64(1); j < 900; j++ {
			next := new(big.Float).SetPrec(200).Mul(terms[j-1], m)
			next.Quo(next, new(big.Float).SetInt64(j))
			terms = append(terms, next)
			total.Add(total, next)
		}
		lower, sum := make([]*big.Float, len(terms)), new(big.Float).SetPrec(200)
		for k, p := range terms {
			sum.Add(sum, p)
			lower[k] = new(big.Float).Copy(sum)
		}
		upper := new(big.Float).SetPrec(200)
		for k := len(terms) - 1; k >= 0; k-- {
			if k < 250 {
				p, _ := new(big.Float).Quo(terms[k], total).Float64()
				up, _ := new(big.Float).Quo(upper, total).Float64()
				low, _ := new(big.Float).Quo(lower[k], total).Float64()
				what := fmt.Sprint("mean ", mean, ", k ", k)
				if p > 1e-300 {
					wantDigits(t, what, Poisson{mean}.PMF(k), p, 1e-13)
				}
				wantDigits(t, what, Poisson{mean}.CDF(k), low, 1e-13)
				if up > 1e-300 {
					wantDigits(t, what, Poisson{mean}.SF(k), up, 1e-13)
				}
			}
			upper.Add(upper, terms[k])
		}
	}
}

// Exact counts of samples.
func TestHypergeometricMatchesExactCounts(t *testing.T) {
	for _, d := range []Hypergeometric{{10, 4, 5}, {50, 5, 10}, {80, 60, 70}, {300, 120, 40}, {7, 0, 3}, {7, 7, 3}, {500, 499, 250}, {600, 300, 300}} {
		all := new(big.Int).Binomial(int64(d.Population), int64(d.Draws))
		var terms []*big.Rat
		for k := 0; k <= d.Draws; k++ {
			ways := new(big.Int)
			if k <= d.Marked && d.Draws-k <= d.Population-d.Marked {
				ways.Mul(new(big.Int).Binomial(int64(d.Marked), int64(k)),
					new(big.Int).Binomial(int64(d.Population-d.Marked), int64(d.Draws-k)))
			}
			terms = append(terms, new(big.Rat).SetFrac(ways, all))
		}
		lower, upper := runningTails(terms)
		for k := range terms {
			what := fmt.Sprint(d, " k=", k)
			wantDigits(t, what, d.CDF(k), lower[k], 2e-13)
			wantDigits(t, what, d.SF(k), upper[k], 2e-13)
		}
	}
}

// Identities: marked and drawn may change places, and the marked and the others.
func TestHypergeometricIsSymmetric(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 2))
	for range 200 {
		n := 2 + int(math.Exp(20*rng.Float64()))
		d := Hypergeometric{n, 1 + rng.IntN(n-1), 1 + rng.IntN(min(n-1, 1000000))}
		mean := float64(d.Marked) / float64(n) * float64(d.Draws)
		sd := math.Sqrt(mean * (1 - float64(d.Marked)/float64(n)) * (1 - float64(d.Draws)/float64(n)))
		lo, hi := d.support()
		k := min(max(int(mean+3*sd*rng.NormFloat64()), lo), hi)
		what := fmt.Sprint(d, " k=", k)
		wantDigits(t, what, Hypergeometric{n, d.Draws, d.Marked}.CDF(k), d.CDF(k), 1e-13)
		wantDigits(t, what, Hypergeometric{n, n - d.Marked, d.Draws}.SF(d.Draws-k-1), d.CDF(k), 1e-13)
		wantDigits(t, what, d.CDF(k)+d.SF(k), 1, 1e-14)
	}
}

// Summed term by term and integrated, a wide tail is the same.
func TestHypergeometricWideTailsAreIntegratedAlike(t *testing.T) {
	marked := 2e9
	if 2*marked > math.MaxInt { // no such population in 32 bits
		return
	}
	d := Hypergeometric{int(2 * marked), int(marked), int(marked)} // sd 15,811
	for _, z := range []float64{0.01, 1, 4, 7} {
		k := 1000000000 + int(z*15811)
		summed, term := 0.0, d.term(float64(k))
		for j := float64(k); term > summed*1e-19; j++ {
			summed += term
			term *= (2e9 - j) / (j + 1) * ((2e9 - j) / (j + 1))
		}
		wantDigits(t, fmt.Sprint("z=", z), d.SF(k-1), summed, 1e-12)
		wantDigits(t, fmt.Sprint("z=", -z), d.CDF(2000000000-k), summed, 1e-12)
	}
}

func TestDiscreteLawsStandAnyArgument(t *testing.T) {
	counts := []int{math.MinInt, -1, 0, 1, 7, 1000000, math.MaxInt >> 23, math.MaxInt}
	chances := []float64{math.NaN(), -0.1, 0, 1e-300, 0.3, 1 - 1e-16, 1, 1.1, 1e6, math.Inf(1)}
	check := func(what string, valid bool, values ...float64) {
		for _, v := range values {
			if valid != (v >= 0 && v <= 1) || !valid != math.IsNaN(v) {
				t.Errorf("%s: %v", what, values)
				return
			}
		}
	}
	for _, a := range counts {
		for _, k := range counts {
			for _, p := range chances {
				b := Binomial{a, p}
				check(fmt.Sprint("binomial ", b, k), b.valid(), b.PMF(k), b.CDF(k), b.SF(k))
				c := Poisson{p}
				check(fmt.Sprint("Poisson ", c, k), c.valid(), c.PMF(k), c.CDF(k), c.SF(k))
			}
			for _, b := range counts {
				for _, n := range counts {
					h := Hypergeometric{n, a, b}
					check(fmt.Sprint("hypergeometric ", h, k), h.valid(), h.CDF(k), h.SF(k))
				}
			}
		}
	}
}

func BenchmarkHypergeometricMillion(b *testing.B) {
	for b.Loop() {
		Hypergeometric{1000000000, 500000000, 1000000}.CDF(499000)
	}
}
