package funcs

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// Rosner 1983 by way of the e-Handbook, 1.3.5.17.3: R and λ of the first three,
// which it cuts after three decimals (values not compared with the print).
func TestGeneralisedESDOfRosnersData(t *testing.T) {
	out := answer(t, "outlier-check", outlierCheck.Example.arguments())
	if len(out.Rows) != 3 {
		t.Fatalf("%d rows", len(out.Rows))
	}
	for i, want := range [][4]float64{{54, 6.01, 3.118, 3.158}, {53, 5.42, 2.942, 3.151}, {52, 5.34, 3.179, 3.143}} {
		row := out.Rows[i].Values
		within(t, "position", float64(row["position"].(int)), want[0], 0)
		within(t, "value", row["value"].(float64), want[1], 0)
		within(t, "statistic", row["statistic"].(float64), want[2]+0.0005, 0.0005/want[2])
		within(t, "critical-value", row["critical-value"].(float64), want[3]+0.0005, 0.0005/want[3])
	}
	want := "At significance 5% 3 values are outliers: 6.01, 5.42 and 5.34 (n = 54; generalised ESD, up to 10 outliers). Check whether they are right before leaving them out."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}

func TestOutlierPositionsCountGaps(t *testing.T) {
	values := []float64{12, math.NaN(), 11, 13, 12, 60, 10, 14, 12, 11}
	out := answer(t, "outlier-check", map[string]any{"sample": From{Value: values, Origin: &Origin{Unit: "minutes"}}})
	within(t, "outliers", resultOf(t, out, "outliers"), 1, 0)
	within(t, "position", float64(out.Rows[0].Values["position"].(int)), 6, 0)
	if got, _ := out.Get("sentence"); got != "At significance 5% one value is an outlier: 60 minutes (n = 9; generalised ESD, up to 1 outlier). Check whether it is right before leaving it out." {
		t.Errorf("got %s", got)
	}
	none := answer(t, "outlier-check", map[string]any{"sample": counting(9)})
	within(t, "outliers", resultOf(t, none, "outliers"), 0, 0)
	if row := none.Rows[0].Values; row["position"] != 1 || row["statistic"].(float64) >= row["critical-value"].(float64) {
		t.Errorf("the farthest value: %v", row)
	}
}

// At most a fifth is looked for, and one below 15 values.
func TestOutliersLookedFor(t *testing.T) {
	for _, c := range []struct{ n, most, want int }{{14, 10, 1}, {15, 10, 3}, {20, 10, 4}, {60, 10, 10}, {60, 2, 2}} {
		values := counting(c.n)
		for i := range 12 { // far out, each much farther than the last
			if i < c.n/2 {
				values[i] = math.Pow(10, float64(3+i))
			}
		}
		out := answer(t, "outlier-check", map[string]any{"sample": values, "most-outliers": c.most})
		if got := resultOf(t, out, "outliers"); got > float64(c.want) {
			t.Errorf("n = %d: %v outliers of at most %d", c.n, got, c.want)
		}
		if m, _ := out.Get("method"); m != "generalised ESD, up to "+plural(c.want, "outlier") {
			t.Errorf("n = %d: %v", c.n, m)
		}
	}
	refusedFor(t, answer(t, "outlier-check", map[string]any{"sample": []float64{1, 2}}), "few-values")
	refusedFor(t, answer(t, "outlier-check", map[string]any{"sample": []float64{1, 1, 1}}), "no-spread")
	refuses(t, "outlier-check", map[string]any{"sample": counting(9), "most-outliers": 0}, "most-outliers is 0, but must be a whole number, from 1 to 1000")
}

// Values taken out of the sorted sample are those that a search through all of it
// finds, with the same statistics.
func TestPeelingFindsTheFarthestOfAll(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 4))
	for trial := range 60 {
		values := make([]float64, 40)
		for i := range values {
			values[i] = math.Round(10*rng.NormFloat64()) / 4
			if trial%3 == 0 && i < 15 {
				values[i] = math.Pow(-7, float64(i)) // each outlier hides the next
			}
		}
		rng.Shuffle(len(values), func(i, j int) { values[i], values[j] = values[j], values[i] })
		rest, peeled := slices.Clone(values), newPeeling(values, 19)
		for range 19 {
			m := summarise(withoutGaps(rest))
			at, far := -1, -1.0
			for i, x := range rest {
				if d := math.Abs(x - m.mean); d > far {
					at, far = i, d
				}
			}
			got := peeled.summary()
			within(t, "sd", got.sd, m.sd, 1e-13)
			position, distance := peeled.takeFarthest(got.mean)
			if math.Abs(distance-far) > 1e-13*far || position != at && math.Abs(math.Abs(values[position]-m.mean)-far) > 1e-12 {
				t.Fatalf("trial %d: position %d at %v, want %d at %v", trial, position, distance, at, far)
			}
			rest[position] = math.NaN()
		}
	}
}

