package funcs

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// planning is a call that only carries a context.
func planning() *Call { return &Call{ctx: context.Background()} }

// literally finds the smallest n from which every n' up to 2n holds, and the
// first n that holds, by looking at all of them.
func literally(holds func(n int) bool, limit int) (n, first int) {
	known := map[int]bool{}
	ask := func(n int) bool {
		v, ok := known[n]
		if !ok {
			v = holds(n)
			known[n] = v
		}
		return v
	}
	for n = 2; n < limit; n++ {
		if first == 0 && ask(n) {
			first = n
		}
		all := true
		for m := 2 * n; all && m >= n; m-- {
			all = ask(m)
		}
		if all {
			return n, first
		}
	}
	return 0, first
}

// The definition in the catalogue, applied word for word, is the check: the
// bounds of planShares must leave out no n that matters.
func TestPlansOfProportionsAreTheSmallestByTheDefinition(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 1))
	compared := 0
	for range 1000 {
		reference := 0.002 + 0.996*random.Float64()
		share := reference + 0.6*(random.Float64()-0.5)
		dir, significance, wanted := design(random, share-reference)
		if share >= 0 && share <= 1 && math.Abs(share-reference) > 0.07 {
			compared += compare(t, shareTest{share, reference, significance, dir}, wanted, 500)
		}
	}
	if compared < 300 {
		t.Errorf("only %d designs compared", compared)
	}
}

func TestPlansOfTwoProportionsAreTheSmallestByTheDefinition(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 2))
	compared := 0
	for range 400 {
		first, second := random.Float64(), random.Float64()
		dir, significance, wanted := design(random, first-second)
		ratio := []float64{1, 1, 2, 0.5, 1.3, 0.7, 0.21, 3.5}[random.IntN(8)]
		if math.Abs(first-second) > 0.2 {
			compared += compare(t, sharesPairTest{first: first, second: second, significance: significance, direction: dir, ratio: ratio}, wanted, 250)
		}
	}
	if compared < 100 {
		t.Errorf("only %d designs compared", compared)
	}
}

// design draws a direction that fits the difference, a significance and a power.
func design(random *rand.Rand, difference float64) (dir string, significance, wanted float64) {
	dir = either
	if random.IntN(2) == 0 {
		dir = above
		if difference < 0 {
			dir = below
		}
	}
	significance = []float64{0.001, 0.01, 0.05, 0.1, 0.3}[random.IntN(5)]
	return dir, significance, significance + (1-significance)*(0.05+0.94*random.Float64())
}

// compare is 1 where the design has a plan below limit, else 0.
func compare(t *testing.T, test sharesTest, wanted float64, limit int) int {
	t.Helper()
	n, first := literally(func(n int) bool { return reaches(test.power(n, 0), wanted) }, limit)
	if n == 0 {
		return 0
	}
	for _, guess := range []float64{0.3, 0.9, 2} {
		plan, err := planning().planShares(test, wanted, float64(n)*guess)
		if err != nil || !plan.found || plan.n != n || plan.first != first {
			t.Errorf("%+v, power %.4f: plan %+v (%v), want n %d, first %d", test, wanted, plan, err, n, first)
		}
	}
	return 1
}

// dear makes a power so dear that the runs of n are used.
type dear struct {
	sharesTest
	powers float64 // how many are affordable
}

func (d dear) cost(int) float64 { return affordable / d.powers }

func TestPlansOfRareCountsAreTheSmallestByTheDefinition(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 3))
	compared := 0
	for range 60 {
		reference := 0.003 + 0.01*random.Float64()
		share := reference * math.Exp(2.5*(random.Float64()-0.3))
		if random.IntN(2) == 0 {
			reference, share = 1-reference, 1-share
		}
		dir, significance, wanted := design(random, share-reference)
		if math.Abs(share/reference-1) > 0.5 || math.Abs((1-share)/(1-reference)-1) > 0.5 {
			compared += compare(t, dear{shareTest{share, reference, significance, dir}, 300}, wanted, 4000)
		}
	}
	for range 14 {
		first := 0.0001 + 0.0001*random.Float64()
		second := first * math.Exp(1.7+0.5*random.Float64())
		if random.IntN(2) == 0 {
			first, second = 1-first, 1-second
		}
		dir, significance, wanted := design(random, first-second)
		ratio := []float64{1, 1, 2, 0.5}[random.IntN(4)]
		test := sharesPairTest{first: first, second: second, significance: significance, direction: dir, ratio: ratio}
		compared += compare(t, dear{test, 1000}, wanted, 12000)
	}
	if compared < 30 {
		t.Errorf("only %d designs compared", compared)
	}
}

// The power is the probability of the counts whose p-value, as the intervals of
// proportions give it, is no more than the significance: all counts tried.
func TestPowersOfProportionsGoByThePValues(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 4))
	for range 60 {
		n, m := 2+random.IntN(40), 2+random.IntN(40)
		first, second := random.Float64(), 0.01+0.98*random.Float64()
		dir, significance, _ := design(random, first-second)
		rejects := func(p float64) bool { return staysIn(p, significance) }
		var one, two float64
		for x := 0; x <= n; x++ {
			mass := dist.Binomial{N: n, P: first}.PMF(x)
			if rejects(binomialPValue(float64(x), float64(n), second, 1-second, dir)) {
				one += mass
			}
			for y := 0; y <= m; y++ {
				z := pooledScoreZ(float64(x), float64(n), float64(y), float64(m))
				if rejects(scoreP(float64(x+y), float64(n+m), z, dir)) {
					two += mass * dist.Binomial{N: m, P: second}.PMF(y)
				}
			}
		}
		within(t, "one proportion", shareTest{first, second, significance, dir}.power(n, 0), one, 1e-12)
		within(t, "two proportions", sharesPairTest{first: first, second: second, significance: significance, direction: dir, secondN: m}.power(n, 0), two, 1e-12)
	}
}
