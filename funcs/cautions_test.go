package funcs

import (
	"math"
	"strings"
	"testing"

	"halfwidth/funcs/internal/num"
)

func TestEachCautionIsReached(t *testing.T) {
	steady := counting(30)
	for i := range steady {
		steady[i] = float64(i*7%30) / 10 // neighbours unlike, no far value
	}
	skewed := make([]float64, 25)
	for i := range skewed {
		skewed[i] = math.Pow(float64(i*7%25)+1, 4)
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

// Percentage points of the skewness √b₁ of normal samples (Pearson & Hartley 1966,
// Biometrika Tables for Statisticians 1, Table 34B: upper 5% and 1%, 3 decimals).
func TestSkewnessScoreGivesThePrintedPoints(t *testing.T) {
	for _, c := range []struct{ n, five, one float64 }{{25, 0.711, 1.061}, {50, 0.533, 0.787}, {100, 0.389, 0.567}, {200, 0.280, 0.403}} {
		g1 := math.Sqrt(c.n*(c.n-1)) / (c.n - 2) // G1 over √b₁
		for point, z := range map[float64]float64{c.five: 1.6449, c.one: 2.3263} {
			if got := skewnessScore(g1*point, c.n); math.Abs(got-z) > 0.02 {
				t.Errorf("n = %v, √b₁ = %v: score %v, want %v", c.n, point, got, z)
			}
			if got := skewnessScore(-g1*point, c.n); got != -skewnessScore(g1*point, c.n) {
				t.Errorf("n = %v: the score of -%v is %v", c.n, point, got)
			}
		}
	}
	if skewedForN(3, 7, rare) || !skewedForN(2, 20, rare) || skewedForN(2, 101, rare) || skewedForN(0.95, 20, rare) {
		t.Error("the rule for skewness")
	}
}

// Mean and variance of the lag-1 autocorrelation over all 720 orders of six values
// are those of Moran 1948 for values in random order and a normal fourth moment;
// the mean, -1/n, is exact for any values.
func TestMeanAutocorrelationOfAllOrders(t *testing.T) {
	values, sum, count := []float64{-2, -1, -0.4, 0.4, 1, 2}, 0.0, 0
	var permute func(k int)
	permute = func(k int) {
		if k == 1 {
			sum, count = sum+num.Lag1(values), count+1
			return
		}
		for i := range k {
			permute(k - 1)
			j := 0
			if k%2 == 0 {
				j = i
			}
			values[j], values[k-1] = values[k-1], values[j]
		}
	}
	permute(6)
	within(t, "orders", float64(count), 720, 0)
	within(t, "mean of r", sum/float64(count), -1.0/6, 1e-12)
	if neighboursAlike(0.9, 9, rare) || !neighboursAlike(0.6, 20, rare) || neighboursAlike(-0.5, 20, rare) || !neighboursAlike(-0.65, 20, rare) {
		t.Error("the rule for neighbours")
	}
}

// Sds of 5 values must differ by more than those of 30; planned ones by twice.
func TestSpreadsUnlike(t *testing.T) {
	for _, c := range []struct {
		groups []spreadOf
		want   bool
	}{
		{[]spreadOf{{1, 5}, {3, 5}}, false},           // F = 9 of 4 and 4 df, where 0.005 lies beyond 23.15
		{[]spreadOf{{1, 5}, {4.9, 5}}, true},          // 24.01
		{[]spreadOf{{2.1, 30}, {1, 30}}, true},        // F = 4.41, where 0.005 lies beyond 2.67
		{[]spreadOf{{1.9, 3000}, {1, 30}}, false},     // less than twice
		{[]spreadOf{{1, 5}, {4.9, 5}, {2, 5}}, false}, // six ordered pairs: 0.01/6 lies beyond 41
		{[]spreadOf{{1, 5}, {7, 5}, {2, 40}}, true},
		{[]spreadOf{{0, 2}, {1, 2}}, true},
		{[]spreadOf{{sd: 1}, {sd: 2.1}}, true},
		{[]spreadOf{{sd: 1}, {sd: 2}}, false},
	} {
		if got := spreadsUnlike(c.groups); got != c.want {
			t.Errorf("%v: %v", c.groups, got)
		}
	}
}

// A value as far out as one sample of 30 in 200 to 1000 has it: it
// is a caution beside one more sample, and none among ten.
func TestSignificanceIsSharedAmongSamples(t *testing.T) {
	far := make([]float64, 30)
	for i := range far {
		far[i] = float64(i*7%30) / 10
	}
	far[4] = 5.3
	s := summarise(far)
	reach := (5.3 - s.mean) / s.sd
	if reach < esdCritical(30, rare/2) || reach > esdCritical(30, rare/10) {
		t.Fatalf("the far value lies %v standard deviations out", reach)
	}
	for _, count := range []int{2, 10} {
		groups := []Group{{"0", far}}
		for i := 1; i < count; i++ {
			groups = append(groups, Group{string(rune('0' + i)), far[5:]})
		}
		out := answer(t, "analysis-of-variance", map[string]any{"samples": groups})
		if raises(out, "far-value") != (count == 2) {
			t.Errorf("%d groups: %s", count, Note(out.Findings))
		}
	}
}
