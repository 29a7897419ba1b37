package funcs

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

// strata is the plan of a stratified sample. Every allocation is given by one
// multiplier k: stratum h gets k·Nₕ·sₕ/√costₕ, at least 2 and at most all it has
// (Neyman 1934; Cochran 1977, ch. 5), so what one stratum cannot take goes to the
// others in proportion.
type strata struct {
	names             []string
	sizes, sds, costs []float64
	weights           []float64
	outside           float64
	cancelled         func() error
}

func (c *Call) strata() (strata, error) {
	lists := []In[List]{sizes, sds}
	if c.has("costs") {
		lists = append(lists, unitCosts)
	}
	names, columns, err := c.matched(nil, lists...)
	if err != nil {
		return strata{}, err
	}
	s := strata{names: names, sizes: columns[0], sds: columns[1], outside: tail(confidence.Of(c), direction.Of(c)), cancelled: c.cancelled}
	if len(columns) > 2 {
		s.costs = columns[2]
	} else {
		s.costs = make([]float64, len(names))
		for h := range s.costs {
			s.costs[h] = 1
		}
	}
	var spread float64
	for h, size := range s.sizes {
		w := size * s.sds[h] / math.Sqrt(s.costs[h])
		s.weights = append(s.weights, w)
		spread = math.Max(spread, w)
	}
	if spread == 0 {
		return s, refuse("no-spread", "sds", "Every sd is 0: nothing varies, so one value of each stratum tells all; give the sds expected.")
	}
	for h := range s.weights {
		s.weights[h] /= spread
	}
	return s, c.oneSidedLevel()
}

// least is what a stratum gets in any case.
func (s strata) least(h int) float64 { return math.Min(smallestGroup, s.sizes[h]) }

// quotas are the unrounded sizes at a multiplier.
func (s strata) quotas(k float64) []float64 {
	q := make([]float64, len(s.sizes))
	for h := range q {
		q[h] = math.Max(s.least(h), math.Min(s.sizes[h], float64(k*s.weights[h])))
	}
	return q
}

// rounded rounds quotas up or down.
func rounded(quotas []float64, round func(float64) float64) []float64 {
	n := make([]float64, len(quotas))
	for h, q := range quotas {
		n[h] = round(q)
	}
	return n
}

// halfWidth of the mean of the population, as stratified-interval gives it.
func (s strata) halfWidth(n []float64) float64 {
	var population float64
	largest := slices.Max(s.sds)
	for _, size := range s.sizes {
		population += size
	}
	var variance, spread float64
	for h, size := range s.sizes {
		if n[h] >= size {
			continue
		}
		share, sd := size/population, s.sds[h]/largest
		v := float64(share*share) * (1 - n[h]/size) * float64(sd*sd) / n[h]
		variance += v
		spread += float64(v*v) / (n[h] - 1)
	}
	if variance == 0 {
		return 0
	}
	df := float64(variance*variance) / spread
	return largest * math.Sqrt(variance) * dist.Student{DF: df}.UpperQuantile(s.outside)
}

func (s strata) cost(n []float64) float64 {
	var sum float64
	for h, x := range n {
		sum += float64(x * s.costs[h])
	}
	return sum
}

// everything is a multiplier at which every stratum with a spread is whole.
func (s strata) everything() float64 {
	var k float64
	for h, w := range s.weights {
		if w > 0 {
			k = math.Max(k, s.sizes[h]/w)
		}
	}
	return 2 * k
}

// lastMultiplier halves its way to two neighbouring doubles of which the
// multiplier fits but the next does not, and gives both.
func (s strata) lastMultiplier(hi float64, fits func(k float64) bool) (fitting, next float64) {
	lo := 0.0
	for {
		mid := lo + (hi-lo)/2
		if mid <= lo || mid >= hi || s.cancelled() != nil {
			return lo, hi
		}
		if fits(mid) {
			lo = mid
		} else {
			hi = mid
		}
	}
}

// forHalfWidth gives the smallest sizes whose half-width is no more than wanted.
func (s strata) forHalfWidth(wanted float64) []float64 {
	sizesAt := func(k float64) []float64 { return rounded(s.quotas(k), ceilWhole) }
	if n := sizesAt(0); staysIn(s.halfWidth(n), wanted) {
		return n
	}
	_, k := s.lastMultiplier(s.everything(), func(k float64) bool { return !staysIn(s.halfWidth(sizesAt(k)), wanted) })
	return sizesAt(k)
}

// forBudget spends a budget: quotas that cost it, rounded down, and then one more
// to each stratum in the order of what rounding took from it, while the money
// lasts. ok is false where the budget does not pay the least sizes.
func (s strata) forBudget(budget float64) (n []float64, least float64, ok bool) {
	smallest := rounded(s.quotas(0), floorWhole)
	if least = s.cost(smallest); !staysIn(least, budget) {
		return nil, least, false
	}
	if all := s.everything(); staysIn(s.cost(s.quotas(all)), budget) {
		return rounded(s.quotas(all), floorWhole), least, true
	}
	k, _ := s.lastMultiplier(s.everything(), func(k float64) bool { return staysIn(s.cost(s.quotas(k)), budget) })
	quotas := s.quotas(k)
	n = rounded(quotas, floorWhole)
	order := make([]int, len(n))
	for h := range order {
		order[h] = h
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(quotas[b]-n[b], quotas[a]-n[a]) })
	spent := s.cost(n)
	for _, h := range order {
		if n[h] < s.sizes[h] && quotas[h] > n[h] && staysIn(spent+s.costs[h], budget) {
			n[h]++
			spent += s.costs[h]
		}
	}
	return n, least, true
}

