package dist

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs/internal/num"
)

// A lawGrid draws laws of one family, with parameters over many orders of
// magnitude, and knows their exact tails.
type lawGrid struct {
	name  string
	draw  func(rng *rand.Rand) Distribution
	tails func(o oracle, law Distribution, x float64) (lower, upper *big.Float)
	// slope is x times the density, whatever its sign.
	slope func(law Distribution, x float64) float64
}

func spread(rng *rand.Rand, low, high float64) float64 {
	return math.Pow(10, low+(high-low)*rng.Float64())
}

// grids give parameters up to 10^high.
func grids(high float64) []lawGrid {
	return []lawGrid{
		{"normal", func(*rand.Rand) Distribution { return Normal{} },
			func(o oracle, _ Distribution, z float64) (*big.Float, *big.Float) {
				// P(Z > z) = Q(1/2, z^2/2)/2.
				half := o.num(0.5)
				_, q := o.gammaTails(half, o.mul(half, o.mul(o.num(z), o.num(z))))
				q = o.mul(half, q)
				if z < 0 {
					return q, o.sub(o.num(1), q)
				}
				return o.sub(o.num(1), q), q
			}, func(_ Distribution, z float64) float64 { return Normal{}.Density(z) * z }},
		{"student", func(rng *rand.Rand) Distribution { return Student{spread(rng, -0.5, high)} },
			func(o oracle, law Distribution, t float64) (*big.Float, *big.Float) {
				df := law.(Student).DF
				square := o.mul(o.num(t), o.num(t))
				sum := o.add(square, o.num(df))
				outside, _ := o.betaTails(o.div(o.num(df), sum), o.div(square, sum), o.num(df/2), o.num(0.5))
				q := o.mul(o.num(0.5), outside)
				if t < 0 {
					return q, o.sub(o.num(1), q)
				}
				return o.sub(o.num(1), q), q
			}, func(law Distribution, t float64) float64 {
				if t = math.Abs(t); t < 1 {
					return law.(Student).Density(t) * t
				}
				return law.(Student).scaledDensity(t) // the density itself may underflow
			}},
		{"gamma", func(rng *rand.Rand) Distribution { return Gamma{spread(rng, -4, high)} },
			func(o oracle, law Distribution, x float64) (*big.Float, *big.Float) {
				return o.gammaTails(o.num(law.(Gamma).Shape), o.num(x))
			}, func(law Distribution, x float64) float64 { return GammaPrefactor(law.(Gamma).Shape, x) }},
		{"beta", func(rng *rand.Rand) Distribution { return Beta{spread(rng, -3, high), spread(rng, -3, high)} },
			func(o oracle, law Distribution, x float64) (*big.Float, *big.Float) {
				l := law.(Beta)
				return o.betaTails(o.num(x), o.sub(o.num(1), o.num(x)), o.num(l.A), o.num(l.B))
			}, func(law Distribution, x float64) float64 {
				return BetaPrefactor(x, 1-x, law.(Beta).A, law.(Beta).B) / (1 - x)
			}},
		{"F", func(rng *rand.Rand) Distribution { return F{spread(rng, -1, high), spread(rng, -1, high)} },
			func(o oracle, law Distribution, x float64) (*big.Float, *big.Float) {
				l := law.(F)
				u := o.mul(o.num(l.DF1), o.num(x))
				sum := o.add(u, o.num(l.DF2))
				return o.betaTails(o.div(u, sum), o.div(o.num(l.DF2), sum), o.num(l.DF1/2), o.num(l.DF2/2))
			}, func(law Distribution, x float64) float64 {
				X, Y := law.(F).beta(num.Widen(x))
				return betaPointAt(X, Y, law.(F).DF1/2, law.(F).DF2/2).factor
			}},
	}
}

// level draws a tail of any size, often near a half or near the edge of what a
// float64 holds.
func level(rng *rand.Rand) float64 {
	switch rng.IntN(4) {
	case 0:
		return rng.Float64() / 2
	case 1:
		return spread(rng, -16, 0) / 2
	case 2:
		return spread(rng, -300, 0)
	}
	return 0.5 - spread(rng, -13, -1)
}

// usable says that an argument is far enough from the ends of the law for its
// own rounding not to matter.
func usable(law Distribution, x float64) bool {
	if _, ok := law.(Beta); ok && x > 0.999 {
		return false
	}
	return math.Abs(x) > 1e-290 && math.Abs(x) < 1e140
}

// Both tails and both inverses against exact values in some hundred bits (see
// oracle). The worst seen in a hundred times as many points is 1e-14 for the
// tails and 4e-14 for the inverses, the latter with shapes near 1e-2, where an
// inverse moves a hundred times as fast as its tail.
func TestTailsAndInversesMatchTheOracle(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 20))
	for _, g := range grids(5) {
		worstTail, worstInverse := 0.0, 0.0
		for range 60 {
			law, p, upper := g.draw(rng), level(rng), rng.IntN(2) == 0
			x := law.Quantile(p)
			if upper {
				x = law.UpperQuantile(p)
			}
			if !usable(law, x) {
				continue
			}
			lower, up := g.tails(oracle{precisionFor(p)}, law, x)
			what := fmt.Sprintf("%T%v at %v", law, law, x)
			for _, c := range []struct {
				name string
				got  float64
				want *big.Float
			}{{"CDF", law.CDF(x), lower}, {"SF", law.SF(x), up}} {
				e := math.Abs(relative(c.got, c.want))
				worstTail = max(worstTail, e)
				if !(e < 3e-14) {
					t.Errorf("%s: %s = %v, relative error %.2g", what, c.name, c.got, e)
				}
			}
			tail := lower
			if upper {
				tail = up
			}
			gap, _ := new(big.Float).Sub(tail, new(big.Float).SetFloat64(p)).Float64()
			e := math.Abs(gap / g.slope(law, x))
			worstInverse = max(worstInverse, e)
			if !(e < 1e-13) {
				t.Errorf("%s: inverse of %v (upper %v), relative error %.2g", what, p, upper, e)
			}
		}
		t.Logf("%s: tails to %.2g, inverses to %.2g", g.name, worstTail, worstInverse)
	}
}

