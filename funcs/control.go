package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

const (
	mostControlled = 250
	// Each number of values that occurs is an integrand of its own, and a sharp one
	// in a group of many more values than the control has.
	mostSizes, mostSizesFar = 30, 15
)

var controlGroup = In[string]{Input{Name: "control", Kind: Text, Summary: "the name of the group that the others are compared with"}}

var differencesFromControl = &Function{
	Name:    "differences-from-control",
	Version: 3,
	Summary: "differences of the means of several groups from that of a control group, with intervals that hold together",
	Inputs: inputs(samples.atMost(mostControlled, fewerGroups), means.atMost(mostControlled, fewerGroups), sds.atMost(mostControlled, fewerGroups),
		ns.atMost(mostControlled, fewerGroups), controlGroup, confidence, direction, checks),
	OneOf: []OneOf{meansWays},
	Table: append([]Result{
		{"group", Text, NoUnit, "the group whose mean is compared with that of the control"},
	}, differenceColumns...),
	Findings: append(slices.Clone(severalMeansFindings), FindingKind{"too-many-sizes", "the groups but the control have more than 30 different numbers of values; more than 15, where one has over ten times as many as the control"}),
	Assumptions: []string{"independent groups of independent values", "normal values, or n large enough for their skewness",
		"the same variance in all groups"},
	Citations: []string{"Dunnett 1955, 1964"},
	Example: Example{
		Label: "three groups against a control, sd 2 in each",
		Arguments: []Argument{
			{"means", List{Names: []string{"control", "a", "b", "c"}, Values: []float64{10, 11.5, 7.5, 13}}},
			{"sds", List{Values: []float64{2, 2, 2, 2}}},
			{"ns", List{Values: []float64{6, 4, 5, 10}}},
			{"control", "control"},
		},
		WantRows: [][]Argument{
			{{"group", "a"}, {"difference", 1.5}, {"p-value", 0.52713978644318056}},
			{{"group", "b"}, {"difference", -2.5}, {"p-value", 0.12652162515810449}},
			{{"group", "c"}, {"difference", 3.0}, {"p-value", 0.022551649153311311}},
		},
		Tolerance: 1e-10,
		Source:    "Dunnett's integral at 25 digits",
	},
	compute: func(c *Call) error {
		groups, err := c.readSeveral()
		if err != nil {
			return err
		}
		name := controlGroup.Of(c)
		at := slices.IndexFunc(groups, func(g groupSummary) bool { return g.name == name })
		if at < 0 {
			return c.wrong("control", show(name), "must be one of the groups of "+c.firstGiven("samples", "means"), nearestOf(name, namesOf(groups)))
		}
		_, sd, df, err := c.pooledOf(groups)
		if err != nil {
			return err
		}
		if err := c.controlRows(groups, at, sd, df); err != nil {
			return err
		}
		c.checkGroupSpreads(groups)
		return c.checkGroups(groups)
	},
}

// controlRows adds a row for each group but the control. Limits and p-values
// come from the largest of the t statistics, or of their sizes, which have one
// pooled sd and one control mean in common (Dunnett 1955; 1964 for unequal n).
func (c *Call) controlRows(groups []groupSummary, at int, sd, df float64) error {
	control := groups[at]
	others := slices.Delete(slices.Clone(groups), at, at+1)
	sizes := make([]int, len(others))
	for i, g := range others {
		sizes[i] = g.n
	}
	distinct := slices.Compact(slices.Sorted(slices.Values(sizes)))
	most, where := mostSizes, ""
	if distinct[len(distinct)-1]/10 > control.n {
		most, where = mostSizesFar, " where one has over ten times as many as the control"
	}
	if len(distinct) > most {
		return refuse("too-many-sizes", c.groupsInput(), "The groups have %d different numbers of values, but at most %d are worked out together%s; compare fewer groups at a time.",
			len(distinct), most, where)
	}
	dir := direction.Of(c)
	law := dist.ComparisonsWithControl(control.n, sizes, df, dir == either).Shared()
	critical := law.UpperQuantile(1 - confidence.Of(c))
	for _, g := range others {
		if err := c.cancelled(); err != nil {
			return err
		}
		se := sd * math.Sqrt(1/float64(g.n)+1/float64(control.n))
		d := g.mean - control.mean + 0 // never -0
		values := map[string]any{"group": g.name, "difference": d}
		if dir != below {
			values["lower"] = d - float64(critical*se)
		}
		if dir != above {
			values["upper"] = d + float64(critical*se)
		}
		switch t := d / se; dir {
		case above:
			values["p-value"] = law.SF(t)
		case below:
			values["p-value"] = law.SF(-t)
		default:
			values["p-value"] = law.SF(math.Abs(t))
		}
		c.rows = append(c.rows, Row{Values: values})
	}
	c.method = fmt.Sprintf("Dunnett's comparisons of %s with the control group %s, one pooled variance and %s",
		plural(len(others), "group"), control.name, degrees(df))
	if dir != either {
		c.method += ", direction " + dir
	}
	c.sayRows(groups, func(r Row) string { return fmt.Sprintf("%s - %s", r.Values["group"], control.name) })
	return nil
}
