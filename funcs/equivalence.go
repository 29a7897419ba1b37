package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

var (
	margin      = number("margin", "how far from the reference the difference may lie, to either side, and still count as none", positive, SameUnit)
	lowerMargin = number("lower-margin", "the lowest difference that still counts as none, counted from the reference", anyNumber, SameUnit)
	upperMargin = number("upper-margin", "the highest difference that still counts as none, counted from the reference", anyNumber, SameUnit)

	marginWays = OneOf{{Needs: []string{"margin"}}, {Needs: []string{"lower-margin", "upper-margin"}}}
)

// margins reads the margins about the reference, which stand for differences.
func (c *Call) margins(reference float64) (lower, upper float64, err error) {
	if m, ok := margin.Given(c); ok {
		return reference - m, reference + m, nil
	}
	lower, upper = lowerMargin.Of(c), upperMargin.Of(c)
	if !(lower < upper) {
		return 0, 0, c.wrong("upper-margin", FormatNumber(upper), "must be more than lower-margin ("+FormatNumber(lower)+")",
			"give the lower one first, such as -2 and 2")
	}
	return reference + lower, reference + upper, nil
}

// halfSignificance is a significance of two one-sided tests: from one half on,
// their interval would be turned round.
var halfSignificance = significance.within(Domain{Low: 0, High: 0.5, LowOpen: true, HighOpen: true})

var equivalenceTest = &Function{
	Name:    "equivalence-test",
	Version: 1,
	Summary: "whether two means differ by less than a margin, by two one-sided tests",
	Inputs: inputs(sample, secondSample, firstMean, firstSD, firstN, secondMean, secondSD, secondN, variances,
		margin, lowerMargin, upperMargin, reference.withDefault(0), halfSignificance, checks),
	OneOf: []OneOf{twoMeansWays, marginWays},
	Results: []Result{
		{"difference", Number, SameUnit, "mean of the first sample less that of the second"},
		{"lower", Number, SameUnit, "lower limit at the confidence 1 - 2·significance"},
		{"upper", Number, SameUnit, "upper limit at the confidence 1 - 2·significance"},
		{"p-value", Number, NoUnit, "the larger of the p-values of the two one-sided tests"},
		{"equivalent", YesNo, NoUnit, "yes where p-value is at most significance: both limits lie within the margins"},
	},
	Findings:    twoMeansFindings,
	Assumptions: slices.Concat(twoMeansAssumptions, []string{"margins chosen before the data were seen"}),
	Citations:   []string{"Schuirmann 1987"},
	Example: Example{
		Label:     "minutes of assembly, old process against new, margin 8 minutes",
		Arguments: slices.Concat(assemblyMinutes, []Argument{{"margin", 8.0}}),
		Want:      []Argument{{"lower", 0.88690870706571862}, {"upper", 6.8504650303080188}, {"p-value", 0.014000054664895413}, {"equivalent", true}},
		Tolerance: 1e-10,
		Source:    "data of NIST/SEMATECH e-Handbook of Statistical Methods, 7.3.1; high-precision arithmetic",
	},
	compute: func(c *Call) error {
		ref := reference.Of(c)
		lower, upper, err := c.margins(ref)
		if err != nil {
			return err
		}
		first, second, err := c.twoSummaries()
		if err != nil {
			return err
		}
		kind, alpha := variances.Of(c), halfSignificance.Of(c)
		m := compareMeans(first, second, kind)
		if m.se == 0 {
			return c.noSpreadInTwo()
		}
		law := dist.Student{DF: m.df}
		width := float64(law.UpperQuantile(alpha) * m.se)
		l := limits{m.difference - width, m.difference + width, true, true}
		p := math.Max(law.SF((m.difference-lower)/m.se), law.CDF((m.difference-upper)/m.se))
		c.set("difference", m.difference)
		c.setLimits(l)
		c.set("p-value", p)
		c.set("equivalent", p <= alpha)
		c.method = m.methodText("t interval", kind)
		c.sayAt(1-2*alpha, statement{what: "difference of means (first - second)", estimate: m.difference, limits: l, unit: SameUnit, counts: nTexts(first, second)})
		verdict := "not shown to lie within"
		if p <= alpha {
			verdict = "shown to lie within"
		}
		c.sentence += fmt.Sprintf(" By two one-sided tests at significance %s the difference is %s the margins %s and %s (%s).", percent(alpha), verdict,
			FormatNumber(lower), c.withUnit(FormatNumber(upper), SameUnit), pText(p))
		return c.checkMeans(first, second)
	},
}
