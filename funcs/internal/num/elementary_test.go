package num

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// bigExp is e**x at 300 bits: the Taylor series at x/2**k, squared k times.
func bigExp(x *big.Float) *big.Float {
	const prec = 300
	k := max(0, x.MantExp(nil)+10)
	r := new(big.Float).SetPrec(prec).SetMantExp(new(big.Float).SetPrec(prec).Set(x), -k)
	sum, term := big.NewFloat(1).SetPrec(prec), big.NewFloat(1).SetPrec(prec)
	for n := int64(1); n < 60; n++ {
		term.Mul(term, r)
		term.Quo(term, new(big.Float).SetInt64(n))
		sum.Add(sum, term)
	}
	for range k {
		sum.Mul(sum, sum)
	}
	return sum
}

func bigSum(xs ...float64) *big.Float {
	s := new(big.Float).SetPrec(2200)
	for _, x := range xs {
		s.Add(s, new(big.Float).SetFloat64(x))
	}
	return s.SetPrec(300)
}

// ratioLess1 is a/b - 1.
func ratioLess1(a, b *big.Float) float64 {
	d := new(big.Float).SetPrec(300).Sub(a, b)
	f, _ := d.Quo(d, b).Float64()
	return f
}

// arguments are random of every size up to the given ones, and odd ones.
func arguments(n int, smallest, largest float64) []float64 {
	rng := rand.New(rand.NewPCG(6, 1))
	lo, hi := math.Log(smallest), math.Log(largest)
	var xs []float64
	for range n {
		x := math.Exp(lo + (hi-lo)*rng.Float64())
		xs = append(xs, x, -x)
	}
	return xs
}

// The wanted values are exponentials at 300 bits. A logarithm y of x is judged
// by exp(y)/x - 1, which is its absolute error.
func TestElementaryFunctionsMatchHighPrecision(t *testing.T) {
	worst := map[string]float64{}
	judge := func(name string, x, got, err, limit float64) {
		t.Helper()
		worst[name] = max(worst[name], math.Abs(err))
		if !(math.Abs(err) <= limit) {
			t.Errorf("%s(%v) = %v, relative error %.2g", name, x, got, err)
		}
	}
	for _, x := range arguments(500, 1e-18, 708) {
		want := bigExp(bigSum(x))
		judge("Exp", x, Exp(x), ratioLess1(bigSum(Exp(x)), want), 1.4e-16)
		judge("Expm1", x, Expm1(x), ratioLess1(bigSum(Expm1(x)), new(big.Float).Sub(want, bigSum(1))), 3.3e-16)
		w := Wide{x, x * 0x1p-54 * 0.7}
		judge("ExpWide", x, ExpWide(w), ratioLess1(bigSum(ExpWide(w)), bigExp(bigSum(w.Hi, w.Lo))), 1.3e-16)
	}
	for _, x := range arguments(500, 1e-300, 1e300) {
		if x < 0 {
			continue
		}
		y := Log(x)
		judge("Log", x, y, ratioLess1(bigExp(bigSum(y)), bigSum(x))/y, 1.7e-16)
		w := LogWide(Wide{x, 0})
		judge("LogWide (absolute)", x, w.Hi, ratioLess1(bigExp(bigSum(w.Hi, w.Lo)), bigSum(x)), 4e-18)
	}
	for _, x := range arguments(500, 1e-15, 40) {
		if x <= -1 {
			x = -1 - 1/x
		}
		y := Log1p(x)
		judge("Log1p", x, y, ratioLess1(bigExp(bigSum(y)), bigSum(1, x))/y, 2.5e-16)
		z := Log1pmx(x)
		judge("Log1pmx", x, z, ratioLess1(bigExp(bigSum(z, x)), bigSum(1, x))/z, 5e-16)
		w := Log1pmxWide(TwoSum(1, x), Widen(x))
		judge("Log1pmxWide", x, w.Hi, ratioLess1(bigExp(bigSum(w.Hi, w.Lo, x)), bigSum(1, x))/w.Hi, 5e-17)
	}
	for name, e := range worst {
		t.Logf("%s: largest relative error %.2g", name, e)
	}
}

