package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var normalityCheck = &Function{
	Name:    "normality-check",
	Version: 1,
	Summary: "whether the values could come from a normal population (Shapiro-Wilk and Anderson-Darling)",
	Inputs:  inputs(sample),
	Results: []Result{
		{"shapiro-wilk", Number, NoUnit, "W, for 3 to 5000 values"},
		{"shapiro-wilk-p-value", Number, NoUnit, "its p-value"},
		{"anderson-darling", Number, NoUnit, "A squared with estimated mean and sd, from 8 values"},
		{"anderson-darling-p-value", Number, NoUnit, "its p-value"},
		{"skewness", Number, NoUnit, "G1, 0 for a normal population"},
		{"excess-kurtosis", Number, NoUnit, "G2, 0 for a normal population; from 4 values"},
	},
	Findings:    []FindingKind{fewValuesKind, noSpreadKind},
	Assumptions: []string{"independent values of one population"},
	Citations:   []string{"Royston 1995", "D'Agostino & Stephens 1986"},
	Example: Example{
		Label:     "weights in pounds of eleven men",
		Arguments: []Argument{{"sample", []float64{148, 154, 158, 160, 161, 162, 166, 170, 182, 195, 236}}},
		Want:      []Argument{{"shapiro-wilk", 0.79}},
		Tolerance: 0.01,
		Source:    "Shapiro & Wilk 1965, An analysis of variance test for normality, section 4 (W = 0.79)",
	},
	compute: func(c *Call) error {
		values := num.Sorted(c.gapless(sample.Of(c)))
		s := summarise(values)
		c.count(s.n)
		if err := c.enough("sample", s, 3); err != nil {
			return err
		}
		var parts []string
		if s.n <= 5000 {
			w, p := shapiroWilk(values)
			c.set("shapiro-wilk", w)
			c.set("shapiro-wilk-p-value", p)
			parts = append(parts, fmt.Sprintf("Shapiro-Wilk W = %s, %s", brief(w), pText(p)))
		}
		if s.n >= 8 {
			a, p := andersonDarling(values, s)
			c.set("anderson-darling", a)
			c.set("anderson-darling-p-value", p)
			parts = append(parts, fmt.Sprintf("Anderson-Darling A² = %s, %s", brief(a), pText(p)))
		}
		m := num.Moments(values)
		c.set("skewness", skewness(m))
		if s.n >= 4 {
			c.set("excess-kurtosis", excessKurtosis(m))
		}
		c.method = "Shapiro-Wilk by Royston's approximation, Anderson-Darling with estimated mean and sd"
		c.sentence = fmt.Sprintf("%s (%s): a small p-value speaks against a normal population, a large one does not prove it.", AndList(parts), nText(s.n))
		return nil
	},
}

// polynomial is c[0] + c[1]x + c[2]x² + …
func polynomial(x float64, c ...float64) float64 {
	y := 0.0
	for _, a := range slices.Backward(c) {
		y = float64(y*x) + a
	}
	return y
}

// shapiroWilk gives W and its p-value for sorted values with some spread, n from
// 3 to 5000 (Royston 1995, Remark AS R94, Applied Statistics 44, 547-551; the
// constants were not compared with the printed listing). The approximation of the p-value is good to two or
// three digits.
func shapiroWilk(sorted []float64) (w, p float64) {
	n := len(sorted)
	size := float64(n)
	half := n / 2
	// weights a of the largest values, the greatest first; the smallest have -a.
	a := make([]float64, half)
	if n == 3 {
		a[0] = math.Sqrt(0.5)
	} else {
		m := make([]float64, half) // expected normal order statistics, approximately
		var squares float64
		for i := range m {
			m[i] = dist.Normal{}.UpperQuantile((float64(i+1) - 0.375) / (size + 0.25))
			squares += 2 * float64(m[i]*m[i])
		}
		root, rsn := math.Sqrt(squares), 1/math.Sqrt(size)
		a[0] = polynomial(rsn, m[0]/root, 0.221157, -0.147981, -2.07119, 4.434685, -2.706056)
		rest, first := squares-2*float64(m[0]*m[0]), 1
		left := 1 - 2*float64(a[0]*a[0])
		if n > 5 {
			a[1] = polynomial(rsn, m[1]/root, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633)
			rest -= 2 * float64(m[1]*m[1])
			left -= 2 * float64(a[1]*a[1])
			first = 2
		}
		scale := math.Sqrt(rest / left)
		for i := first; i < half; i++ {
			a[i] = m[i] / scale
		}
	}
	var b float64
	for i := range a {
		b += float64(a[i] * (sorted[n-1-i] - sorted[i]))
	}
	ss := num.Moments(sorted).SumSquares
	w = math.Min(1, float64(b*b)/ss)
	return w, shapiroWilkP(w, n)
}

func shapiroWilkP(w float64, n int) float64 {
	if n == 3 { // exact: 6/π(asin √w - asin √¾) = 3 I_w(½, ½) - 2
		_, upper := dist.BetaTails(w, 1-w, 0.5, 0.5)
		return math.Max(0, 1-float64(3*upper))
	}
	size := float64(n)
	y := num.Log(math.Max(1-w, math.SmallestNonzeroFloat64))
	var mean, sd float64
	if n <= 11 {
		bound := polynomial(size, -2.273, 0.459)
		if y >= bound {
			return 1e-99 // W beyond what the approximation reaches
		}
		y = -num.Log(bound - y)
		mean = polynomial(size, 0.5440, -0.39978, 0.025054, -6.714e-4)
		sd = num.Exp(polynomial(size, 1.3822, -0.77857, 0.062767, -0.0020322))
	} else {
		x := num.Log(size)
		mean = polynomial(x, -1.5861, -0.31082, -0.083751, 0.0038915)
		sd = num.Exp(polynomial(x, -0.4803, -0.082676, 0.0030302))
	}
	return dist.Normal{}.SF((y - mean) / sd)
}

// andersonDarling gives A² for sorted values with estimated mean and sd, and
// the p-value of A²(1 + 0.75/n + 2.25/n²) (D'Agostino & Stephens 1986, Table 4.9;
// the constants were not compared with the print).
func andersonDarling(sorted []float64, s summary) (a2, p float64) {
	n := float64(s.n)
	terms := make([]float64, s.n)
	for i := range sorted {
		low := (sorted[i] - s.mean) / s.sd
		high := (sorted[s.n-1-i] - s.mean) / s.sd
		terms[i] = float64(2*i+1) * (dist.NormalLogCDF(low) + dist.NormalLogSF(high))
	}
	a2 = -n - num.Sum(terms)/n
	return a2, andersonDarlingP(a2 * (1 + 0.75/n + 2.25/float64(n*n)))
}

// andersonDarlingP is the p-value of A²(1 + 0.75/n + 2.25/n²).
func andersonDarlingP(x float64) float64 {
	var p float64
	switch {
	case x >= 0.6:
		x = math.Min(x, 150) // the parabola's lowest point, where p is below 1e-185
		p = num.Exp(polynomial(x, 1.2937, -5.709, 0.0186))
	case x >= 0.34:
		p = num.Exp(polynomial(x, 0.9177, -4.279, -1.38))
	case x >= 0.2:
		p = -num.Expm1(polynomial(x, -8.318, 42.796, -59.938))
	default:
		p = -num.Expm1(polynomial(x, -13.436, 101.14, -223.73))
	}
	return math.Max(0, math.Min(1, p))
}
