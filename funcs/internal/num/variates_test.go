package num

import (
	"math"
	"slices"
	"testing"
)

// The constants printed with the method must make the last layer end at height 1.
func TestLayersClose(t *testing.T) {
	for name, z := range map[string]*ziggurat{"normal": normalLayers(), "exponential": exponentialLayers()} {
		area := z.edge[0] * z.height[1]
		if top := z.height[layers-1] + area/z.edge[layers-1]; math.Abs(top-1) > 1e-10 {
			t.Errorf("%s: the layers close at %v", name, top)
		}
		for i := range layers {
			if !(z.edge[i] > z.edge[i+1]) {
				t.Errorf("%s: edge %d is %v, the next %v", name, i, z.edge[i], z.edge[i+1])
			}
		}
	}
}

// farFrom is Kolmogorov's distance of draws from their law.
func farFrom(x []float64, cdf func(float64) float64) float64 {
	slices.Sort(x)
	n, far := float64(len(x)), 0.0
	for i, v := range x {
		f := cdf(v)
		far = max(far, math.Abs(f-float64(i)/n), math.Abs(f-float64(i+1)/n))
	}
	return far
}

// A distance above 2.23/√n comes once in 10,000 times from the law itself
// (Kolmogorov's limit 2·exp(-2·2.23²)); the tails are looked at by themselves.
func TestVariatesFollowTheirLaws(t *testing.T) {
	const n = 200_000
	normal := func(x float64) float64 { return math.Erfc(-x/math.Sqrt2) / 2 }
	exponential := func(x float64) float64 { return -math.Expm1(-x) }
	for _, c := range []struct {
		name string
		draw func(*Stream) float64
		cdf  func(float64) float64
	}{
		{"uniform", (*Stream).Uniform, func(x float64) float64 { return x }},
		{"normal", (*Stream).Normal, normal},
		{"exponential", (*Stream).Exponential, exponential},
		{"tail of the normal", (*Stream).normalTail, func(x float64) float64 {
			edge := normalLayers().edge[1]
			return 1 - math.Erfc(x/math.Sqrt2)/math.Erfc(edge/math.Sqrt2)
		}},
		{"gamma 1", func(s *Stream) float64 { return s.Gamma(1) }, exponential},
		{"gamma 1/2", func(s *Stream) float64 { return s.Gamma(0.5) }, func(x float64) float64 { return math.Erf(math.Sqrt(x / 2)) }},
		{"gamma 3/2", func(s *Stream) float64 { return s.Gamma(1.5) }, func(x float64) float64 {
			g := 1.5 * x // over its shape
			return math.Erf(math.Sqrt(g)) - 2*math.Sqrt(g/math.Pi)*math.Exp(-g)
		}},
		{"gamma 4", func(s *Stream) float64 { return s.Gamma(4) }, func(x float64) float64 {
			g := 4 * x
			return 1 - math.Exp(-g)*(1+g+g*g/2+g*g*g/6)
		}},
	} {
		s, x := NewStream(), make([]float64, n)
		s.Start(11, 5)
		for i := range x {
			x[i] = c.draw(s)
		}
		if d := farFrom(x, c.cdf); d > 2.23/math.Sqrt(n) {
			t.Errorf("%s: the draws are %v from their law, 2.23/√n is %v", c.name, d, 2.23/math.Sqrt(n))
		}
	}
}

// What lies beyond the ziggurat's edge, and in its topmost layers, comes as often
// as it should, to 4 standard deviations.
func TestVariatesKeepTheirEnds(t *testing.T) {
	const n = 10_000_000
	var far, near, farE float64
	s := NewStream()
	s.Start(3, 8)
	for range n {
		z := math.Abs(s.Normal())
		if z > 3.7 {
			far++
		}
		if z < 0.01 {
			near++
		}
		if s.Exponential() > 8 {
			farE++
		}
	}
	for _, c := range []struct {
		name        string
		got, chance float64
	}{
		{"normal beyond 3.7", far, math.Erfc(3.7 / math.Sqrt2)},
		{"normal within 0.01", near, math.Erf(0.01 / math.Sqrt2)},
		{"exponential beyond 8", farE, math.Exp(-8)},
	} {
		if want := n * c.chance; math.Abs(c.got-want) > 4*math.Sqrt(want) {
			t.Errorf("%s: %v of %v, want %v", c.name, c.got, n, want)
		}
	}
}

// Every place is drawn as often as any other, and powers of two too: chi-square
// of 9 and 7 degrees of freedom stay below their 0.9999 quantiles, 33.7 and 29.9.
func TestResampleIsFair(t *testing.T) {
	for n, most := range map[int]float64{10: 33.7, 8: 29.9} {
		s, drawn, counts := NewStream(), make([]float64, 1_000_000), make([]float64, n)
		s.Start(2, 9)
		places := make([]float64, n)
		for i := range places {
			places[i] = float64(i)
		}
		s.Resample(drawn, places)
		for _, x := range drawn {
			counts[int(x)]++
		}
		chi, each := 0.0, float64(len(drawn))/float64(n)
		for _, c := range counts {
			chi += (c - each) * (c - each) / each
		}
		if chi > most {
			t.Errorf("%d places: chi-square %v", n, chi)
		}
	}
}