func TestOutliersShiftAndScale(t *testing.T) {
	arguments := outlierCheck.Example.arguments()
	moved := slices.Clone(arguments["sample"].([]float64))
	for i := range moved {
		moved[i] = 1e6 - 8*moved[i]
	}
	a, b := answer(t, "outlier-check", arguments), answer(t, "outlier-check", map[string]any{"sample": moved})
	for i := range a.Rows {
		within(t, "statistic", b.Rows[i].Values["statistic"].(float64), a.Rows[i].Values["statistic"].(float64), 1e-9)
		within(t, "position", float64(b.Rows[i].Values["position"].(int)), float64(a.Rows[i].Values["position"].(int)), 0)
	}
}

// The tail of a power law is found: Hill's estimate by its formula, and the law
// itself within the limits.
func TestTailIndexByItsFormula(t *testing.T) {
	for _, c := range []struct {
		index          float64
		n              int
		mean, variance string
	}{{0.3, 2000, "no", "no"}, {1.4, 2000, "yes", "no"}, {1.5, 200, "unclear", "unclear"}, {6, 2000, "yes", "yes"}} {
		values := paretoQuantiles(c.n, c.index)
		out := answer(t, "tail-check", map[string]any{"sample": values})
		k := max(10, int(math.Sqrt(float64(c.n))))
		d := make([]float64, len(values)) // symmetric: the median is 0
		for i, x := range values {
			d[i] = math.Abs(x)
		}
		slices.Sort(d)
		sum := 0.0
		for i := 1; i <= k; i++ {
			sum += math.Log(d[c.n-i] / d[c.n-k-1])
		}
		want := float64(k) / sum
		within(t, "tail-index", resultOf(t, out, "tail-index"), want, 1e-12)
		law := dist.ChiSquare{DF: float64(2 * k)}
		within(t, "lower", resultOf(t, out, "lower"), want*law.Quantile(0.025)/float64(2*k), 1e-12)
		within(t, "upper", resultOf(t, out, "upper"), want*law.UpperQuantile(0.025)/float64(2*k), 1e-12)
		if !(resultOf(t, out, "lower") < c.index && c.index < resultOf(t, out, "upper")) {
			t.Errorf("index %v is not within the limits", c.index)
		}
		for name, want := range map[string]string{"finite-mean": c.mean, "finite-variance": c.variance} {
			if got, _ := out.Get(name); got != want {
				t.Errorf("index %v, n = %d: %s %v, want %s", c.index, c.n, name, got, want)
			}
		}
	}
	refusedFor(t, answer(t, "tail-check", map[string]any{"sample": counting(99)}), "few-values")
	refusedFor(t, answer(t, "tail-check", map[string]any{"sample": append(slices.Repeat([]float64{5}, 195), counting(5)...)}), "no-spread")
}

// Under the null law of each check its p-value is uniform: 2,000 normal samples,
// 4 standard errors.
func TestChecksRejectAsOftenAsTheySay(t *testing.T) {
	const samples = 2000
	for _, n := range []int{8, 11, 12, 30, 100} {
		rng := rand.New(rand.NewPCG(30, uint64(n)))
		rejected := map[string]int{}
		for range samples {
			values := noise(rng, n, 5, 2)
			normal := answer(t, "normality-check", map[string]any{"sample": values})
			for _, p := range []string{"shapiro-wilk-p-value", "anderson-darling-p-value"} {
				if resultOf(t, normal, p) <= 0.05 {
					rejected[p]++
				}
			}
			if resultOf(t, answer(t, "outlier-check", map[string]any{"sample": values, "most-outliers": 1}), "outliers") > 0 {
				rejected["outlier"]++
			}
			if resultOf(t, answer(t, "independence-check", map[string]any{"sample": values}), "p-value") <= 0.05 {
				rejected["runs"]++
			}
		}
		for what, count := range rejected {
			share := float64(count) / samples
			bound := 4 * math.Sqrt(0.05*0.95/samples)
			low := 0.05 - bound
			switch what {
			case "runs": // discrete: at most the level
				low = 0
			case "outlier": // Grubbs' bound is all but exact
				low -= 0.003
			}
			t.Logf("n = %d, %s: %.4f", n, what, share)
			if share < low || share > 0.05+bound {
				t.Errorf("n = %d, %s: rejects %v of normal samples at 0.05", n, what, share)
			}
		}
	}
}

// A spread that no double holds tells nothing of outliers, and is not looked at again
// for each of them.
func TestOutliersOfUnholdableSpreadAreRefused(t *testing.T) {
	values := counting(1000)
	for i := range values {
		values[i] *= 1e300
	}
	refusedFor(t, answer(t, "outlier-check", map[string]any{"sample": values, "most-outliers": 200}), "too-large-to-hold")
}
