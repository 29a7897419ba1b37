package dist

import (
	"math"
	"math/big"
)

// An oracle in binary arithmetic of some hundred bits. It shares nothing with
// the code under test: logarithms of gamma functions by Stirling's series, the
// tails by their positive series, the opposite tail as one minus it with enough
// guard bits for the subtraction.

type oracle struct{ prec uint }

func (o oracle) num(x float64) *big.Float { return o.zero().SetFloat64(x) }
func (o oracle) zero() *big.Float         { return new(big.Float).SetPrec(o.prec) }

func (o oracle) add(a, b *big.Float) *big.Float { return o.zero().Add(a, b) }
func (o oracle) sub(a, b *big.Float) *big.Float { return o.zero().Sub(a, b) }
func (o oracle) mul(a, b *big.Float) *big.Float { return o.zero().Mul(a, b) }
func (o oracle) div(a, b *big.Float) *big.Float { return o.zero().Quo(a, b) }

// negligible says whether term no longer changes sum.
func (o oracle) negligible(term, sum *big.Float) bool {
	return term.Sign() == 0 || term.MantExp(nil) < sum.MantExp(nil)-int(o.prec)-2
}

// exp is e**x: the Taylor series at x/2**k, squared k times.
func (o oracle) exp(x *big.Float) *big.Float {
	wide := oracle{o.prec + 128}
	k := max(0, x.MantExp(nil)+12)
	r := wide.zero().SetMantExp(wide.zero().Set(x), -k)
	sum, term := wide.num(1), wide.num(1)
	for n := 1.0; ; n++ {
		term = wide.div(wide.mul(term, r), wide.num(n))
		sum = wide.add(sum, term)
		if wide.negligible(term, sum) {
			break
		}
	}
	for range k {
		sum = wide.mul(sum, sum)
	}
	return o.zero().Set(sum)
}

// log is the natural logarithm: x = 2**e m, log m = 2 atanh((m-1)/(m+1)).
func (o oracle) log(x *big.Float) *big.Float {
	m := o.zero()
	e := x.MantExp(m)
	if m.Cmp(o.num(0.7)) < 0 {
		m.SetMantExp(m, 1)
		e--
	}
	ln2 := o.atanh2(o.num(1), o.num(3))
	one := o.num(1)
	return o.add(o.mul(o.num(float64(e)), ln2), o.atanh2(o.sub(m, one), o.add(m, one)))
}

// atanh2 is 2 atanh(p/q).
func (o oracle) atanh2(p, q *big.Float) *big.Float {
	s := o.div(p, q)
	z := o.mul(s, s)
	sum, power := o.zero().Set(s), o.zero().Set(s)
	for n := 3.0; ; n += 2 {
		power = o.mul(power, z)
		term := o.div(power, o.num(n))
		sum = o.add(sum, term)
		if o.negligible(term, sum) {
			break
		}
	}
	return o.mul(o.num(2), sum)
}

// bernoulli holds B(2), B(4), ...
var bernoulli = func() []*big.Rat {
	b := []*big.Rat{big.NewRat(1, 1)}
	for m := int64(1); m <= 240; m++ {
		sum := new(big.Rat)
		for k := int64(0); k < m; k++ {
			if k > 1 && k%2 == 1 {
				continue
			}
			c := new(big.Rat).SetInt(new(big.Int).Binomial(m+1, k))
			sum.Add(sum, c.Mul(c, b[k]))
		}
		b = append(b, sum.Mul(sum, big.NewRat(-1, m+1)))
	}
	var even []*big.Rat
	for k := 2; k < len(b); k += 2 {
		even = append(even, b[k])
	}
	return even
}()

// logGamma is log of the gamma function, by Stirling's series after moving the
// argument past prec/4.
func (o oracle) logGamma(a *big.Float) *big.Float {
	z, product := o.zero().Set(a), o.num(1)
	for limit := o.num(float64(o.prec) / 4); z.Cmp(limit) < 0; {
		product = o.mul(product, z)
		z = o.add(z, o.num(1))
	}
	half := o.num(0.5)
	pi := o.pi()
	s := o.mul(o.sub(z, half), o.log(z))
	s = o.sub(s, z)
	s = o.add(s, o.mul(half, o.log(o.mul(o.num(2), pi))))
	power, z2 := o.zero().Set(z), o.mul(z, z)
	for k, b := range bernoulli {
		n := float64(2 * (k + 1))
		term := o.div(o.zero().SetRat(b), o.mul(o.num(n*(n-1)), power))
		s = o.add(s, term)
		if o.negligible(term, s) {
			break
		}
		power = o.mul(power, z2)
	}
	return o.sub(s, o.log(product))
}

