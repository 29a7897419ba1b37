package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// All of these are laws of the one interface.
var _ = []Distribution{NoncentralT{}, NoncentralChiSquare{}, NoncentralF{}, StudentizedRange{}, MaxT{}}

// Dunnett 1955, Table 1a: equal groups, one-sided, upper 5% points.
func TestComparisonsWithControlReproducePrintedTable(t *testing.T) {
	for _, r := range publishedTable(t, "dunnett-one-sided-095") {
		var of struct {
			P           float64
			Comparisons int
			DF          tableNumber
		}
		parameters(t, r, &of)
		groups := make([]int, of.Comparisons)
		for i := range groups {
			groups[i] = 5
		}
		wantPrinted(t, r, ComparisonsWithControl(5, groups, float64(of.DF), false).Quantile(of.P))
	}
}

// The double integral over the common variable and over s at 40 digits, with
// probabilities as plain differences.
func TestMaxTMatchesHighPrecision(t *testing.T) {
	for _, c := range []struct {
		law             MaxT
		t, lower, upper float64
	}{
		{ComparisonsWithControl(12, []int{8, 10, 15}, 41, true), 2.5, 0.955967985410463820943, 0.04403201458953617905696},
		{ComparisonsWithControl(12, []int{8, 10, 15}, 41, false), -0.75, 0.05882092142631962865227, 0.9411790785736803713477},
		{ComparisonsWithControl(5, []int{20, 6}, 7, false), 6, 0.9995300094608564391533, 0.0004699905391435608467275},
		{JointPrediction(6, 4, 5, true), 3.5, 0.9441999326817659647993, 0.05580006731823403520074},
		{JointPrediction(9, 3, 8, true), 11, 0.9999879945945690635629, 0.0000120054054309364371412},
	} {
		wantDigits(t, c.law, c.law.CDF(c.t), c.lower, 1e-13)
		wantDigits(t, c.law, c.law.SF(c.t), c.upper, 1e-13)
		wantDigits(t, c.law, c.law.Quantile(c.lower), c.t, 1e-11)
		wantDigits(t, c.law, c.law.UpperQuantile(c.upper), c.t, 1e-12)
	}
}

// The double integral over the common variable and over s in 33 digits, each tail
// with its own integrand: unequal sizes, far tails, few and many degrees of freedom.
func TestComparisonsWithControlMatchHighPrecisionInOneTail(t *testing.T) {
	for _, c := range []struct {
		law   MaxT
		t     float64
		upper bool
		tail  float64
	}{
		{ComparisonsWithControl(5, []int{100, 100, 100}, 1e+10, true), 28.759818212296135, true, 2.0482313250874326003554729e-181},
		{ComparisonsWithControl(6, []int{4, 5, 10}, 30, false), 10.024468459886444, true, 6.4361564715394167877004945e-11},
		{ComparisonsWithControl(1000, []int{2, 2, 2}, 1e+06, false), 0.8430915363990165, true, 0.48683510656077790560798433},
		{ComparisonsWithControl(100, []int{5, 7, 9, 11, 13}, 8, true), 2.8003306135849693, true, 0.096552788267326630914567941},
		{ComparisonsWithControl(4, []int{8, 30, 900, 900}, math.Inf(1), true), 0.41948115655048, false, 0.10671981781775705661178655},
		{ComparisonsWithControl(10, []int{10, 10, 10, 10, 10}, 8, true), 8.410516335010946, true, 0.00012239897470191996496325289},
		{ComparisonsWithControl(100, []int{5, 7, 9, 11, 13}, 8, true), 5.172823974020566, true, 0.0038715615562087168976777719},
		{ComparisonsWithControl(5, []int{100, 100, 100}, 1, true), 3.3265350678112524, true, 0.22530938018235898097591839},
		{ComparisonsWithControl(1, []int{1, 1}, 1e+10, false), -5.53939353564668, false, 1.5546797273265053189820097e-11},
		{ComparisonsWithControl(1, []int{1, 1}, 1, false), 8037.356774373059, true, 0.000059405702634275593711335314},
	} {
		for _, law := range []MaxT{c.law, c.law.Shared()} {
			got, back := law.CDF(c.t), law.Quantile
			if c.upper {
				got, back = law.SF(c.t), law.UpperQuantile
			}
			what := fmt.Sprint(c.law, c.t)
			wantDigits(t, what, got, c.tail, 5e-13)
			wantDigits(t, what+", quantile", back(c.tail), c.t, 5e-13)
		}
	}
}

