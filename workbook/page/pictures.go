package page

import (
	"context"
	"math"
	"slices"

	"halfwidth/funcs"
)

// rule says which functions a picture suits, by what their descriptors take and
// give, and draws it. The first rule that suits a function draws its picture.
type rule struct {
	suits func(f *funcs.Function) bool
	draw  func(ctx context.Context, a answer) (*picture, error)
}

// rules go from the particular to the general.
var rules = []rule{
	{gives("shapiro-wilk"), drawNormalPlot},
	{gives("runs"), drawSequence},
	{gives("coverage"), drawSampleMeans},
	{gives("tail-index"), drawTail},
	{tabulates("position"), drawOutliers},
	{tabulates("share"), drawShares},
	{tabulates("adjusted"), drawAdjusted},
	{tabulates("stratum"), drawAllocation},
	{inFamily("sizes"), drawPlan},
	{takes("from", "to"), drawLaw},
	{takes("probability", "counted-from"), drawLaw},
	{gives("score"), drawScore},
	{takes("multiply", "add"), drawTransform},
	{takes("successes", "n"), drawShare},
	{takes("count", "exposure"), drawRate},
	{takes("first-successes", "second-successes"), drawTwoShares},
	{takes("first-count", "second-count"), drawTwoRates},
	{takes("successes", "ns"), drawSeveralShares},
	{func(f *funcs.Function) bool { return f.Paired && gives("ratio")(f) }, drawRatioOfSums},
	{func(f *funcs.Function) bool { return f.Paired }, drawDifferences},
	{takes("samples"), drawGroups},
	{takes("sample", "second-sample"), drawTwoSamples},
	{gives("lower-quartile"), drawSummary},
	{takes("sample"), drawSample},
	{gives("lower", "upper"), drawInterval},
}

// gives is whether a function gives all of these results.
func gives(results ...string) func(*funcs.Function) bool {
	return func(f *funcs.Function) bool {
		return !slices.ContainsFunc(results, func(name string) bool { return !hasResult(f.Results, name) })
	}
}

// tabulates is whether the function's table has the column.
func tabulates(column string) func(*funcs.Function) bool {
	return func(f *funcs.Function) bool { return hasResult(f.Table, column) }
}

func hasResult(list []funcs.Result, name string) bool {
	return slices.ContainsFunc(list, func(r funcs.Result) bool { return r.Name == name })
}

// takes is whether a function takes all of these inputs.
func takes(inputs ...string) func(*funcs.Function) bool {
	return func(f *funcs.Function) bool {
		return !slices.ContainsFunc(inputs, func(name string) bool { _, ok := f.Input(name); return !ok })
	}
}

func inFamily(name string) func(*funcs.Function) bool {
	return func(f *funcs.Function) bool { return f.Family == name }
}

// ruleFor is the rule that draws a function's picture, nil where none does.
func ruleFor(f *funcs.Function) *rule {
	i := slices.IndexFunc(rules, func(r rule) bool { return r.suits(f) })
	if i < 0 {
		return nil
	}
	return &rules[i]
}

// drawPicture draws the picture of an outcome. A refused one has none, and neither has
// an answer that shows nothing but one number.
func drawPicture(ctx context.Context, a answer) (*picture, error) {
	r := ruleFor(a.Function)
	if r == nil || a.Status == funcs.StatusRefused {
		return nil, nil
	}
	return r.draw(ctx, a)
}

// answer reads an outcome for its picture. What is not there is NaN or empty.
type answer struct {
	*funcs.Outcome
	written map[string]string // the inputs as the sheet gives them, by name
}

// result is a number among the results.
func (a answer) result(name string) float64 {
	v, _ := a.Get(name)
	return asNumber(v)
}

// given is a number among the inputs.
func (a answer) given(name string) float64 { return asNumber(a.Arguments[name].Value) }

func asNumber(v any) float64 {
	switch v := v.(type) {
	case float64:
		return v
	case int:
		return float64(v)
	}
	return math.NaN()
}

// word is a text among the inputs.
func (a answer) word(name string) string {
	s, _ := a.Arguments[name].Value.(string)
	return s
}

// expression is what the sheet gives for an input, where it names cells.
func (a answer) expression(name string) string {
	if o := a.Arguments[name].Origin; o == nil || o.Range == "" {
		return ""
	}
	return a.written[name]
}

