package funcs

import (
	"fmt"
	"math"
	"strconv"
)

// What to plan for n that count, and how many of those planned count.

// planned is the number to plan for n that count: times the design effect, over
// the share that is not lost, and never more than there are.
func (c *Call) planned(n int) (int, error) {
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	x := ceilWhole(float64(float64(n)*effect) / (1 - lost))
	if size, ok := populationSize.Given(c); ok && x > float64(size) {
		if left := floorWhole(float64(size) * (1 - lost)); left < float64(n) && lost > 0 {
			c.caution("losses-exceed-population", "non-response", "Even if all %d are approached, only about %.0f are left, fewer than the n = %d needed; find ways to lose fewer.",
				size, left, n)
		}
		return size, nil
	}
	if x > largestPlan {
		return 0, refuse("too-many", "design-effect", "With a design effect of %s and %s lost, n = %d becomes more than %d; look for another design.",
			brief(effect), percent(lost), n, largestPlan)
	}
	return max(int(x), 1), nil
}

// counting is how many of n that were planned count: what planned undoes.
func (c *Call) counting(input string, n int) (int, error) {
	if err := c.cancelled(); err != nil {
		return 0, err
	}
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	x := floorWhole(float64(float64(n)*(1-lost)) / effect)
	if x > largestPlan {
		return 0, refuse("too-many", input, "This is more than %d values; give at most that many.", largestPlan)
	}
	if x < smallestGroup {
		return 0, refuse("few-values", input, "Of n = %d planned only %s count after the design effect and the losses, but at least %d are needed; plan more.",
			n, strconv.FormatFloat(x, 'f', 0, 64), smallestGroup)
	}
	return int(x), nil
}

// plannedPopulation is the size of the population, infinite where none was given.
func (c *Call) plannedPopulation() float64 {
	if size, ok := populationSize.Given(c); ok {
		return float64(size)
	}
	return math.Inf(1)
}

// largestN is the largest n that may be planned: no more than the population.
func (c *Call) largestN() int { return int(math.Min(largestPlan, c.plannedPopulation())) }

// countingOfPopulation is counting for n of a population, where one was given. All
// of a population count whatever the design, but for losses.
func (c *Call) countingOfPopulation() (int, error) {
	n, population := plannedN.Of(c), c.plannedPopulation()
	if float64(n) > population {
		return 0, c.wrong("n", fmt.Sprint(n), fmt.Sprintf("is more than the population-size (%.0f)", population), "give at most that many")
	}
	if float64(n) == population && nonResponse.Of(c) == 0 {
		return n, c.cancelled()
	}
	return c.counting("n", n)
}

// setPlan gives n and what to plan for it.
func (c *Call) setPlan(n int) error {
	planned, err := c.planned(n)
	if err != nil {
		return err
	}
	c.set("n", n)
	c.set("n-planned", planned)
	return nil
}

// setGroups gives both groups' n and what to plan for them.
func (c *Call) setGroups(n, second int) error {
	planned, err := c.planned(second)
	if err != nil {
		return err
	}
	c.set("second-n", second)
	c.set("second-n-planned", planned)
	return c.setPlan(n)
}

// losses words the design effect and the losses; "" where there are none.
func (c *Call) losses() string {
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	if effect == 1 && lost == 0 {
		return ""
	}
	return fmt.Sprintf("design effect %s and %s lost", brief(effect), percent(lost))
}

// toPlan words the numbers to plan where they are not n itself.
func (c *Call) toPlan() string {
	lost := c.losses()
	if lost == "" {
		return ""
	}
	counts := fmt.Sprint(c.results["n-planned"])
	if second, ok := c.results["second-n-planned"]; ok {
		counts += fmt.Sprintf(" and %d", second)
	}
	return fmt.Sprintf(" Plan %s, for %s.", counts, lost)
}

// nCounting words n, and how many were planned where only a part of them counts.
func (c *Call) nCounting(n int) string {
	if lost := c.losses(); lost != "" {
		return fmt.Sprintf("%s (of %d planned, %s)", nText(n), plannedN.Of(c), lost)
	}
	return nText(n)
}

// secondPlanned is the size planned for the second group: that of the first
// where it was left out.
func (c *Call) secondPlanned() int {
	if m, ok := plannedSecondN.Given(c); ok {
		return m
	}
	return plannedN.Of(c)
}

// countingGroups is counting for two groups.
func (c *Call) countingGroups() (n, second int, err error) {
	if n, err = c.counting("n", plannedN.Of(c)); err != nil {
		return 0, 0, err
	}
	second, err = c.counting("second-n", c.secondPlanned())
	return n, second, err
}

// bothCounting is nCounting for two groups.
func (c *Call) bothCounting(n, second int) string {
	if lost := c.losses(); lost != "" {
		return fmt.Sprintf("%s (of %d and %d planned, %s)", bothN(n, second), plannedN.Of(c), c.secondPlanned(), lost)
	}
	return bothN(n, second)
}