// P(a <= X <= b) against the difference of exact tails.
func TestBetweenMatchesTheOracle(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 21))
	for _, g := range grids(3) {
		worst := 0.0
		for range 40 {
			law, p := g.draw(rng), level(rng)
			a := law.Quantile(p)
			b := a + math.Abs(a)*spread(rng, -12, 0.5)
			if rng.IntN(2) == 0 {
				a = law.UpperQuantile(p)
				b = a + math.Abs(a)*spread(rng, -12, 0.5)
			}
			if !usable(law, a) || !usable(law, b) || a == b {
				continue
			}
			got := law.Between(a, b)
			o := oracle{precisionFor(got)}
			lowerA, _ := g.tails(o, law, a)
			lowerB, _ := g.tails(o, law, b)
			want := o.sub(lowerB, lowerA)
			if f, _ := want.Float64(); f < 1e-300 {
				continue
			}
			e := math.Abs(relative(got, want))
			worst = max(worst, e)
			if !(e < 3e-14) {
				t.Errorf("%T%v from %v to %v: %v, relative error %.2g", law, law, a, b, got, e)
			}
		}
		t.Logf("%s: to %.2g", g.name, worst)
	}
}

// A tail at b is the tail at a and what lies between, which is integrated on
// its own: so the methods for different regions join, also at 1e10 degrees of
// freedom, where the oracle is slow.
func TestTailsJoinAcrossTheirMethods(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 22))
	for _, g := range grids(10) {
		worst := 0.0
		for range 4000 {
			law, p := g.draw(rng), level(rng)
			// Where the tail is p and p less up to a quarter: the tails cancel.
			q := p * (0.75 + 0.25*rng.Float64())
			for _, upper := range []bool{false, true} {
				a, b := law.Quantile(q), law.Quantile(p)
				tail, rest := law.CDF(b), law.CDF(a)
				if upper {
					a, b = law.UpperQuantile(p), law.UpperQuantile(q)
					tail, rest = law.SF(a), law.SF(b)
				}
				if !usable(law, a) || !usable(law, b) || !(a < b) {
					continue
				}
				between := law.Between(a, b)
				e := math.Abs((rest+between)/tail - 1)
				worst = max(worst, e)
				if !(e < 3e-14) {
					t.Errorf("%T%v, upper %v: tails %v and %v at %v and %v differ by %v, between them %v", law, law, upper, tail, rest, a, b, tail-rest, between)
				}
			}
		}
		t.Logf("%s: to %.2g", g.name, worst)
	}
}

// From the definition: the two tails sum to 1, and each is monotone. Steps of
// 1e-12 are wider than the error of a tail wherever they move it.
func TestTailsSumToOneAndAreMonotone(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 23))
	for _, g := range grids(10) {
		for range 3000 {
			law := g.draw(rng)
			x := law.Quantile(level(rng))
			if rng.IntN(2) == 0 {
				x = law.UpperQuantile(level(rng))
			}
			if !usable(law, x) {
				continue
			}
			lower, upper := law.CDF(x), law.SF(x)
			if math.Abs(lower+upper-1) > 4e-16 {
				t.Errorf("%T%v at %v: tails %v and %v", law, law, x, lower, upper)
			}
			next := x + math.Abs(x)*1e-12
			if l, u := law.CDF(next), law.SF(next); l < lower*(1-3e-14) || u > upper*(1+3e-14) {
				t.Errorf("%T%v: tails %v and %v at %v, %v and %v at %v", law, law, lower, upper, x, l, u, next)
			}
		}
	}
}

// A round trip from either tail ends where it began, to the error of both ways.
func TestQuantilesReturnTheirProbability(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 24))
	for _, g := range grids(10) {
		worst := 0.0
		for range 3000 {
			law, p := g.draw(rng), level(rng)
			for _, upper := range []bool{false, true} {
				x := law.Quantile(p)
				if upper {
					x = law.UpperQuantile(p)
				}
				if !usable(law, x) {
					continue
				}
				tail := law.CDF(x)
				if upper {
					tail = law.SF(x)
				}
				// Half an ulp of the quantile moves the tail by 1.1e-16 |x f(x)|.
				e := math.Abs(tail-p)/p - 4e-16*math.Abs(g.slope(law, x))/p
				worst = max(worst, e)
				if !(e < 3e-14) {
					t.Errorf("%T%v: quantile of %v (upper %v) is %v with tail %v", law, law, p, upper, x, tail)
				}
			}
		}
		t.Logf("%s: to %.2g", g.name, worst)
	}
}
