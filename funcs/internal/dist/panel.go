package dist

import (
	"math"
	"sync"
)

const (
	panelNodes   = 16
	panelSettled = 2e-11 // the largest last coefficients of a polynomial in use; those left out are below 1e-12
)

// panel is a polynomial in place of a function on an interval. It is filled when
// it is first asked for, by whichever goroutine comes first: its values do not
// depend on that.
type panel struct {
	fill         sync.Once
	good         bool    // else the polynomial does not follow the function
	end          float64 // the function at the upper end
	coefficients [panelNodes]float64
}

// fit finds the coefficients from the values of f at the zeros of the Chebyshev
// polynomial of degree panelNodes on lo to hi. The last of them tell how far f is
// from the polynomial, and must be small beside 1, or beside f itself where
// relative.
func (p *panel) fit(lo, hi float64, relative bool, f func(float64) float64) {
	middle, half := lo/2+hi/2, hi/2-lo/2
	least := math.Inf(1)
	for i := range panelNodes {
		y := f(middle + float64(half*panelCosine(2*i+1)))
		least = min(least, math.Abs(y))
		for j := range panelNodes {
			p.coefficients[j] += float64(y * panelCosine(j*(2*i+1)) * (2.0 / panelNodes))
		}
	}
	p.coefficients[0] /= 2
	p.end = f(hi)
	if !relative {
		least = 1
	}
	last := math.Abs(p.coefficients[panelNodes-1]) + math.Abs(p.coefficients[panelNodes-2])
	p.good = last <= panelSettled*least // false for NaN
}

// value is the polynomial at x, where the interval goes from -1 to 1, by
// Clenshaw's recurrence.
func (p *panel) value(x float64) float64 {
	b, after := 0.0, 0.0
	for i := panelNodes - 1; i > 0; i-- {
		b, after = float64(2*x*b)-after+p.coefficients[i], b
	}
	return float64(x*b) - after + p.coefficients[0]
}

// panelCosine is cos(pi i/(2 panelNodes)) for i >= 0.
func panelCosine(i int) float64 {
	const quarter = panelNodes
	sign := 1.0
	if i %= 4 * quarter; i > 2*quarter {
		i = 4*quarter - i
	}
	if i > quarter {
		i, sign = 2*quarter-i, -1
	}
	return sign * quarterCosines[i]
}

// quarterCosines are cos(pi i/32).
var quarterCosines = [panelNodes + 1]float64{
	1.0, 0.99518472667219688624, 0.98078528040323044913, 0.95694033573220886494, 0.92387953251128675613,
	0.88192126434835502971, 0.83146961230254523708, 0.77301045336273696081, 0.7071067811865475244, 0.63439328416364549822,
	0.55557023301960222474, 0.47139673682599764856, 0.38268343236508977173, 0.29028467725446236764, 0.19509032201612826785,
	0.098017140329560601994, 0,
}
