package num

import (
	"math/bits"
	"math/rand/v2"
)

// Stream is the source of random numbers of one resample. Resample i of a seed
// has a stream of its own, so that the digits do not depend on how the
// resamples are shared among workers.
type Stream struct {
	pcg                 rand.PCG
	normal, exponential *ziggurat
}

// NewStream gives a stream; Start sets it to a resample.
func NewStream() *Stream {
	return &Stream{normal: normalLayers(), exponential: exponentialLayers()}
}

// Start sets the stream to the beginning of resample i of the seed. The seed
// and the number enter mixed (SplitMix64), so that near ones have unlike streams.
func (s *Stream) Start(seed, i uint64) {
	s.pcg.Seed(mix(seed), mix(i^0x9E3779B97F4A7C15))
}

// mix is the output function of SplitMix64 (Steele, Lea & Flood 2014).
func mix(z uint64) uint64 {
	z += 0x9E3779B97F4A7C15
	z = (z ^ z>>30) * 0xBF58476D1CE4E5B9
	z = (z ^ z>>27) * 0x94D049BB133111EB
	return z ^ z>>31
}

// below is a whole number from 0 to n-1, each as likely: the upper half of a
// product, without the few numbers that would favour some (Lemire 2019, Fast
// random integer generation in an interval); a mask for powers of two.
func (s *Stream) below(n uint64) uint64 {
	if n&(n-1) == 0 {
		return s.pcg.Uint64() & (n - 1)
	}
	at, rest := bits.Mul64(s.pcg.Uint64(), n)
	if rest < n {
		for least := -n % n; rest < least; {
			at, rest = bits.Mul64(s.pcg.Uint64(), n)
		}
	}
	return at
}

// Resample fills dst with values drawn from src with replacement.
func (s *Stream) Resample(dst, src []float64) {
	n := uint64(len(src))
	for i := range dst {
		dst[i] = src[s.below(n)]
	}
}
