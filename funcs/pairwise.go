package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
)

var differenceColumns = []Result{
	{"difference", Number, SameUnit, "difference of the two means"},
	{"lower", Number, SameUnit, "lower limit, at the confidence of all rows together; absent for direction below"},
	{"upper", Number, SameUnit, "upper limit, at the confidence of all rows together; absent for direction above"},
	{"p-value", Number, NoUnit, "p-value against no difference, adjusted for the number of rows"},
}

// Pairs grow with the square of the groups: 150 groups have 11,175.
const (
	mostPaired     = 150
	insteadOfPairs = "compare with one of them by differences-from-control, ask whether any differ by analysis-of-variance, or compare fewer groups"
)

var pairwiseDifferences = &Function{
	Name:    "pairwise-differences",
	Version: 3,
	Summary: "differences of the means of several groups, two by two, with intervals that hold together",
	Inputs: inputs(samples.atMost(mostPaired, insteadOfPairs), means.atMost(mostPaired, insteadOfPairs), sds.atMost(mostPaired, insteadOfPairs),
		ns.atMost(mostPaired, insteadOfPairs), pooledFirst, confidence, checks),
	OneOf: []OneOf{meansWays},
	Table: append([]Result{
		{"first", Text, NoUnit, "the group whose mean comes first"},
		{"second", Text, NoUnit, "the group whose mean is taken off"},
	}, differenceColumns...),
	Findings: severalMeansFindings,
	Assumptions: []string{"independent groups of independent values", "normal values, or n large enough for their skewness",
		"with variances pooled: the same variance in all groups"},
	Citations: []string{"Tukey 1953", "Kramer 1956", "Games & Howell 1976"},
	Example: Example{
		Label: "four groups of five values",
		Arguments: []Argument{{"samples", []Group{
			{"group 1", []float64{6.9, 5.4, 5.8, 4.6, 4.0}},
			{"group 2", []float64{8.3, 6.8, 7.8, 9.2, 6.5}},
			{"group 3", []float64{8.0, 10.5, 8.1, 6.9, 9.3}},
			{"group 4", []float64{5.8, 3.8, 6.1, 5.6, 6.2}},
		}}},
		WantRows: [][]Argument{
			{{"first", "group 1"}, {"second", "group 2"}, {"lower", -4.46736839083}, {"upper", -0.292631609166}},
			{{"second", "group 3"}, {"lower", -5.30736839083}, {"upper", -1.13263160917}},
			{{"second", "group 4"}, {"lower", -2.24736839083}, {"upper", 1.92736839083}},
			{{"first", "group 2"}, {"second", "group 3"}, {"lower", -2.92736839083}, {"upper", 1.24736839083}},
			{{"second", "group 4"}, {"lower", 0.132631609166}, {"upper", 4.30736839083}},
			{{"first", "group 3"}, {"second", "group 4"}, {"lower", 0.972631609166}, {"upper", 5.14736839083}},
		},
		Tolerance: 1e-10,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.4.7.1, worked to 12 digits",
	},
	compute: func(c *Call) error {
		groups, err := c.readSeveral()
		if err != nil {
			return err
		}
		rows := c.pooledPairs
		if pooledFirst.Of(c) == separate {
			rows = c.separatePairs
		}
		if err := rows(groups); err != nil {
			return err
		}
		return c.checkGroups(groups)
	},
}

// pooledPairs gives the rows with one variance for all groups: limits at
// ±q(k, N-k)/√2 standard errors (Tukey 1953; Kramer 1956 for unequal n).
func (c *Call) pooledPairs(groups []groupSummary) error {
	_, sd, df, err := c.pooledOf(groups)
	if err != nil {
		return err
	}
	law := dist.NewStudentizedRanges(len(groups)).Law(df)
	critical := law.UpperQuantile(1-confidence.Of(c)) / math.Sqrt2
	pairs, err := c.workOutPairs(groups, func(p *pair) {
		p.se = sd * math.Sqrt(1/float64(p.a.n)+1/float64(p.b.n))
		p.critical, p.value = critical, p.valueBy(law)
	})
	if err != nil {
		return err
	}
	for _, p := range pairs {
		c.addPair(p)
	}
	c.method = fmt.Sprintf("Tukey-Kramer studentized range of %s with one pooled variance and %s", plural(len(groups), "group"), degrees(df))
	c.sayRows(groups, pairName)
	c.checkGroupSpreads(groups)
	return nil
}

// manyGroups is how many groups make interpolating the quantiles worth its start.
const manyGroups = 25

