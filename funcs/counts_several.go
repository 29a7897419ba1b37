package funcs

import (
	"fmt"
	"slices"

	"halfwidth/funcs/internal/dist"
)

// Pairs grow with the square of the groups: 300 groups have 44,850.
const (
	mostPairedShares = 300
	insteadOfShares  = "compare some of them two by two by proportion-difference-interval and give their p-values to adjusted-p-values, or compare fewer groups"
)

var groupSuccesses = numbers("successes", "how many of each group have the property", wholeFrom(0), NoUnit).atMost(mostPairedShares, insteadOfShares)

var proportionsComparison = &Function{
	Name:    "proportions-comparison",
	Version: 1,
	Summary: "test that several shares are equal, and every pairwise difference with its interval",
	Inputs:  inputs(groupSuccesses, ns.atMost(mostPairedShares, insteadOfShares), confidence),
	Results: []Result{
		{"chi-square", Number, NoUnit, "Pearson's chi-square statistic of the groups by property table"},
		resultDF,
		{"p-value", Number, NoUnit, "upper tail of the chi-square law"},
	},
	Table: []Result{
		{"first", Text, NoUnit, "the first group of the pair"},
		{"second", Text, NoUnit, "the second group of the pair"},
		{"difference", Number, NoUnit, "first share less second share"},
		{"lower", Number, NoUnit, "lower limit, for this pair alone"},
		{"upper", Number, NoUnit, "upper limit, for this pair alone"},
		{"adjusted-p-value", Number, NoUnit, "two-sided p-value of the pair, adjusted for all pairs (Holm)"},
	},
	Findings: []FindingKind{{"few-expected", "an expected count is below 5, so the chi-square law is a rough guide"},
		{"few-groups", "fewer than two groups"}, {"no-spread", "no case, or every case, has the property"}},
	Assumptions: []string{"independent cases, one chance within each group", "expected counts of 5 or more"},
	Citations:   []string{"Pearson 1900", "Newcombe 1998", "Holm 1979"},
	Example: Example{
		Label: "damaged trips of three depots",
		Arguments: []Argument{
			{"successes", List{Names: []string{"North", "Quay", "Mill"}, Values: []float64{12, 8, 25}}},
			{"ns", List{Names: []string{"North", "Quay", "Mill"}, Values: []float64{100, 100, 100}}},
		},
		Want:      []Argument{{"chi-square", 12.392156862745098}, {"df", 2.0}},
		Tolerance: 1e-12,
		Source:    "Pearson's formula worked by hand: (9 + 49 + 100)/15 + (9 + 49 + 100)/85",
	},
	compute: func(c *Call) error {
		names, columns, err := c.matched(nil, groupSuccesses, ns)
		if err != nil {
			return err
		}
		x, n := columns[0], columns[1]
		if len(names) < 2 {
			return refuse("few-groups", "successes", "There is only one group, but at least 2 are needed; name another group.")
		}
		var allX, allN float64
		for i := range x {
			if x[i] > n[i] {
				return c.wrong("successes", FormatNumber(x[i]), fmt.Sprintf("must be at most the number of %s (%s)", names[i], FormatNumber(n[i])),
					"give how many of the group have the property")
			}
			allX, allN = allX+x[i], allN+n[i]
		}
		c.count(int(allN))
		if allX == 0 || allX == allN {
			return refuse("no-spread", "successes", "No case, or every case, has the property, so the shares cannot be told apart; use proportion-interval for each.")
		}
		var chi float64
		share := allX / allN
		for i := range x {
			d := x[i] - float64(n[i]*share)
			chi += float64(d*d) / float64(n[i]*share*(1-share))
		}
		df := float64(len(names) - 1)
		p := dist.ChiSquare{DF: df}.SF(chi)
		c.set("chi-square", chi)
		c.set("df", df)
		c.set("p-value", p)
		if least := slices.Min(n) * min(share, 1-share); least < 5 {
			c.caution("few-expected", "successes", "The smallest expected count is %s, below 5, so the test is a rough guide; join groups, or measure more.", brief(least))
		}
		c.method = fmt.Sprintf("chi-square test with %s; pairwise score limits (Newcombe, method 10), p-values adjusted by Holm's method", degrees(df))
		c.sentence = fmt.Sprintf("Over %d groups (n = %s in all) the shares give chi-square = %s with %s, %s; the %s have %s intervals (method 10 of Newcombe), each alone, and p-values adjusted by Holm's method.",
			len(names), FormatNumber(allN), brief(chi), degrees(df), pText(p), plural(len(names)*(len(names)-1)/2, "pair"), percent(confidence.Of(c)))
		c.pairsOfShares(names, x, n)
		return nil
	},
}

// pairsOfShares gives the table of all pairs, in group order.
func (c *Call) pairsOfShares(names []string, x, n []float64) {
	var ps []float64
	for i := range names {
		for j := i + 1; j < len(names); j++ {
			d, l := newcombe(x[i], n[i], x[j], n[j], confidence.Of(c), either)
			ps = append(ps, scoreP(x[i]+x[j], n[i]+n[j], pooledScoreZ(x[i], n[i], x[j], n[j]), either))
			c.rows = append(c.rows, Row{Values: map[string]any{"first": names[i], "second": names[j],
				"difference": d, "lower": l.lower, "upper": l.upper}})
		}
	}
	for i, p := range adjust(ps, holm) {
		c.rows[i].Values["adjusted-p-value"] = p
	}
}
