package num

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// exact computes the sums of powers of the deviations at 400 bits.
func exact(xs []float64) (mean float64, powers [5]float64) {
	at := func(x float64) *big.Float { return new(big.Float).SetPrec(400).SetFloat64(x) }
	total := at(0)
	for _, x := range xs {
		total.Add(total, at(x))
	}
	m := total.Quo(total, at(float64(len(xs))))
	var sums [5]*big.Float
	for k := range sums {
		sums[k] = at(0)
	}
	for _, x := range xs {
		d := new(big.Float).Sub(at(x), m)
		p := at(1)
		for k := range sums {
			sums[k].Add(sums[k], p)
			p = new(big.Float).Mul(p, d)
		}
	}
	for k := range sums {
		powers[k], _ = sums[k].Float64()
	}
	mean, _ = m.Float64()
	return mean, powers
}

// The wanted values are sums of the same doubles at 400 bits.
func TestMomentsKeepTheirDigitsAtAnyOffset(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, offset := range []float64{0, 1, -1e3, 1e9, 1e15, -1e15} {
		for _, n := range []int{2, 3, 10, 1000} {
			xs := make([]float64, n)
			for i := range xs {
				xs[i] = offset + rng.ExpFloat64()*8
			}
			m := Moments(xs)
			mean, want := exact(xs)
			var size3 float64
			for _, x := range xs {
				size3 += math.Abs(math.Pow(x-mean, 3))
			}
			if math.Abs(m.Mean/mean-1) > 2e-16 || math.Abs(m.SumSquares/want[2]-1) > 1e-15 ||
				math.Abs(m.Sum3-want[3]) > 1e-15*size3 || math.Abs(m.Sum4/want[4]-1) > 1e-15 {
				t.Errorf("offset %g, n = %d: %+v, want %v %v", offset, n, m, mean, want)
			}
		}
	}
}

func TestSumsOfCancellingTerms(t *testing.T) {
	if got := Sum([]float64{1, 1e100, 1, -1e100}); got != 2 {
		t.Errorf("Sum = %v, want 2", got)
	}
	if got := SumProducts([]float64{1e8 + 1, 1e8}, []float64{1e8 - 1, -1e8}); got != -1 {
		t.Errorf("SumProducts = %v, want -1", got) // (1e8+1)(1e8-1) - 1e16
	}
}

func TestLag1FormsNoPairAcrossAGap(t *testing.T) {
	gap := math.NaN()
	// Deviations -1, 1, -1, 1: with the gap only the pairs (-1, 1) twice remain.
	if got := Lag1([]float64{1, 3, gap, 1, 3}); got != -0.5 {
		t.Errorf("got %v, want -0.5", got)
	}
	if got := Lag1([]float64{1, 3, 1, 3}); got != -0.75 {
		t.Errorf("got %v, want -0.75", got)
	}
	if got := Lag1([]float64{2, 2}); !math.IsNaN(got) {
		t.Errorf("without spread: got %v, want NaN", got)
	}
}

func BenchmarkMoments(b *testing.B) {
	xs := make([]float64, 1_000_000)
	for i := range xs {
		xs[i] = float64(i%977) + 0.1
	}
	for b.Loop() {
		Moments(xs)
	}
}

func TestSumsNearTheEndOfTheDoubles(t *testing.T) {
	big := []float64{1.5e308, 1.7e308, 0.1e308, -1.6e308}
	if got := Sum(big); math.Abs(got/1.7e308-1) > 1e-15 {
		t.Errorf("sum %v, want 1.7e308", got)
	}
	if got := Mean([]float64{1.7e308, 1.7e308, 1.7e308}); got != 1.7e308 {
		t.Errorf("mean %v, want 1.7e308", got)
	}
	if got := Sum([]float64{1.7e308, 1.7e308}); !math.IsInf(got, 1) {
		t.Errorf("sum %v, want +Inf", got)
	}
	// Deviations of 1e154 have squares of 1e308 and fourth powers past the range.
	if m := Moments([]float64{1e300, 1e300 + 1e285}); math.Abs(m.Mean/1e300-1) > 1e-14 || !math.IsInf(m.SumSquares, 1) {
		t.Errorf("moments of huge values: %+v", m)
	}
	if m := Moments([]float64{-3e153, 3e153}); m.Mean != 0 || math.Abs(m.SumSquares/1.8e307-1) > 1e-15 || !math.IsInf(m.Sum4, 1) {
		t.Errorf("moments of large values: %+v", m)
	}
	if got := Mean(nil); !math.IsNaN(got) {
		t.Errorf("mean of nothing %v", got)
	}
}
