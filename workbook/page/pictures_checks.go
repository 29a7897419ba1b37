package page

import (
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"halfwidth/funcs"
)

// scores are the normal scores of n ranked values, at plotting positions
// (i - 3/8)/(n + 1/4) (Blom 1958, Statistical estimates and transformed
// beta-variables).
func scores(ctx context.Context, n int, ranks []int) ([]float64, error) {
	out := make([]float64, len(ranks))
	for k, i := range ranks {
		p := (float64(i) - 0.375) / (float64(n) + 0.25)
		z, err := askNumber(ctx, "normal-quantile", "value", map[string]any{"probability": p})
		if err != nil {
			return nil, err
		}
		out[k] = z
	}
	return out, nil
}

func askNumber(ctx context.Context, function, result string, arguments map[string]any) (float64, error) {
	out, err := ask(ctx, function, arguments)
	if out == nil {
		return math.NaN(), err
	}
	return answer{Outcome: out}.result(result), err
}

// orderLimits are the limits between which the i-th smallest of n uniform
// values lies with 95% probability: quantiles of a beta law with parameters i
// and n+1-i (David & Nagaraja 2003, Order Statistics, eq. 2.1.5), here from the
// F law with 2i and 2(n+1-i) degrees of freedom. They are given as normal scores.
func orderLimits(ctx context.Context, n, i int) (lower, upper float64, err error) {
	a, b := float64(i), float64(n+1-i)
	var limits [2]float64
	for k, from := range []string{"below", "above"} {
		f, err := askNumber(ctx, "f-quantile", "value", map[string]any{"first-df": 2 * a, "second-df": 2 * b, "probability": 0.025, "counted-from": from})
		if err != nil {
			return 0, 0, err
		}
		below, above := a*f/(a*f+b), b/(a*f+b)
		side := "below"
		p := below
		if above < below { // the smaller tail keeps its digits
			side, p = "above", above
		}
		if limits[k], err = askNumber(ctx, "normal-quantile", "value", map[string]any{"probability": p, "counted-from": side}); err != nil {
			return 0, 0, err
		}
	}
	return limits[0], limits[1], nil
}

// ranksFor are at most so many ranks of 1 to n, the outermost all among them.
func ranksFor(n, most int) []int {
	var out []int
	if n <= most {
		for i := range n {
			out = append(out, i+1)
		}
		return out
	}
	ends := most / 6
	for i := range ends {
		out = append(out, i+1)
	}
	inside := most - 2*ends
	for k := range inside {
		out = append(out, ends+1+(2*k+1)*(n-2*ends)/(2*inside))
	}
	for i := n - ends + 1; i <= n; i++ {
		out = append(out, i)
	}
	return slices.Compact(out)
}

// normalPlot is a normal probability plot: sorted values against the scores
// that a normal law would give them, with the law as a line.
type normalPlot struct {
	sorted      []float64
	centre, sd  float64 // of the law; sd is 0 where there is none
	band        bool
	valuesTitle string
}

func (q normalPlot) draw(ctx context.Context) (*panel, error) {
	n := len(q.sorted)
	ranks := ranksFor(n, 240)
	z, err := scores(ctx, n, ranks)
	if err != nil {
		return nil, err
	}
	seen := []float64{q.sorted[0], q.sorted[n-1]}
	type limit struct{ z, lower, upper float64 }
	var band []limit
	if q.band && q.sd > 0 {
		at := ranksFor(n, 48)
		zs, err := scores(ctx, n, at)
		if err != nil {
			return nil, err
		}
		for k, i := range at {
			lower, upper, err := orderLimits(ctx, n, i)
			if err != nil {
				return nil, err
			}
			l := limit{zs[k], q.centre + q.sd*lower, q.centre + q.sd*upper}
			band = append(band, l)
			seen = append(seen, l.lower, l.upper)
		}
	}
	lo, hi := spanOf(seen...)
	edge := math.Max(math.Abs(z[0]), math.Abs(z[len(z)-1])) * 1.06
	p := newPanel(-edge, edge, q.valuesTitle+" (upward) against normal scores")
	p.vertical(lo, hi, 200)
	p.over(func(g pen) {
		if len(band) > 1 {
			var outline, upper []vg.Point
			for _, l := range band {
				outline = append(outline, vg.Point{X: g.x(l.z), Y: g.y(l.lower)})
				upper = append(upper, vg.Point{X: g.x(l.z), Y: g.y(l.upper)})
			}
			slices.Reverse(upper)
			g.area(bandInk, append(outline, upper...)...)
		}
		if q.sd > 0 {
			from, to := -edge, edge
			for _, end := range []*float64{&from, &to} { // where the line leaves the panel
				*end = math.Min(math.Max(*end, (lo-q.centre)/q.sd), (hi-q.centre)/q.sd)
			}
			g.line(lineInk, 1.4, vg.Point{X: g.x(from), Y: g.y(q.centre + q.sd*from)}, vg.Point{X: g.x(to), Y: g.y(q.centre + q.sd*to)})
		}
		points := make([]vg.Point, len(ranks))
		for k, i := range ranks {
			points[k] = vg.Point{X: g.x(z[k]), Y: g.y(q.sorted[i-1])}
		}
		g.dots(dotInk, 4, points)
	})
	return p, nil
}

