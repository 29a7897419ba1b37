package funcs

import (
	"fmt"
	"math"
	"strconv"

	"halfwidth/funcs/internal/num"
)

// mostCorrelated is for how many items a matrix of correlations is looked through,
// which takes time with the cube of their number.
const mostCorrelated = 700

var (
	itemMeans = means.as("means", "the mean of each item").atMost(mostItems, fewerItems)
	itemSDs   = sds.as("sds", "the standard deviation of each item").atMost(mostItems, fewerItems)
	lows      = numbers("lows", "the lowest value of each item, with a triangular distribution", anyNumber, SameUnit).atMost(mostItems, fewerItems)
	likelies  = numbers("likelies", "the likeliest value of each item", anyNumber, SameUnit).atMost(mostItems, fewerItems)
	highs     = numbers("highs", "the highest value of each item", anyNumber, SameUnit).atMost(mostItems, fewerItems)

	weights  = numbers("weights", "what each item is multiplied by; one number stands for all", anyNumber, NoUnit).atMost(mostItems, fewerItems).withDefault(List{Values: []float64{1}})
	constant = number("constant", "a fixed number added to the sum", anyNumber, SameUnit).withDefault(0)

	commonCorrelation = number("correlation", "the correlation of every two items", Domain{Low: -1, High: 1}, NoUnit).withDefault(0)
	correlations      = numbers("correlations", "the correlations of the items as a square matrix, row by row, in place of correlation",
		Domain{Low: -1, High: 1}, NoUnit).atMost(mostCorrelated*mostCorrelated, "give one correlation for all, or join small items into larger ones").optional()

	coverage  = level("probability", "the probability that lower and upper hold between them").withDefault(0.95)
	threshold = number("threshold", "a value; the probability of passing it is given", anyNumber, SameUnit).optional()
	chance    = level("chance", "a probability; the value not passed with this probability is given").optional()
)

var (
	matrixKind   = FindingKind{"not-a-correlation-matrix", "the correlations cannot be those of any quantities"}
	dominantKind = FindingKind{"one-item-dominates", "an item that is not normal holds over half of the variance"}
)

var normalSum = &Function{
	Name:    "normal-sum",
	Version: 1,
	Summary: "distribution of a weighted sum of normal (or triangular) items, correlated or not, and each item's share of the variance",
	Inputs: inputs(itemMeans, itemSDs, lows, likelies, highs, weights, constant, commonCorrelation, correlations,
		coverage, threshold, chance),
	OneOf: []OneOf{{{Needs: []string{"means", "sds"}}, {Needs: []string{"lows", "likelies", "highs"}}}},
	Results: []Result{
		{"mean", Number, SameUnit, "mean of the sum"},
		{"sd", Number, SameUnit, "standard deviation of the sum"},
		{"variance", Number, SquaredUnit, "variance of the sum"},
		{"lower", Number, SameUnit, "the sum lies below it with probability (1 - probability)/2"},
		{"upper", Number, SameUnit, "the sum lies above it with probability (1 - probability)/2"},
		{"probability-above", Number, NoUnit, "probability that the sum passes the threshold"},
		{"value-for-chance", Number, SameUnit, "the sum stays at or below it with probability chance"},
		{"sd-independent", Number, SameUnit, "standard deviation if the items were independent"},
		{"sd-together", Number, SameUnit, "standard deviation if every two items had correlation 1"},
	},
	Table: []Result{
		{"item", Text, NoUnit, "the item's name, or its place"},
		{"share", Number, NoUnit, "the item's share of the variance; the shares sum to 1, and one may be negative"},
	},
	Findings:    []FindingKind{{"no-spread", "the sum has variance 0"}, matrixKind, dominantKind},
	Assumptions: []string{"normal items, jointly; or many triangular items of which none dominates", "means, standard deviations and correlations are known"},
	Citations:   []string{"JCGM 100 eq. 13", "stability of the normal distribution under addition"},
	Example: Example{
		Label:     "sum of four standard normal quantities",
		Arguments: []Argument{{"means", []float64{0, 0, 0, 0}}, {"sds", []float64{1, 1, 1, 1}}},
		Want:      []Argument{{"sd", 2.0}, {"upper", 3.92}},
		Tolerance: 1e-4,
		Source:    "JCGM 101:2008, 9.2.2, Table 2",
	},
	compute: func(c *Call) error {
		items, err := c.readItems()
		if err != nil {
			return err
		}
		if err := c.correlate(items); err != nil {
			return err
		}
		c.count(len(items.names))
		law := normalLaw{items.mean, items.sd}
		outside := (1 - coverage.Of(c)) / 2
		lower, upper := law.Quantile(outside), law.UpperQuantile(outside)
		c.set("mean", law.mean)
		c.set("sd", law.sd)
		c.set("variance", items.variance)
		c.set("lower", lower)
		c.set("upper", upper)
		c.set("sd-independent", items.independent)
		c.set("sd-together", items.together)
		c.method = "normal law of a weighted sum of correlated items"
		if items.triangular {
			c.method = "normal approximation to a weighted sum of triangular items"
		}
		place := lastPlace((upper-lower)/2, law.mean)
		c.sentence = fmt.Sprintf("The sum of %s has mean %s and standard deviation %s and lies from %s to %s with probability %s (%s).",
			plural(len(items.names), "item"), c.withUnit(toPlace(law.mean, place), SameUnit), brief(law.sd),
			toPlace(lower, place), toPlace(upper, place), percent(coverage.Of(c)), c.method)
		c.sayThreshold(law)
		if p, ok := chance.Given(c); ok {
			value := law.Quantile(p)
			c.set("value-for-chance", value)
			c.sentence += fmt.Sprintf(" It stays at or below %s with probability %s.", c.withUnit(toPlace(value, place), SameUnit), percent(p))
		}
		c.sentence += fmt.Sprintf(" The standard deviation would be %s if the items were independent and %s if all moved together.",
			brief(items.independent), brief(items.together))
		c.shares(items)
		return nil
	},
}