// Definitions.
func TestElementaryFunctionsAtTheEdges(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"Exp(-Inf)", Exp(-inf), 0}, {"Exp(Inf)", Exp(inf), inf}, {"Exp(NaN)", Exp(nan), nan}, {"Exp(0)", Exp(0), 1},
		{"Exp(710)", Exp(710), inf}, {"Exp(-746)", Exp(-746), 0}, {"Exp(709.78)", Exp(709.78), 1.7928227943945155e308},
		{"Exp(-745.13)", Exp(-745.13), 5e-324}, {"Exp(-710)", Exp(-710), 4.47628622567513e-309},
		{"Expm1(-Inf)", Expm1(-inf), -1}, {"Expm1(Inf)", Expm1(inf), inf}, {"Expm1(NaN)", Expm1(nan), nan}, {"Expm1(0)", Expm1(0), 0},
		{"Log(0)", Log(0), -inf}, {"Log(-1)", Log(-1), nan}, {"Log(Inf)", Log(inf), inf}, {"Log(NaN)", Log(nan), nan}, {"Log(1)", Log(1), 0},
		{"Log(5e-324)", Log(5e-324), -744.4400719213812},
		{"Log1p(-1)", Log1p(-1), -inf}, {"Log1p(-2)", Log1p(-2), nan}, {"Log1p(Inf)", Log1p(inf), inf}, {"Log1p(NaN)", Log1p(nan), nan},
		{"Log1p(5e-324)", Log1p(5e-324), 5e-324},
		{"Log1pmx(-1)", Log1pmx(-1), -inf}, {"Log1pmx(-2)", Log1pmx(-2), nan}, {"Log1pmx(Inf)", Log1pmx(inf), -inf}, {"Log1pmx(NaN)", Log1pmx(nan), nan},
		{"PowWide(2, -1000)", PowWide(Widen(2), -1000), 0x1p-1000}, {"PowWide(1e-290, 0.25)", PowWide(Widen(1e-290), 0.25), 3.1622776601683795e-73},
	} {
		if c.got != c.want && !(math.IsNaN(c.got) && math.IsNaN(c.want)) {
			t.Errorf("%s = %v, want %v", c.name, c.got, c.want)
		}
	}
}

// Products and sums of two doubles have an exact double-length form.
func TestWideArithmeticKeepsThirtyDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 2))
	number := func() Wide {
		x := rng.NormFloat64() * math.Pow(2, float64(rng.IntN(40)-20))
		return TwoSum(x, x*0x1p-53*(rng.Float64()-0.5))
	}
	exact := func(w Wide) *big.Float { return bigSum(w.Hi, w.Lo) }
	judge := func(name string, got Wide, want *big.Float) {
		t.Helper()
		if e := ratioLess1(exact(got), want); !(math.Abs(e) < 0x1p-98) {
			t.Errorf("%s: relative error %.2g", name, e)
		}
	}
	for range 2000 {
		a, b := number(), number()
		ea, eb := exact(a), exact(b)
		at := func() *big.Float { return new(big.Float).SetPrec(300) }
		judge("product", a.Mul(b), at().Mul(ea, eb))
		judge("product with a float64", a.Times(b.Hi), at().Mul(ea, bigSum(b.Hi)))
		judge("quotient", a.Div(b), at().Quo(ea, eb))
		judge("quotient by a float64", a.Over(b.Hi), at().Quo(ea, bigSum(b.Hi)))
		sum := at().Add(ea, eb)
		if math.Abs(a.Hi+b.Hi) > 1e-3*math.Abs(a.Hi) {
			judge("sum", a.Add(b), sum)
			judge("sum with a float64", a.Plus(b.Hi), at().Add(ea, bigSum(b.Hi)))
		}
		judge("two-sum", TwoSum(a.Hi, b.Hi), at().Add(bigSum(a.Hi), bigSum(b.Hi)))
		judge("two-product", TwoProduct(a.Hi, b.Hi), at().Mul(bigSum(a.Hi), bigSum(b.Hi)))
	}
}
