package funcs

import (
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs/internal/num"
)

// groupSummary is one of several named groups, reduced to its summary. The
// values, in order and with gaps, are there where they were given, and so are
// their moments.
type groupSummary struct {
	name    string
	values  []float64
	moments num.Summary
	summary
}

// readGroups reads samples, or the lists given in their place: sds with ns, and
// means where the function takes them. The sd of a group of one value is 0
// here; a function that needs it leaves the group out (see ownSpread).
func (c *Call) readGroups() ([]groupSummary, error) {
	groups, _, err := c.readGroupsWith()
	return groups, err
}

// readSeveral is readGroups for a comparison, which takes two groups or more.
func (c *Call) readSeveral() ([]groupSummary, error) {
	groups, err := c.readGroups()
	if err != nil {
		return nil, err
	}
	return groups, c.atLeastTwo(groups)
}

// readGroupsWith is readGroups together with further lists that have a number
// for each group, such as the sizes of strata.
func (c *Call) readGroupsWith(further ...In[List]) ([]groupSummary, [][]float64, error) {
	var groups []groupSummary
	if given, ok := samples.Given(c); ok {
		for _, g := range given {
			m := c.moments(c.gapless(g.Values))
			groups = append(groups, groupSummary{g.Name, g.Values, m, summaryFrom(m)})
		}
		c.count(total(groups))
		_, columns, err := c.matched(namesOf(groups), further...)
		return groups, columns, err
	}
	lists := append([]In[List]{sds, ns}, further...)
	if c.has("means") {
		lists = append([]In[List]{means}, lists...)
	}
	names, columns, err := c.matched(nil, lists...)
	if err != nil {
		return nil, nil, err
	}
	at := len(lists) - len(further) - 2 // of the sds, before the ns
	for i, name := range names {
		g := groupSummary{name: name, summary: summary{n: int(columns[at+1][i]), sd: columns[at][i]}}
		if at > 0 {
			g.mean = columns[0][i]
		}
		if g.n < 2 {
			g.sd = 0
		}
		groups = append(groups, g)
	}
	c.count(total(groups))
	return groups, columns[at+2:], nil
}

// matched gives the values of lists that go together, one group a place, and
// the groups' names. Lists with names are matched by name, those without by
// order. The order is that of the names handed in, else of the first list that
// has names; else the groups are called "group 1" and so on.
func (c *Call) matched(names []string, lists ...In[List]) ([]string, [][]float64, error) {
	leader := "samples"
	if names == nil {
		leader = lists[0].Name
		if i := slices.IndexFunc(lists, func(in In[List]) bool { return in.Of(c).Names != nil }); i >= 0 {
			leader, names = lists[i].Name, lists[i].Of(c).Names
		} else {
			for i := range lists[0].Of(c).Values {
				names = append(names, fmt.Sprintf("group %d", i+1))
			}
		}
	}
	columns := make([][]float64, len(lists))
	for i, in := range lists {
		list := in.Of(c)
		if list.Names == nil {
			if len(list.Values) != len(names) {
				return nil, nil, c.wrong(in.Name, plural(len(list.Values), "number"),
					fmt.Sprintf("must have one for each of the %s of %s", plural(len(names), "group"), leader),
					"give one a group, in the same order or by name")
			}
			columns[i] = list.Values
			continue
		}
		at := make(map[string]int, len(list.Names))
		for j, name := range list.Names {
			at[name] = j
		}
		column := make([]float64, 0, len(names))
		for _, name := range names {
			if j, ok := at[name]; ok {
				column = append(column, list.Values[j])
			}
		}
		columns[i] = column
		if len(column) == len(names) && len(column) == len(list.Names) {
			continue
		}
		groups := make(map[string]bool, len(names))
		for _, name := range names {
			groups[name] = true
		}
		for _, name := range list.Names {
			if !groups[name] {
				return nil, nil, c.wrong(in.Name, "", fmt.Sprintf("has a value for %q, which is no group of %s", name, leader), nearestOf(name, names))
			}
		}
		for _, name := range names {
			if _, ok := at[name]; !ok {
				return nil, nil, c.wrong(in.Name, "", fmt.Sprintf("has no value for %q, a group of %s", name, leader), "give one for each group")
			}
		}
	}
	return names, columns, nil
}

// nearestOf is the advice for a name that stands nowhere.
func nearestOf(name string, names []string) string {
	if near := Closest(name, names); len(near) > 0 {
		return didYouMean(near)
	}
	return "the groups are " + someNames(names)
}

