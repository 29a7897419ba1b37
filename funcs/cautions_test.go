package funcs

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

func TestEachCautionIsReached(t *testing.T) {
	steady := counting(30)
	for i := range steady {
		steady[i] = float64(i*7%30) / 10 // neighbours unlike, no far value
	}
	skewed := make([]float64, 25)
	for i := range skewed {
		skewed[i] = math.Pow(float64(i*7%25)+1, 3)
	}
	far := append([]float64{}, steady...)
	far[4] = 12
	for _, c := range []struct {
		code, message string
		values        []float64
	}{
		{"few-values", "The sample has only 4 values: the interval rests wholly on the values being normal. Measure at least 5.", []float64{1, 2, 4, 3}},
		{"skewed-for-n", "The sample is skewed (skewness 1.", skewed},
		{"neighbours-alike", "Neighbouring values of the sample are not independent (lag-1 autocorrelation 0.9), so the interval is too narrow.", counting(30)},
		{"far-value", "Value 5 of the sample, 12, lies ", far},
		{"heavy-tail", "The sample has tails so heavy (tail index ", paretoQuantiles(1000, 0.8)},
	} {
		out := answer(t, "mean-interval", map[string]any{"sample": c.values})
		if out.Status != StatusCaution || !raises(out, c.code) || !strings.Contains(Note(out.Findings), c.message) {
			t.Errorf("%s: %s, %s", c.code, out.Status, Note(out.Findings))
		}
		checkDeclared(t, out.Function, out)
		if quiet := answer(t, "mean-interval", map[string]any{"sample": c.values, "checks": false}); quiet.Status != StatusOK {
			t.Errorf("%s with checks off: %s", c.code, Note(quiet.Findings))
		}
	}
	if out := answer(t, "mean-interval", map[string]any{"sample": steady}); out.Status != StatusOK {
		t.Errorf("steady values: %s", Note(out.Findings))
	}
	unordered := From{Value: counting(30), Origin: &Origin{Unordered: true}}
	if out := answer(t, "mean-interval", map[string]any{"sample": unordered}); raises(out, "neighbours-alike") {
		t.Error("values in no order have no neighbours")
	}
	few := answer(t, "mean-interval", map[string]any{"mean": 3.0, "sd": 1.0, "n": 4})
	if !raises(few, "few-values") || few.Findings[0].Input != "n" {
		t.Errorf("a summary of 4: %v", few.Findings)
	}
	pooledSD := answer(t, "difference-interval", map[string]any{"sample": []float64{1, 2, 3, 4, 5}, "second-sample": []float64{1, 11, 21, 31, 41}, "variances": pooled})
	if !raises(pooledSD, "spreads-unlike") {
		t.Errorf("%v", pooledSD.Findings)
	}
	whole := answer(t, "mean-interval", map[string]any{"sample": skewed, "population-size": 25})
	if whole.Status != StatusOK {
		t.Errorf("a whole population: %s", Note(whole.Findings))
	}
}

// How often each caution comes for samples of known laws. Below 5% for normal
// ones, but for skewed-for-n at its smallest n; often where it should. The tail
// index of t(2) is 2 itself, so that heavy-tail seldom comes for it.
func TestHowOftenCautionsCome(t *testing.T) {
	const samples = 400
	normal := func(r *rand.Rand) float64 { return r.NormFloat64() }
	laws := []struct {
		name string
		draw func(r *rand.Rand, x []float64)
	}{
		{"normal", oneByOne(normal)},
		{"exponential", oneByOne(func(r *rand.Rand) float64 { return r.ExpFloat64() })},
		{"lognormal(1)", oneByOne(func(r *rand.Rand) float64 { return math.Exp(r.NormFloat64()) })},
		{"t(2)", oneByOne(func(r *rand.Rand) float64 { return r.NormFloat64() / math.Sqrt(r.ExpFloat64()) })},
		{"Cauchy", oneByOne(func(r *rand.Rand) float64 { return r.NormFloat64() / r.NormFloat64() })},
		{"lag-1 dependence 0.5", func(r *rand.Rand, x []float64) {
			last := r.NormFloat64() / math.Sqrt(0.75)
			for i := range x {
				last = 0.5*last + r.NormFloat64()
				x[i] = last
			}
		}},
	}
	codes := []string{"few-values", "skewed-for-n", "neighbours-alike", "far-value", "heavy-tail"}
	share := map[string]float64{}
	table := fmt.Sprintf("%-22s %5s", "law", "n")
	for _, code := range codes {
		table += fmt.Sprintf(" %16s", code)
	}
	for k, law := range laws {
		for _, n := range []int{4, 10, 20, 30, 100, 1000} {
			rng := rand.New(rand.NewPCG(32, uint64(1000*k+n)))
			table += fmt.Sprintf("\n%-22s %5d", law.name, n)
			count := map[string]int{}
			for range samples {
				x := make([]float64, n)
				law.draw(rng, x)
				for _, f := range answer(t, "mean-interval", map[string]any{"sample": x}).Findings {
					count[f.Code]++
				}
			}
			for _, code := range codes {
				p := float64(count[code]) / samples
				share[fmt.Sprint(law.name, n, code)] = p
				table += fmt.Sprintf(" %15.1f%%", 100*p)
			}
		}
	}
	t.Log("\n" + table)
	for _, n := range []int{10, 20, 30, 100, 1000} {
		for _, code := range codes {
			most := 0.05
			if code == "skewed-for-n" && n == 20 {
				most = 0.12 // G1 of 20 normal values has an sd of 0.51, and 0.89 is the rule's bound
			}
			if p := share[fmt.Sprint("normal", n, code)]; p > most {
				t.Errorf("normal, n = %d: %s for %v of samples", n, code, p)
			}
		}
	}
	for where, least := range map[string]float64{
		"normal4few-values": 1, "exponential30skewed-for-n": 0.6, "lognormal(1)100skewed-for-n": 0.6, "Cauchy1000heavy-tail": 0.95,
		"Cauchy30far-value": 0.8, "lag-1 dependence 0.5100neighbours-alike": 0.9, "lag-1 dependence 0.51000neighbours-alike": 1,
	} {
		if share[where] < least {
			t.Errorf("%s: %v of samples, want %v", where, share[where], least)
		}
	}

	// Variances 1 to 9: spreads-unlike, with pooled variances only.
	spreads := "\nsds      n   spreads-unlike"
	for _, ratio := range []float64{1, 3} {
		for _, n := range []int{10, 30, 100} {
			rng := rand.New(rand.NewPCG(33, uint64(n)))
			count := 0
			for range samples {
				out := answer(t, "difference-interval", map[string]any{"sample": noise(rng, n, 0, 1), "second-sample": noise(rng, n, 0, ratio), "variances": pooled})
				if raises(out, "spreads-unlike") {
					count++
				}
			}
			p := float64(count) / samples
			spreads += fmt.Sprintf("\n1 to %.0f %4d %15.1f%%", ratio, n, 100*p)
			if ratio == 1 && p > 0.07 || ratio == 3 && n >= 30 && p < 0.9 {
				t.Errorf("sds 1 to %v, n = %d: %v of samples", ratio, n, p)
			}
		}
	}
	t.Log(spreads)
}

// oneByOne draws every value alone.
func oneByOne(value func(r *rand.Rand) float64) func(r *rand.Rand, x []float64) {
	return func(r *rand.Rand, x []float64) {
		for i := range x {
			x[i] = value(r)
		}
	}
}