// Identity: one comparison, or one further value, is Student's t.
func TestMaxTOfOneIsStudent(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 1))
	for range 60 {
		df := math.Exp(rng.Float64()*8 - 1)
		x := 3 * rng.NormFloat64()
		s := Student{df}
		past := 1 + rng.IntN(50)
		one, two := JointPrediction(past, 1, df, false), JointPrediction(past, 1, df, true)
		what := fmt.Sprint("t=", x, " df=", df, " past=", past)
		wantDigits(t, what, one.CDF(x), s.CDF(x), 1e-11)
		wantDigits(t, what, one.SF(x), s.SF(x), 1e-11)
		wantDigits(t, what, two.SF(math.Abs(x)), 2*s.SF(math.Abs(x)), 1e-11)
		wantDigits(t, what, two.CDF(math.Abs(x)), s.Between(-math.Abs(x), math.Abs(x)), 1e-11)
	}
}

// Identity (Owen 1956): for two normal variables of correlation r and known
// spread, P(both > w) = Q(w) - 2 T(w, sqrt((1-r)/(1+r))).
func TestMaxTOfTwoIsOwensT(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 2))
	for range 100 {
		control, a, b := 1+rng.IntN(20), 1+rng.IntN(60), 1+rng.IntN(60)
		d := ComparisonsWithControl(control, []int{a, b}, math.Inf(1), false)
		r := math.Sqrt(float64(a) / float64(a+control) * (float64(b) / float64(b+control)))
		w := 3 * rng.NormFloat64()
		tail := Normal{}.SF(w)
		both := tail - 2*OwensT(w, math.Sqrt((1-r)/(1+r)))
		what := fmt.Sprint(control, a, b, w)
		wantDigits(t, what, d.SF(w), 2*tail-both, 1e-12)
		// P(both <= w) mirrors P(both > -w).
		below := Normal{}.SF(-w) - 2*OwensT(w, math.Sqrt((1-r)/(1+r)))
		if w < 0 {
			below = Normal{}.CDF(w) - 2*OwensT(w, math.Sqrt((1-r)/(1+r)))
		}
		if below > 1e-3 {
			wantDigits(t, what, d.CDF(w), below, 1e-11)
		}
	}
}

// Groups of very many times the control's values, where one numerator is nearly
// another: Owen's T as above, and both ways of integrating agree where they meet.
func TestMaxTOfGroupsFarLargerThanTheControl(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 4))
	for range 60 {
		a, b := 200+int(math.Exp(30*rng.Float64())), 200+int(math.Exp(30*rng.Float64()))
		d := ComparisonsWithControl(1, []int{a, b}, math.Inf(1), false)
		p, q := float64(a), float64(b)
		r := math.Sqrt(p/(p+1)) * math.Sqrt(q/(q+1))
		lack := (1/(p+1) + 1/(q+1) - 1/((p+1)*(q+1))) / (1 + r) // 1 - r without cancellation
		w := 3 * rng.Float64()
		both := Normal{}.SF(w) - 2*OwensT(w, math.Sqrt(lack/(1+r)))
		what := fmt.Sprint(a, b, w)
		wantDigits(t, what, d.SF(w), 2*Normal{}.SF(w)-both, 1e-12)
		wantDigits(t, what, d.CDF(w)+d.SF(w), 1, 1e-13)
		two := ComparisonsWithControl(1, []int{a, b}, math.Inf(1), true)
		wantDigits(t, what, two.CDF(w)+two.SF(w), 1, 1e-13)
		far := 10 + 20*rng.Float64() // here both beyond is both beyond on one side
		both = Normal{}.SF(far) - 2*OwensT(far, math.Sqrt(lack/(1+r)))
		if tail := 2*(Normal{}).SF(far) - both; tail > 1e-290 {
			wantDigits(t, fmt.Sprint(a, b, far), two.SF(far), 2*tail, 1e-11)
		}
	}
	d := ComparisonsWithControl(1, []int{150, 260, 400, 400, 3, 90}, 60, false)
	f := func(upper bool, w float64) (float64, float64) {
		steepest, most := 0.0, 0.0
		for _, p := range d.parts {
			steepest, most = max(steepest, p.shift/p.stretch), max(most, p.shift)
		}
		f := func(y float64) float64 {
			all := d.logAllBelow(w, y, upper)
			if upper {
				return math.Exp(-y*y/2) * -math.Expm1(all)
			}
			return math.Exp(all - y*y/2)
		}
		return d.graded(f, w, steepest, most), outwards(f, 0, -w-1, w+1, 0.02)
	}
	for _, w := range []float64{0.3, 1.5, 2.4, 5} {
		for _, upper := range []bool{false, true} {
			graded, even := f(upper, w)
			wantDigits(t, fmt.Sprint(w, upper), graded, even, 1e-12)
		}
	}
}

func TestMaxTTailsAndQuantilesAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 3))
	for i := range 60 {
		df := math.Exp(rng.Float64() * 12)
		twoSided := i%2 == 0
		var d MaxT
		if i%3 == 0 {
			d = JointPrediction(1+rng.IntN(100), 1+rng.IntN(200), df, twoSided)
		} else {
			groups := make([]int, 1+rng.IntN(6))
			for j := range groups {
				groups[j] = 2 + rng.IntN(30)
			}
			d = ComparisonsWithControl(2+rng.IntN(30), groups, df, twoSided)
		}
		x := 1 + 2*rng.NormFloat64()
		if twoSided {
			x = math.Abs(x)
		}
		what := fmt.Sprint("t=", x, " ", d)
		low, high := d.CDF(x), d.SF(x)
		wantDigits(t, what, low+high, 1, 1e-13)
		if next := d.SF(x + 1e-5); !(next < high || high > 1-1e-12 || high == 0) {
			t.Errorf("%s: upper tail rises from %v to %v", what, high, next)
		}
		if next := d.CDF(x + 1e-5); !(next > low || low > 1-1e-12 || low == 0) {
			t.Errorf("%s: lower tail falls from %v to %v", what, low, next)
		}
		p := math.Exp(-40 * rng.Float64() * rng.Float64())
		wantDigits(t, fmt.Sprint("p=", p, d), d.CDF(d.Quantile(p)), p, 3e-12)
		wantDigits(t, fmt.Sprint("p=", p, d), d.SF(d.UpperQuantile(p)), p, 3e-12)
	}
}

// Bounds that hold for every correlation l_i l_j >= 0: between independence and
// the sum of single tails (Sidak 1967; Slepian 1962), far out within a hair.
func TestMaxTStaysBetweenItsBounds(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 4))
	for range 60 {
		groups := make([]int, 1+rng.IntN(5))
		for j := range groups {
			groups[j] = 2 + rng.IntN(30)
		}
		m := float64(len(groups))
		d := ComparisonsWithControl(20, groups, math.Inf(1), true)
		w := 0.5 + 9*rng.Float64()
		single := 2 * Normal{}.SF(w)
		independent := -math.Expm1(m * math.Log1p(-single))
		got := d.SF(w)
		if !(got <= independent*(1+1e-13) && got >= single*(1-1e-13)) {
			t.Errorf("%v at %v: %v is not between %v and %v", d, w, got, single, independent)
		}
	}
}

func TestMaxTStandsAnyArgument(t *testing.T) {
	for _, groups := range [][]int{nil, {0}, {1}, {1, 400}, {5, 5, 5, 7}} {
		for _, control := range []int{0, 1, 1000} {
			for _, df := range []float64{math.NaN(), 0, 1, 40, math.Inf(1)} {
				for _, twoSided := range []bool{false, true} {
					d := ComparisonsWithControl(control, groups, df, twoSided)
					valid := control > 0 && len(groups) > 0 && groups[0] > 0 && df > 0
					for _, x := range []float64{math.Inf(-1), -1e300, -3, 0, 1e-300, 2, 1e300, math.Inf(1)} {
						low, high := d.CDF(x), d.SF(x)
						if valid != (low >= 0 && high >= 0 && math.Abs(low+high-1) < 1e-12) || !valid && !math.IsNaN(low) {
							t.Errorf("%v at %v: tails %v and %v", d, x, low, high)
						}
					}
					for _, p := range []float64{0, 1e-30, 0.3, 1 - 1e-16, 1} {
						if valid == math.IsNaN(d.Quantile(p)) {
							t.Errorf("%v: quantile of %v is %v", d, p, d.Quantile(p))
						}
					}
				}
			}
		}
	}
}

func benchmarkMaxT(b *testing.B, d MaxT, x float64) {
	for b.Loop() {
		d.SF(x)
	}
}

func BenchmarkMaxTEqual(b *testing.B) {
	benchmarkMaxT(b, ComparisonsWithControl(10, []int{10, 10, 10, 10}, 45, true), 2.5)
}

func BenchmarkMaxTUnequal(b *testing.B) {
	benchmarkMaxT(b, ComparisonsWithControl(40, []int{10, 9, 8, 7, 12, 11, 20, 5}, 110, true), 2.7)
}

func BenchmarkMaxTUnequalSmallControl(b *testing.B) {
	benchmarkMaxT(b, ComparisonsWithControl(4, []int{100, 90, 80, 7, 12, 11, 20, 5}, 300, true), 2.7)
}

func BenchmarkMaxTPrediction(b *testing.B) {
	benchmarkMaxT(b, JointPrediction(6, 20, 5, true), 4)
}

func BenchmarkMaxTQuantile(b *testing.B) {
	for b.Loop() {
		JointPrediction(6, 20, 5, true).Quantile(0.95)
	}
}
