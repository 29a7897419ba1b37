package num

import (
	"math"
	"sync"
)

// Uniform is a number strictly between 0 and 1, an odd multiple of 2^-54.
func (s *Stream) Uniform() float64 { return (float64(s.pcg.Uint64()>>11) + 0.5) * 0x1p-53 }

// ziggurat covers a falling density f on x >= 0, f(0) = 1, by layers of equal
// area: layer i from 1 lies between the heights f(edge[i]) and f(edge[i+1]) and
// reaches to edge[i]; layer 0 is the box below f(edge[1]) with the tail beyond,
// edge[0] wide if it were all a box (Marsaglia & Tsang 2000, The ziggurat method
// for generating random variables). Layer and place in it come from separate
// bits, as Doornik 2005 (An improved ziggurat method to generate normal random
// samples) asks.
type ziggurat struct {
	edge, height [layers + 1]float64
}

const layers = 256

// layersOf builds the layers from the edge of the tail and the area of each;
// inverse gives x for a height.
func layersOf(tail, area float64, density, inverse func(float64) float64) *ziggurat {
	z := &ziggurat{}
	z.edge[0], z.edge[1] = area/density(tail), tail
	for i := 2; i < layers; i++ {
		z.edge[i] = inverse(area/z.edge[i-1] + density(z.edge[i-1]))
	}
	for i, x := range z.edge {
		z.height[i] = density(x)
	}
	return z
}

// The tail's edge and the area of a layer are those of Marsaglia & Tsang 2000 for
// 256 layers; that they close at height 1 is tested.
var (
	normalLayers = sync.OnceValue(func() *ziggurat {
		return layersOf(3.6541528853610088, 0.00492867323399, bell, func(y float64) float64 { return math.Sqrt(-2 * Log(y)) })
	})
	exponentialLayers = sync.OnceValue(func() *ziggurat {
		return layersOf(7.69711747013104972, 0.0039496598225815571993, decay, func(y float64) float64 { return -Log(y) })
	})
)

func bell(x float64) float64  { return Exp(-float64(x*x) / 2) }
func decay(x float64) float64 { return Exp(-x) }

// Normal is a normal value of mean 0 and sd 1.
func (s *Stream) Normal() float64 {
	for {
		word := s.pcg.Uint64()
		i := word % layers
		u := float64(int64(word)>>11)*0x1p-52 + 0x1p-53 // strictly between -1 and 1
		x := u * s.normal.edge[i]
		if math.Abs(x) < s.normal.edge[i+1] {
			return x
		}
		if i == 0 {
			return math.Copysign(s.normalTail(), u)
		}
		low, high := s.normal.height[i], s.normal.height[i+1]
		if low+float64(s.Uniform()*(high-low)) < bell(x) {
			return x
		}
	}
}

// normalTail is a normal value, given that it lies beyond the edge of the tail
// (Marsaglia 1964, Generating a variable from the tail of the normal distribution).
func (s *Stream) normalTail() float64 {
	edge := s.normal.edge[1]
	for {
		x, y := s.Exponential()/edge, s.Exponential()
		if y+y >= x*x {
			return edge + x
		}
	}
}

// Exponential is an exponential value of mean 1.
func (s *Stream) Exponential() float64 {
	beyond := 0.0 // what lies behind: beyond the edge of the tail the law begins anew
	for {
		word := s.pcg.Uint64()
		i := word % layers
		x := (float64(word>>11) + 0.5) * 0x1p-53 * s.exponential.edge[i]
		if x < s.exponential.edge[i+1] {
			return beyond + x
		}
		if i == 0 {
			beyond += s.exponential.edge[1]
			continue
		}
		low, high := s.exponential.height[i], s.exponential.height[i+1]
		if low+float64(s.Uniform()*(high-low)) < decay(x) {
			return beyond + x
		}
	}
}

// Gamma is a gamma value of the given shape over its shape, so of mean 1
// (Marsaglia & Tsang 2000, A simple method for generating gamma variables).
func (s *Stream) Gamma(shape float64) float64 {
	if shape < 1 {
		return s.Gamma(shape+1) * (1 + 1/shape) * Exp(-s.Exponential()/shape)
	}
	d := shape - 1.0/3
	c := 1 / math.Sqrt(9*d)
	for {
		x := s.Normal()
		root := 1 + float64(c*x)
		if root <= 0 {
			continue
		}
		v, square := float64(root*root)*root, float64(x*x)
		u := s.Uniform()
		if u < 1-0.0331*float64(square*square) || Log(u) < square/2+float64(d*(1-v+Log(v))) {
			return float64(d/shape) * v
		}
	}
}
