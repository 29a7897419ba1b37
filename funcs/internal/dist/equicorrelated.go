package dist

import (
	"math"
	"slices"

	"halfwidth/funcs/internal/num"
)

// MaxT is the law of the largest of several Student t variables over one common
// s = chi/sqrt(df), or of the largest size |t| when TwoSided, where variables i
// and j of the numerators have correlation l_i l_j (Dunnett 1955, Journal of the
// American Statistical Association 50, 1096-1121; 1964, Biometrics 20, 482-491).
// DF > 0 may be infinite.
//
// A numerator is X_i = sqrt(1-l_i^2) Z_i - l_i Y with one common Y, so that given
// Y they are independent: each tail is an integral over Y of its own positive
// integrand, averaged over log s. Relative error 1e-12, in tails of 1e-30 too.
type MaxT struct {
	DF       float64
	TwoSided bool
	parts    []loading
	table    *tailTable // where probabilities share their integrals, else nil
}

// Shared is the same law for many probabilities: they share the integrals of known
// spread.
func (d MaxT) Shared() MaxT {
	sides := 1.0
	if d.TwoSided {
		sides = 2
	}
	d.table = &tailTable{tail: d.numerator, signed: !d.TwoSided,
		bound: func(w float64) float64 { return sides * d.count() * Normal{}.SF(w) }}
	return d
}

// loading stands for count variables of the same l: P(X <= w | Y = y) is
// Phi(stretch*w + shift*y), stretch = 1/sqrt(1-l^2), shift = l*stretch.
type loading struct{ shift, stretch, count, logCount float64 }

// JointPrediction is the law that bounds future further values by the mean and sd
// of past values of one normal law: t_i = (value - mean)/(sd sqrt(1 + 1/past)),
// with correlation 1/(past+1) (Hahn & Meeker 1991, Statistical Intervals, ch. 4).
func JointPrediction(past, future int, df float64, twoSided bool) MaxT {
	n := float64(past)
	if past < 1 || future < 1 {
		return MaxT{DF: math.NaN()}
	}
	return MaxT{DF: df, TwoSided: twoSided, parts: []loading{{1 / math.Sqrt(n), math.Sqrt((n + 1) / n), float64(future), num.Log(float64(future))}}}
}

// ComparisonsWithControl is the law of Dunnett's comparisons of group means with
// that of a control group of control values: t_i with l_i^2 = n_i/(n_i+control).
func ComparisonsWithControl(control int, groups []int, df float64, twoSided bool) MaxT {
	d := MaxT{DF: df, TwoSided: twoSided}
	sizes := slices.Clone(groups)
	slices.Sort(sizes)
	if control < 1 || len(sizes) == 0 || sizes[0] < 1 {
		return MaxT{DF: math.NaN()}
	}
	for i, n := range sizes {
		if i > 0 && n == sizes[i-1] {
			d.parts[len(d.parts)-1].count++
			continue
		}
		ratio := float64(n) / float64(control)
		d.parts = append(d.parts, loading{math.Sqrt(ratio), math.Sqrt(1 + ratio), 1, 0})
	}
	for i := range d.parts {
		d.parts[i].logCount = num.Log(d.parts[i].count)
	}
	return d
}

func (d MaxT) valid() bool { return d.DF > 0 && len(d.parts) > 0 }

// count is the number of variables.
func (d MaxT) count() float64 {
	n := 0.0
	for _, p := range d.parts {
		n += p.count
	}
	return n
}

func (d MaxT) law() studentized {
	tail := d.numerator
	if d.table != nil {
		tail = d.table.at
	}
	return studentized{d.DF, tail, 1.5 * num.Log(1+d.count())}
}

// CDF is P(max <= t).
func (d MaxT) CDF(t float64) float64 { return d.probability(t, false) }

// SF is P(max > t).
func (d MaxT) SF(t float64) float64 { return d.probability(t, true) }

// Between is P(a <= max <= b).
func (d MaxT) Between(a, b float64) float64 { return difference(d, a, b) }

func (d MaxT) probability(t float64, upper bool) float64 {
	low := 1.0
	if upper {
		low = 0
	}
	switch {
	case !d.valid() || math.IsNaN(t):
		return math.NaN()
	case math.IsInf(t, 1):
		return low
	case math.IsInf(t, -1) || d.TwoSided && t <= 0:
		return 1 - low
	}
	return d.law().probability(t, upper)
}

// Quantile is t with P(max <= t) = p.
func (d MaxT) Quantile(p float64) float64 { return d.solve(p, 1-p) }

// UpperQuantile is t with P(max > t) = q.
func (d MaxT) UpperQuantile(q float64) float64 { return d.solve(1-q, q) }

func (d MaxT) solve(lower, upper float64) float64 {
	switch {
	case !d.valid() || !(lower >= 0 && upper >= 0):
		return math.NaN()
	case upper == 0:
		return math.Inf(1)
	case lower == 0 && d.TwoSided:
		return 0
	case lower == 0:
		return math.Inf(-1)
	}
	// The side of 0, where s plays no part.
	positive := true
	if !d.TwoSided {
		below, above := d.numerator(0, false), d.numerator(0, true)
		if lower == below || upper == above {
			return 0
		}
		positive = lower > below
		if upper < lower {
			positive = upper < above
		}
	}
	start := math.Sqrt(2*num.Log(d.count())) + 0.5
	if !positive {
		start = -0.5
	}
	if lower <= upper {
		return d.law().solve(lower, false, start)
	}
	return d.law().solve(upper, true, start)
}