var (
	unitCosts = numbers("costs", "what one measurement costs in each stratum; 1 where left out", positive, NoUnit).atMost(mostGroups, fewerGroups).optional()
	budget    = number("budget", "what may be spent in all", positive, NoUnit)

	smallBudgetKind = FindingKind{"budget-too-small", "the budget does not pay 2 measurements in each stratum"}
)

var stratifiedSize = &Function{
	Name:    "stratified-size",
	Version: 1,
	Summary: "how many to measure in each stratum, for a half-width of the mean or for a budget",
	Inputs: inputs(sizes, sds.as("sds", "the standard deviation expected in each stratum"), unitCosts, halfWidth, budget, confidence, direction,
		designEffect, nonResponse),
	OneOf: []OneOf{{{Needs: []string{"half-width"}}, {Needs: []string{"budget"}}}},
	Results: []Result{
		{"total-n", Whole, NoUnit, "how many values are needed in all"},
		{"n-planned", Whole, NoUnit, "how many to plan for in all, with the design effect and what will be lost"},
		resultHalfWidth,
		{"cost", Number, NoUnit, "what the values needed cost"},
	},
	Table: []Result{
		{"stratum", Text, NoUnit, "the stratum"},
		{"n", Whole, NoUnit, "how many values are needed in it"},
		{"n-planned", Whole, NoUnit, "how many to plan for in it"},
	},
	Findings:    []FindingKind{smallBudgetKind, noSpreadKind, tooManyKind, lowLevelKind, populationKind},
	Assumptions: []string{"a simple random sample within each stratum", "normal stratum means"},
	Citations:   []string{"Neyman 1934", "Cochran 1977 ch. 5", "Satterthwaite 1946"},
	Example: Example{
		Label:     "two depots, the second four times as dear to measure, budget 60",
		Arguments: []Argument{{"sizes", List{Names: []string{"North", "Quay"}, Values: []float64{100, 50}}}, {"sds", []float64{2, 4}}, {"costs", []float64{1, 4}}, {"budget", 60.0}},
		Want:      []Argument{{"total-n", 30}, {"cost", 60.0}},
		Tolerance: 1e-12,
		Source:    "Cochran 1977 ch. 5 worked by hand: 100·2/√1 to 50·4/√4 is 2 to 1, so 20 and 10 cost 60",
	},
	compute: func(c *Call) error {
		s, err := c.strata()
		if err != nil {
			return err
		}
		var n []float64
		if money, ok := budget.Given(c); ok {
			var least float64
			if n, least, ok = s.forBudget(money); !ok {
				return refuse("budget-too-small", "budget", "The budget of %s does not pay the least sample, 2 in each stratum (all of a smaller one), which costs %s.", brief(money), brief(least))
			}
			c.method = "optimal allocation to a budget, rounded down, leftovers by largest remainder"
		} else {
			n = s.forHalfWidth(halfWidth.Of(c))
			c.method = "optimal allocation, rounded up; t interval with Satterthwaite's degrees of freedom"
		}
		if err := c.cancelled(); err != nil {
			return err
		}
		return c.setStrata(s, n)
	},
}

// setStrata gives the table and the sums.
func (c *Call) setStrata(s strata, n []float64) error {
	total, planned := 0.0, 0
	for h, x := range n {
		lost := nonResponse.Of(c)
		asked := math.Max(1, ceilWhole(float64(x*designEffect.Of(c))/(1-lost)))
		p := math.Min(s.sizes[h], asked)
		row := Row{Values: map[string]any{"stratum": s.names[h], "n": int(x), "n-planned": int(p)}}
		if left := floorWhole(float64(p * (1 - lost))); asked > p && left < x && lost > 0 {
			row.Findings = []Finding{{Code: "losses-exceed-population", Severity: Caution, Input: "non-response", Message: fmt.Sprintf(
				"Even if all %.0f of %s are approached, only about %.0f are left, fewer than the %.0f needed; find ways to lose fewer.", p, s.names[h], left, x)}}
		}
		c.rows = append(c.rows, row)
		total += x
		planned += int(p)
	}
	if total > largestPlan {
		return refuse("too-many", c.firstGiven("half-width", "budget"), "This takes %.0f values, more than %d; ask for less.", total, largestPlan)
	}
	attained := s.halfWidth(n)
	c.set("total-n", int(total))
	c.set("n-planned", planned)
	c.set("attained-half-width", attained)
	c.set("cost", s.cost(n))
	parts := make([]string, len(n))
	for h, x := range n {
		parts[h] = fmt.Sprintf("%s %.0f", s.names[h], x)
	}
	purpose := "a budget of " + brief(budget.Of(c))
	if wanted, ok := halfWidth.Given(c); ok {
		purpose = "a half-width of " + FormatNumber(wanted)
	}
	c.sentence = fmt.Sprintf("Measure %s (%s in all), planned for %s: the half-width of the mean will be about %s at %s confidence, %s, at a cost of %s (%s).%s",
		someNames(parts), nText(int(total)), purpose, c.sized(attained), percent(confidence.Of(c)), c.inDirection(), brief(s.cost(n)), c.method, c.toPlan())
	return nil
}