// pi by Machin's formula.
func (o oracle) pi() *big.Float {
	arctan := func(n float64) *big.Float {
		x := o.div(o.num(1), o.num(n))
		z := o.mul(x, x)
		sum, power := o.zero().Set(x), o.zero().Set(x)
		for k := 3.0; ; k += 2 {
			power = o.mul(power, z).Neg(o.mul(power, z))
			term := o.div(power, o.num(k))
			sum = o.add(sum, term)
			if o.negligible(term, sum) {
				return sum
			}
		}
	}
	return o.sub(o.mul(o.num(16), arctan(5)), o.mul(o.num(4), arctan(239)))
}

// betaTails gives I_x(a, b) and its complement, y = 1 - x.
func (o oracle) betaTails(x, y, a, b *big.Float) (lower, upper *big.Float) {
	ab := o.add(a, b)
	above := o.mul(x, ab).Cmp(a) > 0
	fx, _ := x.Float64()
	fy, _ := y.Float64()
	// Above the mean the other side, unless its series hardly converges.
	if fy < 0.05 || above && fx >= 0.05 {
		upper, lower = o.betaTails(y, x, b, a)
		return lower, upper
	}
	one := o.num(1)
	// x**a y**b / B(a,b) times the sum over n of (a+b)_n x**n / (a)_(n+1).
	e := o.add(o.mul(a, o.log(x)), o.mul(b, o.log(y)))
	e = o.add(e, o.logGamma(ab))
	e = o.sub(e, o.add(o.logGamma(a), o.logGamma(b)))
	term := o.div(one, a)
	sum, num, den := o.zero().Set(term), o.zero().Set(ab), o.add(a, one)
	for {
		term = o.div(o.mul(term, o.mul(x, num)), den)
		sum = o.add(sum, term)
		if o.negligible(term, sum) {
			break
		}
		num, den = o.add(num, one), o.add(den, one)
	}
	lower = o.mul(o.exp(e), sum)
	return lower, o.sub(one, lower)
}

// gammaTails gives P(a, x) and Q(a, x).
func (o oracle) gammaTails(a, x *big.Float) (lower, upper *big.Float) {
	one := o.num(1)
	e := o.sub(o.sub(o.mul(a, o.log(x)), x), o.logGamma(a))
	if fa, _ := a.Float64(); fa > 200 && x.Cmp(a) > 0 {
		// Legendre's continued fraction, from the back with ever more terms.
		last := o.zero()
		for n := 64; ; n *= 2 {
			f := o.zero()
			for k := n; k >= 1; k-- {
				fk := o.num(float64(k))
				top := o.mul(fk, o.sub(fk, a))
				bottom := o.sub(o.add(o.add(x, o.num(float64(2*k+1))), o.zero().Neg(a)), f)
				f = o.div(top, bottom)
			}
			f = o.div(one, o.sub(o.sub(o.add(x, one), a), f))
			if d := o.sub(f, last); d.Sign() == 0 || d.MantExp(nil) < f.MantExp(nil)-100 {
				upper = o.mul(o.exp(e), f)
				return o.sub(one, upper), upper
			}
			last = f
		}
	}
	term := o.div(one, a)
	sum, den := o.zero().Set(term), o.add(a, one)
	for {
		term = o.div(o.mul(term, x), den)
		sum = o.add(sum, term)
		if o.negligible(term, sum) {
			break
		}
		den = o.add(den, one)
	}
	lower = o.mul(o.exp(e), sum)
	return lower, o.sub(one, lower)
}

// precisionFor is the number of bits so that a tail of the given exponent keeps
// some 40 digits after a subtraction from one.
func precisionFor(tail float64) uint {
	if !(tail > 0) {
		tail = 5e-324
	}
	return uint(200 - math.Log2(tail))
}

// relative is got/want - 1, and 0 where both are 0 or want is below the range of
// normal numbers and got is too.
func relative(got float64, want *big.Float) float64 {
	if w, _ := want.Float64(); math.Abs(w) < 0x1p-1022 && math.Abs(got) <= 0x1p-1022 {
		return 0
	}
	if math.IsNaN(got) || math.IsInf(got, 0) {
		return math.Inf(1)
	}
	d := new(big.Float).SetPrec(200).Sub(new(big.Float).SetFloat64(got), want)
	f, _ := d.Quo(d, want).Float64()
	return f
}