// sayThreshold gives the probability of passing the threshold, where there is one.
func (c *Call) sayThreshold(law twoTails) {
	if x, ok := threshold.Given(c); ok {
		p := law.SF(x)
		c.set("probability-above", p)
		c.sentence += fmt.Sprintf(" It passes %s with probability %s.", c.withUnit(FormatNumber(x), SameUnit), chanceText(p, law.CDF(x)))
	}
}

// sumItems are the items of a sum and what they make together.
type sumItems struct {
	names      []string
	spread     []float64 // weight times sd, in units of 2^exponent
	exponent   int
	triangular bool

	mean, sd, variance    float64
	independent, together float64   // sds at other correlations
	share                 []float64 // of the variance
}

// readItems reads the items' means and sds, given or from triangles, and the
// mean of the weighted sum.
func (c *Call) readItems() (*sumItems, error) {
	lists := []In[List]{itemMeans, itemSDs, weights}
	triangular := c.has("lows")
	if triangular {
		lists = []In[List]{lows, likelies, highs, weights}
	}
	names, columns, err := c.itemLists(lists)
	if err != nil {
		return nil, err
	}
	w := columns[len(columns)-1]
	items := &sumItems{names: names, triangular: triangular, spread: make([]float64, len(names))}
	sum := num.Widen(constant.Of(c))
	for i := range names {
		mean, sd := columns[0][i], columns[1][i]
		if triangular {
			if mean, sd, err = c.triangle(names[i], columns[0][i], columns[1][i], columns[2][i]); err != nil {
				return nil, err
			}
		}
		sum = sum.Add(num.TwoProduct(w[i], mean))
		items.spread[i] = float64(w[i] * sd)
	}
	items.mean = sum.Float()
	return items, nil
}

// triangle is the mean (a+m+b)/3 and the sd of the triangular distribution from
// a over m to b. Its variance (a²+m²+b²-ab-am-bm)/18 is computed as
// (u²+v²-uv)/18 with u = b-a and v = m-a, which a large offset does not harm.
func (c *Call) triangle(name string, a, m, b float64) (mean, sd float64, err error) {
	if !(a <= m && m <= b) {
		return 0, 0, c.wrong("likelies", FormatNumber(m), fmt.Sprintf("of item %s must lie from its low (%s) to its high (%s)", name, FormatNumber(a), FormatNumber(b)),
			"check the order of the three lists")
	}
	u, v := b-a, m-a
	if u == 0 {
		return a, 0, nil
	}
	r := v / u
	mean = num.TwoSum(a, m).Plus(b).Over(3).Float()
	return mean, float64(u * math.Sqrt((1-float64(r*(1-r)))/18)), nil
}

// itemLists gives the values of lists that go together, one item a place. The
// first list says how many items there are; one with names is matched by name
// to the first that has names, one number of weights or powers stands for all.
func (c *Call) itemLists(lists []In[List]) (names []string, columns [][]float64, err error) {
	first := lists[0].Of(c)
	var named string
	for _, in := range lists {
		if list := in.Of(c); list.Names != nil && len(list.Values) == len(first.Values) {
			named, names = in.Name, list.Names
			break
		}
	}
	if names == nil {
		for i := range first.Values {
			names = append(names, strconv.Itoa(i+1))
		}
	}
	for _, in := range lists {
		list := in.Of(c)
		if in.Default != nil && len(list.Values) == 1 {
			column := make([]float64, len(names))
			for i := range column {
				column[i] = list.Values[0]
			}
			columns = append(columns, column)
			continue
		}
		if len(list.Values) != len(names) {
			return nil, nil, c.wrong(in.Name, plural(len(list.Values), "number"),
				fmt.Sprintf("must have one for each item of %s (%s)", lists[0].Name, plural(len(names), "number")), "give one an item, in the same order")
		}
		if list.Names == nil {
			columns = append(columns, list.Values)
			continue
		}
		at := make(map[string]float64, len(names))
		for i, n := range list.Names {
			at[n] = list.Values[i]
		}
		column := make([]float64, len(names))
		for i, n := range names {
			x, ok := at[n]
			if !ok {
				return nil, nil, c.wrong(in.Name, "", fmt.Sprintf("has no number for %q of %s", n, named), "give one for each, under the same names")
			}
			column[i] = x
		}
		columns = append(columns, column)
	}
	return names, columns, nil
}

// shares gives the table, and the caution for an item that rules the sum
// though it is not normal.
func (c *Call) shares(items *sumItems) {
	for i, name := range items.names {
		share := items.share[i]
		c.rows = append(c.rows, Row{Values: map[string]any{"item": name, "share": share}})
		if items.triangular && share > 0.5 {
			c.caution(dominantKind.Code, "highs", "Item %s, which is not normal, holds %s of the variance, so the sum is not close to normal and its limits "+
				"and probabilities are rough. Split the item into smaller ones, or look at it by itself.", name, sharePercent(share))
		}
	}
}

// sharePercent words a share in whole percent.
func sharePercent(share float64) string { return toPlace(share*100, 0) + "%" }