// drawNormalPlot shows how near a sample is to a normal law.
func drawNormalPlot(ctx context.Context, a answer) (*picture, error) {
	sorted := slices.Sorted(slices.Values(withoutGaps(a.sample("sample"))))
	summary, err := ask(ctx, "sample-summary", map[string]any{"sample": sorted})
	if summary == nil {
		return nil, err
	}
	b := answer{Outcome: summary}
	p, err := normalPlot{sorted: sorted, centre: b.result("mean"), sd: b.result("sd"), band: true, valuesTitle: a.titled("values")}.draw(ctx)
	if err != nil {
		return nil, err
	}
	return &picture{
		panels: []*panel{p},
		says: []string{fmt.Sprintf("Normal probability plot of %s, from %s to %s, skewness %s.", plural(len(sorted), "value"),
			figure(sorted[0]), figure(sorted[len(sorted)-1]), figure(a.result("skewness")))},
		caption: []string{"A normal sample follows the line (its mean and standard deviation).",
			"Band: where each ranked value lies with 95% probability, taken by itself (order statistics, David & Nagaraja 2003); scores after Blom 1958."},
	}, nil
}

// mostInOrder is how many places of a sequence are drawn one by one; longer ones
// are drawn in so many stretches.
const (
	mostInOrder = 600
	stretches   = 300
)

// drawSequence shows values in their order, gaps as gaps, about their median.
func drawSequence(ctx context.Context, a answer) (*picture, error) {
	values := a.sample("sample")
	median, err := askNumber(ctx, "sample-summary", "median", map[string]any{"sample": values})
	if err != nil {
		return nil, err
	}
	present := withoutGaps(values)
	missing := len(values) - len(present)
	lo, hi := spanOf(present...)
	p := newPanel(0.5, float64(len(values))+0.5, a.titled("values")+" (upward) in their order")
	p.vertical(lo, hi, 150)
	f := &picture{
		panels: []*panel{p},
		says: []string{fmt.Sprintf("%s in their order, from %s to %s, in %s about the median %s.", plural(len(present), "value"),
			figure(slices.Min(present)), figure(slices.Max(present)), plural(int(a.result("runs")), "run"), figure(median))},
	}
	each := (len(values) + stretches - 1) / stretches
	if len(values) <= mostInOrder {
		each = 1
		f.caption = append(f.caption, "Neighbours are joined.")
	} else {
		f.caption = append(f.caption, fmt.Sprintf("Each stroke spans the smallest to the largest of %d successive values; the dot on it is their mean.", each))
	}
	f.caption = append(f.caption, "Dashed: median "+figure(median)+".")
	if missing > 0 {
		f.caption = append(f.caption, "Short strokes at the foot: "+plural(missing, "gap")+", where a value is missing.")
		f.says = append(f.says, plural(missing, "gap")+".")
	}
	p.over(func(g pen) {
		if each == 1 {
			g.sequence(values)
		} else {
			g.stretches(values, each)
		}
		g.dashed(refInk, 1.6, vg.Point{X: g.Min.X, Y: g.y(median)}, vg.Point{X: g.Max.X, Y: g.y(median)})
	})
	return f, nil
}

// sequence draws values one by one, joined where no gap lies between them.
func (g pen) sequence(values []float64) {
	var run, dots []vg.Point
	for i, v := range values {
		at := g.x(float64(i + 1))
		if math.IsNaN(v) {
			g.line(axisInk, 0.8, run...)
			run = nil
			g.gap(at)
			continue
		}
		run, dots = append(run, vg.Point{X: at, Y: g.y(v)}), append(dots, vg.Point{X: at, Y: g.y(v)})
	}
	g.line(axisInk, 0.8, run...)
	g.dots(dotInk, min(5, max(1.8, 900/vg.Length(len(values)))), dots)
}

// stretches draws so many successive values as one stroke, with their mean.
func (g pen) stretches(values []float64, each int) {
	var means, spans []vg.Point
	for from := 0; from < len(values); from += each {
		all := values[from:min(from+each, len(values))]
		at := g.x(float64(from) + float64(len(all)+1)/2)
		part := withoutGaps(all)
		if len(part) < len(all) {
			g.gap(at)
		}
		if len(part) == 0 {
			continue
		}
		var mean float64
		for _, v := range part {
			mean += v / float64(len(part))
		}
		spans = append(spans, vg.Point{X: at, Y: g.y(slices.Min(part))}, vg.Point{X: at, Y: g.y(slices.Max(part))})
		means = append(means, vg.Point{X: at, Y: g.y(mean)})
	}
	g.segments(axisInk, 0.8, spans)
	g.dots(intervalInk, 2.8, means)
}

