package funcs

import (
	"math"
	"slices"
	"testing"
)

func stratumSizes(out *Outcome) []float64 {
	var n []float64
	for _, row := range out.Rows {
		n = append(n, float64(row.Values["n"].(int)))
	}
	return n
}

var depots = map[string]any{
	"sizes": List{Names: []string{"North", "Quay", "Mill", "Fell"}, Values: []float64{400, 90, 3, 1}},
	"sds":   List{Names: []string{"Fell", "Mill", "Quay", "North"}, Values: []float64{0, 50, 6, 2}},
}

// The half-width of a plan is that of stratified-interval for a sample of these
// sizes, and one value less in any stratum that got more than its least no
// longer suffices when the plan asked for just what it attains.
func TestAStratifiedPlanAttainsTheHalfWidthOfTheInterval(t *testing.T) {
	for _, wanted := range []float64{2, 1, 0.5, 0.25, 0.1} {
		plan := answered(t, "stratified-size", with(depots, "half-width", wanted))
		n := stratumSizes(plan)
		interval := answered(t, "stratified-interval", map[string]any{"sizes": []float64{400, 90, 3, 1}, "sds": []float64{2, 6, 50, 0}, "means": []float64{5, 6, 7, 8}, "ns": n})
		half := (interval.float(t, "upper") - interval.float(t, "lower")) / 2
		within(t, "attained-half-width", plan.float(t, "attained-half-width"), half, 1e-12)
		if half > wanted || float64(plan.whole(t, "total-n")) != n[0]+n[1]+n[2]+n[3] || plan.float(t, "cost") != float64(plan.whole(t, "total-n")) {
			t.Errorf("half-width %v: %v attains %v", wanted, n, half)
		}
		if n[3] != 1 || n[2] < 2 || n[2] > 3 {
			t.Errorf("half-width %v: %v, want all of Fell and 2 or 3 of Mill", wanted, n)
		}
	}
}

// Neyman 1934: without costs nₕ is in proportion to Nₕsₕ; Cochran 1977, ch. 5: a
// cost enters by its square root. Counted by hand: 100·2/√1, 50·4/√4, 200·1/√1.
func TestAllocationIsOptimal(t *testing.T) {
	arguments := map[string]any{"sizes": []float64{100, 50, 200}, "sds": []float64{2, 4, 1}, "costs": []float64{1, 4, 1}}
	for _, c := range []struct {
		budget float64
		want   []float64
	}{
		{80, []float64{20, 10, 20}}, // 2 : 1 : 2 costs 20 + 40 + 20
		{83, []float64{21, 10, 21}}, // quotas 20.75, 10.375, 20.75: 80 spent, two leftovers fit
		{82, []float64{21, 10, 21}}, // quotas 20.5, 10.25, 20.5
		{81, []float64{21, 10, 20}}, // equal leftovers: the first stratum before the third
		{12, []float64{2, 2, 2}},
		{500, []float64{100, 50, 200}}, // all there are
	} {
		n := stratumSizes(answered(t, "stratified-size", with(arguments, "budget", c.budget)))
		if !slices.Equal(n, c.want) {
			t.Errorf("budget %v: %v, want %v", c.budget, n, c.want)
		}
	}
	// What the first stratum cannot take goes to the others in proportion: 900·1,
	// 900·1 and 10·900 with 46 to spend are 18, 18 and all 10.
	capped := answered(t, "stratified-size", map[string]any{"sizes": []float64{900, 900, 10}, "sds": []float64{1, 1, 900}, "budget": 46.0})
	if n := stratumSizes(capped); !slices.Equal(n, []float64{18, 18, 10}) {
		t.Errorf("capped: %v, want 18, 18 and 10", n)
	}
}

// No other sizes of the same cost have a smaller standard error (the theorem
// itself, tried out around the plan).
func TestNoNeighbouringAllocationIsBetter(t *testing.T) {
	s := strata{sizes: []float64{1000, 500, 2000}, sds: []float64{2, 4, 1}, costs: []float64{1, 1, 1}, weights: []float64{1, 1, 1}, outside: 0.025, cancelled: t.Context().Err}
	variance := func(n []float64) float64 {
		var sum float64
		for h := range n {
			sum += s.sizes[h] * s.sizes[h] * s.sds[h] * s.sds[h] / n[h] * (1 - n[h]/s.sizes[h])
		}
		return sum
	}
	plan, _, _ := s.forBudget(300)
	for from := range plan {
		for to := range plan {
			other := slices.Clone(plan)
			other[from]--
			other[to]++
			if variance(other) < variance(plan)*(1-1e-12) {
				t.Errorf("%v is better than %v", other, plan)
			}
		}
	}
}

func TestAStratifiedPlanGrowsByDesignEffectAndLossesWithinEachStratum(t *testing.T) {
	plan := answered(t, "stratified-size", with(with(with(depots, "half-width", 0.5), "design-effect", 2.0), "non-response", 0.2))
	total := 0
	for h, row := range plan.Rows {
		want := math.Min([]float64{400, 90, 3, 1}[h], math.Ceil(float64(row.Values["n"].(int))*2.5))
		if row.Values["n-planned"] != int(want) {
			t.Errorf("%v: planned %v, want %v", row.Values["stratum"], row.Values["n-planned"], want)
		}
		total += int(want)
	}
	if plan.whole(t, "n-planned") != total {
		t.Errorf("planned %d in all, want %d", plan.whole(t, "n-planned"), total)
	}
}
