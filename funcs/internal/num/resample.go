package num

import "math/rand/v2"

// Stream is the source of random numbers of one resample. Resample i of a seed
// has a stream of its own, so that the digits do not depend on how the
// resamples are shared among workers.
type Stream struct {
	pcg rand.PCG
	*rand.Rand
}

// NewStream gives a stream; Start sets it to a resample.
func NewStream() *Stream {
	s := &Stream{}
	s.Rand = rand.New(&s.pcg)
	return s
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

// Resample fills dst with values drawn from src with replacement.
func (s *Stream) Resample(dst, src []float64) {
	n := uint64(len(src))
	for i := range dst {
		dst[i] = src[s.Uint64N(n)]
	}
}