// gap marks a missing value at the foot.
func (g pen) gap(at vg.Length) {
	g.line(ringInk, 1, vg.Point{X: at, Y: g.Min.Y}, vg.Point{X: at, Y: g.Min.Y + 6})
}

// shownMeans is how many simulated means are ranked for a picture.
const shownMeans = 499

// drawSampleMeans shows the means of simulated samples against their normal
// law, and the coverage beside the confidence.
func drawSampleMeans(ctx context.Context, a answer) (*picture, error) {
	means, err := funcs.SampleMeans(ctx, a.Outcome, shownMeans)
	if err != nil {
		return nil, err
	}
	slices.Sort(means.Values)
	title := "means less the true mean"
	p, err := normalPlot{sorted: means.Values, sd: means.StandardError, valuesTitle: title}.draw(ctx)
	if err != nil {
		return nil, err
	}
	coverage, off := a.result("coverage"), a.result("simulation-error")
	f := &picture{panels: []*panel{p}, says: []string{fmt.Sprintf("Normal probability plot of the means of %d simulated samples of n = %d, from %s to %s about the true mean.",
		len(means.Values), means.N, figure(means.Values[0]), figure(means.Values[len(means.Values)-1]))}}
	if means.StandardError > 0 {
		f.caption = append(f.caption, "Line: the normal law of the mean; the nearer the dots, the better a normal answer.")
	} else {
		f.caption = append(f.caption, "No line: this population has no finite variance, so the mean has no normal law.")
	}
	f.caption = append(f.caption, fmt.Sprintf("Dots: the first %d simulated samples.", len(means.Values)))
	refs := []reference{{name: "confidence", value: a.given("confidence")}}
	v := interval{name: "coverage", estimate: coverage, lower: math.Max(0, coverage-2*off), upper: math.Min(1, coverage+2*off)}
	f.addIntervals("share of intervals that hold the true mean", []interval{v}, refs)
	f.caption = append(f.caption, "Below: the coverage, two simulation errors to either side; dashed: the confidence asked for.")
	f.says = append(f.says, fmt.Sprintf("The interval holds the true mean in %s of cases; asked for: %s.", percentOf(coverage), percent(a.given("confidence"))))
	return f, nil
}

func percentOf(x float64) string { return figure(math.Round(x*1e4)/100) + "%" }

// drawTail shows the values on either side of the median by their distance from
// it, on logarithmic axes, where a tail like a power is straight; and the tail
// index beside 1 and 2.
func drawTail(ctx context.Context, a answer) (*picture, error) {
	values := withoutGaps(a.sample("sample"))
	median, err := askNumber(ctx, "sample-summary", "median", map[string]any{"sample": values})
	if err != nil {
		return nil, err
	}
	var far []float64
	for _, v := range values {
		if d := math.Abs(v - median); d > 0 {
			far = append(far, d)
		}
	}
	slices.Sort(far)
	slices.Reverse(far)
	most := min(len(far), max(20, len(far)/4), 300) // the tail, not the middle
	far = far[:most]
	f := &picture{}
	if most > 1 && far[most-1] < far[0] {
		n := float64(len(values))
		p := newPanel(math.Log10(far[most-1])-.05, math.Log10(far[0])+.05, "share farther out (upward) against distance from the median")
		p.vertical(math.Log10(0.7/n), math.Log10(float64(most)/n)+.05, 150)
		p.x.ticks, p.y.ticks = powerTicks, powerTicks
		p.over(func(g pen) {
			points := make([]vg.Point, len(far))
			for i, d := range far {
				points[i] = vg.Point{X: g.x(math.Log10(d)), Y: g.y(math.Log10(float64(i+1) / n))}
			}
			g.dots(dotInk, 4, points)
		})
		f.panels = append(f.panels, p)
		f.caption = append(f.caption, fmt.Sprintf("The %d values farthest from the median, on logarithmic axes: a tail like a power falls in a straight line.", most))
		f.says = append(f.says, fmt.Sprintf("The %d values farthest from the median lie %s to %s from it.", most, figure(far[most-1]), figure(far[0])))
	}
	f.addInterval("tail index", a.interval(), []reference{{name: "mean above", value: 1}, {name: "variance above", value: 2}})
	f.caption = append(f.caption[:len(f.caption)-1], "Dashed: above 1 the mean is finite, above 2 the variance.")
	return f, nil
}