// total counts the values of all groups.
func total(groups []groupSummary) int {
	n := 0
	for _, g := range groups {
		n += g.n
	}
	return n
}

// dfWithin is the number of values less the number of groups.
func dfWithin(groups []groupSummary) float64 { return float64(total(groups)) - float64(len(groups)) }

// namesOf lists the names of groups.
func namesOf(groups []groupSummary) []string {
	names := make([]string, len(groups))
	for i, g := range groups {
		names[i] = g.name
	}
	return names
}

// someNames joins names, at most five of them.
func someNames(names []string) string {
	if len(names) > 5 {
		return strings.Join(names[:4], ", ") + fmt.Sprintf(" and %d more", len(names)-4)
	}
	return AndList(names)
}

// theGroups words groups: "The group North", "The groups North and Quay".
func theGroups(groups []groupSummary) string {
	if len(groups) == 1 {
		return "The group " + groups[0].name
	}
	return "The groups " + someNames(namesOf(groups))
}

// theGroupsHave words groups with their verb: "The group North has".
func theGroupsHave(groups []groupSummary) string {
	if len(groups) == 1 {
		return theGroups(groups) + " has"
	}
	return theGroups(groups) + " have"
}

// groupsInput is the input to which findings about the groups belong.
func (c *Call) groupsInput() string { return c.firstGiven("samples", "ns") }

// atLeastTwo refuses a comparison of fewer than two groups.
func (c *Call) atLeastTwo(groups []groupSummary) error {
	if len(groups) < 2 {
		return refuse("few-groups", c.groupsInput(), "There is only one group, but at least 2 are needed; widen the condition, or name another group.")
	}
	return nil
}

// ownSpread gives the groups that have an sd of their own. Those of one value
// are named in a caution and left out.
func (c *Call) ownSpread(groups []groupSummary) []groupSummary {
	var with, without []groupSummary
	for _, g := range groups {
		if g.n < 2 {
			without = append(without, g)
		} else {
			with = append(with, g)
		}
	}
	if without != nil {
		c.caution("few-values", c.groupsInput(), "%s only 1 value, which has no standard deviation of its own: left out. Measure at least 2.",
			theGroupsHave(without))
		c.count(total(with))
	}
	return with
}

// noGroupSpread refuses a test for which some groups' values are all equal.
func (c *Call) noGroupSpread(groups []groupSummary) error {
	return refuse("no-spread", c.firstGiven("samples", "sds"), "%s: all values equal (sd 0), so neither an interval nor a test exists; "+
		"check whether the values were rounded or copied down.", theGroups(groups))
}

// eachVaries refuses groups of which some have only equal values.
func (c *Call) eachVaries(groups []groupSummary) error {
	var still []groupSummary
	for _, g := range groups {
		if g.sd == 0 {
			still = append(still, g)
		}
	}
	if still != nil {
		return c.noGroupSpread(still)
	}
	return nil
}

// checkGroups raises the cautions of a sample for each group.
func (c *Call) checkGroups(groups []groupSummary) error {
	if !checks.Of(c) {
		return nil
	}
	input := c.groupsInput()
	var few []groupSummary
	for _, g := range groups {
		if g.n > 1 && g.n < fewValues {
			few = append(few, g)
		}
	}
	if few != nil {
		c.caution("few-values", input, "%s fewer than %d values: the answer rests on the values being normal. Measure at least %d in each.",
			theGroupsHave(few), fewValues, fewValues)
	}
	for _, g := range groups {
		if g.values != nil && g.sd > 0 {
			c.among++
		}
	}
	for i, g := range groups {
		if g.values == nil || g.sd == 0 {
			continue
		}
		what, values := "The group "+g.name, c.gapless(g.values)
		c.checkSkewness(input, what, values)
		c.checkNeighbours(input, what, g.values, g.n)
		c.checkFar(input, what, i, g.values, g.summary)
		c.checkTail(input, what, values)
		if err := c.cancelled(); err != nil {
			return err
		}
	}
	return nil
}

// checkGroupSpreads raises spreads-unlike for the groups that have an sd.
func (c *Call) checkGroupSpreads(groups []groupSummary) {
	var given []spreadOf
	for _, g := range groups {
		if g.n > 1 {
			given = append(given, spreadOf{g.sd, g.n})
		}
	}
	if len(given) > 1 {
		c.checkSpreads(c.firstGiven("samples", "sds"), given...)
	}
}
