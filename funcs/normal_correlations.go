package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/num"
)

// correlate gives the items' sd together and each one's share: with aᵢ = wᵢσᵢ
// the variance is Σaᵢrᵢ, rᵢ = Σρᵢⱼaⱼ, and the share aᵢrᵢ/variance. Sums are kept
// to twice a double's length, for items that all but cancel.
func (c *Call) correlate(items *sumItems) error {
	a := items.spread
	largest := 0.0
	for _, x := range a {
		largest = math.Max(largest, math.Abs(x))
	}
	if largest == 0 {
		return noSumSpread(items)
	}
	if math.IsInf(largest, 0) {
		return &refusal{beyondDouble("sd")}
	}
	items.exponent = math.Ilogb(largest)
	total, squares := num.Wide{}, num.Wide{}
	for i := range a {
		a[i] = math.Ldexp(a[i], -items.exponent)
		total, squares = total.Plus(a[i]), squares.Add(num.TwoProduct(a[i], a[i]))
	}
	response, err := c.responses(a, total)
	if err != nil {
		return err
	}
	variance := num.Wide{}
	for i := range a {
		variance = variance.Add(response[i].Times(a[i]))
	}
	if !(variance.Float() > 0) {
		return noSumSpread(items)
	}
	items.share = make([]float64, len(a))
	for i := range a {
		items.share[i] = response[i].Times(a[i]).Div(variance).Float()
	}
	items.variance = math.Ldexp(variance.Float(), 2*items.exponent)
	items.sd = math.Ldexp(math.Sqrt(variance.Float()), items.exponent)
	items.independent = math.Ldexp(math.Sqrt(squares.Float()), items.exponent)
	items.together = math.Ldexp(math.Abs(total.Float()), items.exponent)
	return nil
}

func noSumSpread(items *sumItems) error {
	input := "sds"
	if items.triangular {
		input = "highs"
	}
	return refuse("no-spread", input, "The sum has no spread: every item's weight times its standard deviation is 0, or the correlations cancel them; "+
		"the sum is %s, and nothing more can be said of it.", FormatNumber(items.mean))
}

// responses gives rᵢ = Σρᵢⱼaⱼ; total is Σaⱼ.
func (c *Call) responses(a []float64, total num.Wide) ([]num.Wide, error) {
	out := make([]num.Wide, len(a))
	if matrix, ok := correlations.Given(c); ok {
		rho, err := c.correlationMatrix(matrix.Values, len(a))
		if err != nil {
			return nil, err
		}
		for i := range a {
			for j := range a {
				out[i] = out[i].Add(num.TwoProduct(rho[i*len(a)+j], a[j]))
			}
		}
		return out, nil
	}
	rho := commonCorrelation.Of(c)
	if lowest := -1 / float64(len(a)-1); len(a) > 1 && rho < lowest-matrixTolerance {
		return nil, refuse(matrixKind.Code, "correlation", "No %s can all have correlation %s with one another; for so many the lowest is %s. "+
			"Give a higher correlation, or a matrix of correlations.", plural(len(a), "item"), FormatNumber(rho), brief(lowest))
	}
	shared := total.Times(rho)
	for i := range a {
		own := num.TwoSum(1, -rho).Times(a[i])
		out[i] = shared.Add(own)
	}
	return out, nil
}

// matrixTolerance is how far below 0 rounding may push an eigenvalue of a
// correlation matrix, and how far it may part two equal entries.
const matrixTolerance = 1e-12

// correlationMatrix checks a matrix given row by row: as many rows as items,
// symmetric, diagonal 1, no negative eigenvalue.
func (c *Call) correlationMatrix(rho []float64, m int) ([]float64, error) {
	if commonCorrelation.Of(c) != 0 {
		return nil, c.wrong("correlation", FormatNumber(commonCorrelation.Of(c)), "cannot be given together with correlations", "give one of the two")
	}
	if len(rho) != m*m {
		return nil, c.wrong("correlations", plural(len(rho), "number"), fmt.Sprintf("must be %d for %s: the whole square matrix, row by row", m*m, plural(m, "item")),
			"write its rows one after another, with the ones of the diagonal")
	}
	for i := range m {
		if d := rho[i*m+i]; math.Abs(d-1) > matrixTolerance {
			return nil, refuse(matrixKind.Code, "correlations", "Row %d, column %d of the correlations is %s, but an item's correlation with itself is 1; "+
				"check the order of the numbers.", i+1, i+1, FormatNumber(d))
		}
		for j := range i {
			if x, y := rho[i*m+j], rho[j*m+i]; math.Abs(x-y) > matrixTolerance {
				return nil, refuse(matrixKind.Code, "correlations", "The correlations are not symmetric: row %d, column %d is %s, but row %d, column %d is %s; "+
					"give each pair the same number in both places.", j+1, i+1, FormatNumber(y), i+1, j+1, FormatNumber(x))
			}
		}
	}
	smallest, ok := num.SmallestEigenvalue(rho, m)
	if !ok || smallest < -matrixTolerance {
		return nil, refuse(matrixKind.Code, "correlations", "No quantities can have these correlations (smallest eigenvalue %s, but none may be negative); "+
			"estimate all of them from the same rows, or bring them nearer to 0.", brief(smallest))
	}
	return rho, nil
}