// sample is a sample among the inputs, with its gaps.
func (a answer) sample(name string) []float64 {
	v, _ := a.Arguments[name].Value.([]float64)
	return v
}

func (a answer) groups() []funcs.Group {
	v, _ := a.Arguments["samples"].Value.([]funcs.Group)
	return v
}

func (a answer) list(name string) funcs.List {
	v, _ := a.Arguments[name].Value.(funcs.List)
	return v
}

// names are those of groups that are given by their summaries.
func (a answer) names(lists ...string) []string {
	n := 0
	for _, name := range lists {
		l := a.list(name)
		if l.Names != nil {
			return l.Names
		}
		n = max(n, len(l.Values))
	}
	return numbered(n)
}

func numbered(n int) []string {
	names := make([]string, n)
	for i := range names {
		names[i] = "group " + figure(float64(i+1))
	}
	return names
}

// of gives the number of a list that belongs to a name.
func of(l funcs.List, name string, i int) float64 {
	if at := slices.Index(l.Names, name); at >= 0 {
		i = at
	}
	if i >= len(l.Values) {
		return math.NaN()
	}
	return l.Values[i]
}

// unit is the unit of the sample, where its header or the sheet names one.
func (a answer) unit() string {
	for _, in := range a.Function.Inputs {
		if o := a.Arguments[in.Name].Origin; o != nil && o.Unit != "" && in.Unit == funcs.SameUnit {
			return o.Unit
		}
	}
	return ""
}

// titled puts the unit behind what an axis shows.
func (a answer) titled(what string) string {
	unit := a.unit()
	switch {
	case unit == "":
		return what
	case what == "":
		return unit
	}
	return what + " (" + unit + ")"
}

// level words the confidence of the intervals.
func (a answer) level() string {
	for _, name := range []string{"confidence", "probability"} {
		if v := a.given(name); !math.IsNaN(v) {
			return percent(v)
		}
	}
	return ""
}

// interval is the function's own interval: the limits, and as the estimate its
// first result, where that is none of them.
func (a answer) interval() interval {
	return a.intervalOf("lower", "upper")
}

func (a answer) intervalOf(lower, upper string) interval {
	v := interval{estimate: math.NaN(), lower: a.result(lower), upper: a.result(upper), level: a.level()}
	if first := a.Function.Results; len(first) > 0 && first[0].Name != lower {
		v.name, v.estimate = spaced(first[0].Name), a.result(first[0].Name)
	}
	if of := a.word("of"); v.name == "estimate" && of != "" {
		v.name = spaced(of)
	}
	switch future := a.given("future"); {
	case !math.IsNaN(a.given("content")): // limits of values, not of an estimate
		v.name = percent(a.given("content")) + " of all values"
	case future == 1:
		v.name = "the next value"
	case future > 1 && a.word("of") == "mean":
		v.name = "mean of the next " + figure(future)
	case future > 1:
		v.name = "each of the next " + figure(future)
	}
	return v
}

// references are the values that the answer was compared with.
func (a answer) references() []reference {
	var out []reference
	for _, name := range []string{"reference", "threshold"} {
		if v := a.given(name); !math.IsNaN(v) {
			out = append(out, reference{name: name, value: v})
		}
	}
	return out
}

func valuesOf(refs []reference) []float64 {
	out := make([]float64, len(refs))
	for i, r := range refs {
		out[i] = r.value
	}
	return out
}

// ask calls a function of the catalogue for a curve or an interval beside the
// answer, without its cautions; nil where it is refused.
func ask(ctx context.Context, name string, arguments map[string]any) (*funcs.Outcome, error) {
	f, err := funcs.Lookup(name)
	if err != nil {
		return nil, err
	}
	if _, ok := f.Input("checks"); ok {
		arguments["checks"] = false
	}
	out, err := f.Answer(ctx, arguments)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil || out.Status == funcs.StatusRefused {
		return nil, nil // the value asked for does not exist, so nothing is drawn there
	}
	return out, nil
}

// arguments copies the values of an outcome's arguments that another function
// takes too.
func (a answer) arguments(f *funcs.Function) map[string]any {
	args := map[string]any{}
	for name, from := range a.Arguments {
		if _, ok := f.Input(name); ok {
			args[name] = from.Value
		}
	}
	return args
}