// numerator is P(M <= w) or P(M > w) for the largest numerator M, or size of one.
func (d MaxT) numerator(w float64, upper bool) float64 {
	certain := 1.0
	if upper {
		certain = 0
	}
	if d.TwoSided && w <= 0 {
		return 1 - certain
	}
	// Bounds that settle the far ends: count P(X > w) above, P(X <= w) below.
	bound := d.count() * Normal{}.SF(w)
	switch {
	case w > 0 && (bound < 1e-18 && !upper || bound == 0):
		return certain
	case !d.TwoSided && w < 0 && Normal{}.CDF(w) < 1e-305:
		return 1 - certain
	}
	band, steepest, most := 0.0, 0.0, 0.0
	for _, p := range d.parts {
		band = max(band, p.shift*p.shift*(1+2*num.Log(p.count)))
		steepest, most = max(steepest, p.shift/p.stretch), max(most, p.shift)
	}
	step := 1 / math.Sqrt(1+max(band, float64(most*most*(1+2*num.Log(d.count())))))
	f := func(y float64) float64 {
		logAll := d.logAllBelow(w, y, upper)
		if upper {
			return num.Exp(-float64(y*y)/2) * -num.Expm1(logAll)
		}
		return num.Exp(logAll - float64(y*y)/2)
	}
	total := 0.0
	switch {
	case step < gradedBelow:
		total = d.graded(f, w, steepest, most)
	case d.TwoSided && upper:
		// Largest about y = l w, the likeliest Y when one X is beyond w.
		total = evenIntegral(f, steepest*w, step)
	case d.TwoSided:
		total = evenIntegral(f, 0, step)
	case upper:
		total = outwards(f, 0, min(0, -steepest*w), max(0, -steepest*w), step)
	default:
		total = outwards(f, d.likeliestShift(w), 0, 0, step)
	}
	return min(1, total/math.Sqrt(2*math.Pi))
}

// gradedBelow is the step of the trapezoidal rule below which graded panels take
// fewer nodes.
const gradedBelow = 0.03

// graded integrates f where numerators of many values are all but the common Y:
// then f changes within 1/most about y = -l w, and gently elsewhere. Panels of 16
// points are narrow there and grow with the distance, less where many numerators
// of one l make the change sharper.
func (d MaxT) graded(f func(float64) float64, w, steepest, most float64) float64 {
	sharp := math.Sqrt(1 + float64(2*num.Log(d.count())))
	centre, narrow := -steepest*w, 2/(most*sharp)
	zone, growth := (sharp+6)/most, min(0.5, 2/float64(sharp*sharp))
	side := func(sign, end float64) float64 {
		sum := 0.0
		for at := 0.0; at < end; {
			y := centre + float64(sign*at)
			width := min(narrow+float64(growth*max(0, at-zone)), 8/(4+math.Abs(y)), end-at)
			sum += gauss16(func(x float64) float64 { return f(centre + float64(sign*x)) }, at, at+width)
			at += width
		}
		return sum
	}
	if d.TwoSided { // f is even: the transition below 0, and from 0 to it
		return 2 * (side(-1, 10) + side(1, -centre))
	}
	return side(-1, max(centre, 0)+10) + side(1, max(-centre, 0)+10)
}

// logAllBelow is log of P(all X <= w | Y = y), or of all sizes. Where only its
// complement counts it is as good as -Inf below -40, else below -750: the numerator
// that follows Y most closely may settle that alone. Numerators whose terms are too
// small to change the sum are passed over.
func (d MaxT) logAllBelow(w, y float64, complement bool) float64 {
	hopeless, least := -40.0, -750.0
	if complement {
		hopeless, least = -9.5, -40
	}
	below := func(p loading) float64 { // how far w lies above the centre of X
		if d.TwoSided {
			return float64(p.stretch*w) - math.Abs(float64(p.shift*y))
		}
		return float64(p.stretch*w) + float64(p.shift*y)
	}
	if below(d.parts[len(d.parts)-1]) < hopeless {
		return math.Inf(-1)
	}
	sum := 0.0
	for _, p := range d.parts {
		// The term is below 1.2 count exp(-a^2/2).
		if a := below(p); a > 0 && sum < 0 && float64(a*a)/2 > 38.5+p.logCount-float64(math.Ln2*float64(math.Ilogb(sum))) {
			continue
		}
		at, middle := float64(p.stretch*w), float64(p.shift*y)
		if d.TwoSided {
			sum += float64(p.count * logInterval(math.Abs(middle), at))
		} else {
			sum += float64(p.count * NormalLogCDF(at+middle))
		}
		if sum < least {
			return math.Inf(-1)
		}
	}
	return sum
}

// likeliestShift is y where phi(y) times P(all X <= w | Y = y) is largest, where w
// is below 0 with the normal tails taken for parabolas, else 0.
func (d MaxT) likeliestShift(w float64) float64 {
	if w >= 0 {
		return 0
	}
	pull, bend := 0.0, 1.0
	for _, p := range d.parts {
		pull += float64(p.count * p.shift * p.stretch)
		bend += float64(p.count * p.shift * p.shift)
	}
	return -w * pull / bend
}