// separatePairs gives the rows with the variances of the two groups and
// Satterthwaite's degrees of freedom (Games & Howell 1976).
func (c *Call) separatePairs(groups []groupSummary) error {
	own := c.ownSpread(groups)
	if err := c.atLeastTwo(own); err != nil {
		return err
	}
	ranges := dist.NewStudentizedRanges(len(own))
	quantile := func(df float64) float64 { return ranges.Law(df).UpperQuantile(1 - confidence.Of(c)) }
	if len(groups) > manyGroups {
		quantile = ranges.UpperQuantiles(1 - confidence.Of(c))
	}
	pairs, err := c.workOutPairs(groups, func(p *pair) {
		if p.a.n < 2 || p.b.n < 2 {
			return
		}
		m := compareMeans(p.a.summary, p.b.summary, separate)
		if p.se = m.se; p.se > 0 {
			p.critical, p.value = quantile(m.df)/math.Sqrt2, p.valueBy(ranges.Law(m.df))
		}
	})
	if err != nil {
		return err
	}
	done, still := 0, false
	for _, p := range pairs {
		switch {
		case p.a.n < 2 || p.b.n < 2:
			c.refusePair(p.a, p.b, "few-values", "a group of 1 value has no standard deviation of its own; measure at least 2.")
		case p.se == 0:
			still = true
			c.refusePair(p.a, p.b, "no-spread", "in neither group do the values differ; check whether they were rounded or copied down.")
		default:
			c.addPair(p)
			done++
		}
	}
	switch {
	case done == 0:
		return c.noGroupSpread(own)
	case still:
		c.caution("no-spread", c.firstGiven("samples", "sds"), "Between groups of which both have only equal values (sd 0) no difference was worked out; "+
			"check whether their values were rounded or copied down.")
	}
	c.method = fmt.Sprintf("Games-Howell studentized range of %s with separate variances and degrees of freedom by Satterthwaite", plural(len(own), "group"))
	c.sayRows(own, pairName)
	return nil
}

// pair is two groups whose means are compared: the standard error of their
// difference, how many of them reach to a limit, and the p-value.
type pair struct {
	a, b                *groupSummary
	se, critical, value float64
}

// valueBy is the p-value of the two means.
func (p *pair) valueBy(law dist.StudentizedRange) float64 {
	return law.SF(float64(math.Sqrt2 * math.Abs((p.a.mean-p.b.mean)/p.se)))
}

// workOutPairs lists the pairs of groups in order, each as work leaves it; the
// cores share them.
func (c *Call) workOutPairs(groups []groupSummary, work func(*pair)) ([]pair, error) {
	pairs := make([]pair, 0, len(groups)*(len(groups)-1)/2)
	for i := range groups {
		for j := i + 1; j < len(groups); j++ {
			pairs = append(pairs, pair{a: &groups[i], b: &groups[j]})
		}
	}
	err := share(c.ctx, len(pairs), 16, func() func(int) { return func(i int) { work(&pairs[i]) } })
	return pairs, err
}

// addPair adds the row of the difference of two groups' means.
func (c *Call) addPair(p pair) {
	d := p.a.mean - p.b.mean + 0 // never -0
	c.rows = append(c.rows, Row{Values: map[string]any{
		"first": p.a.name, "second": p.b.name, "difference": d,
		"lower": d - float64(p.critical*p.se), "upper": d + float64(p.critical*p.se),
		"p-value": p.value,
	}})
}

func (c *Call) refusePair(a, b *groupSummary, code, why string) {
	c.rows = append(c.rows, Row{Values: map[string]any{"first": a.name, "second": b.name},
		Findings: []Finding{{Code: code, Severity: Refused, Input: c.groupsInput(),
			Message: a.name + " and " + b.name + ": " + why}}})
}

// sayRows composes the sentence of a table of differences: how many of its
// intervals leave 0 out, and the clearest of them.
func (c *Call) sayRows(groups []groupSummary, names func(Row) string) {
	clear, least, given := 0, -1, 0
	for i, r := range c.rows {
		p, ok := r.Values["p-value"].(float64)
		if !ok {
			continue
		}
		given++
		if p < 1-confidence.Of(c) {
			clear++
		}
		if least < 0 || p < c.rows[least].Values["p-value"].(float64) {
			least = i
		}
	}
	level, n := percent(confidence.Of(c)), fmt.Sprintf("n = %d in %s", total(groups), plural(len(groups), "group"))
	c.sentence = fmt.Sprintf("Of %s of means, %d can be told from 0 at %s confidence for all together (%s; %s).",
		plural(given, "difference"), clear, level, n, c.method)
	r := c.rows[least]
	d := r.Values["difference"].(float64)
	l := limits{}
	l.lower, l.hasLower = r.Values["lower"].(float64)
	l.upper, l.hasUpper = r.Values["upper"].(float64)
	place := lastPlace(l.halfWidth(d), d)
	text := fmt.Sprintf(" The clearest is %s: %s", names(r), c.withUnit(toPlace(d, place), SameUnit))
	switch {
	case l.hasLower && l.hasUpper:
		text += fmt.Sprintf(", %s to %s", toPlace(l.lower, place), toPlace(l.upper, place))
	case l.hasLower:
		text += ", at least " + toPlace(l.lower, place)
	default:
		text += ", at most " + toPlace(l.upper, place)
	}
	c.sentence += text + ", " + pText(r.Values["p-value"].(float64)) + "."
}

// pairName words the two groups of a row.
func pairName(r Row) string { return fmt.Sprintf("%s - %s", r.Values["first"], r.Values["second"]) }
