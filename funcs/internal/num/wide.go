package num

import "math"

// Wide is a number carried as the unevaluated sum of two float64: Hi is the
// nearest float64 and Lo what it leaves, about 32 digits together. The basic
// steps are those of Dekker (1971) and Knuth (TAOCP 2, 4.2.2), with an explicit
// fused multiply-add, so that every processor gives the same digits.
type Wide struct{ Hi, Lo float64 }

// TwoSum is a + b without error, whatever the order of their sizes.
func TwoSum(a, b float64) Wide {
	// The conversions keep a product in an argument from being fused.
	a, b = float64(a), float64(b)
	s := a + b
	v := s - a
	return Wide{s, (a - (s - v)) + (b - v)}
}

// quickTwoSum is a + b without error where |a| >= |b| or a is 0.
func quickTwoSum(a, b float64) Wide {
	a, b = float64(a), float64(b)
	s := a + b
	return Wide{s, b - (s - a)}
}

// TwoProduct is a * b without error, short of underflow.
func TwoProduct(a, b float64) Wide {
	p := float64(a * b)
	return Wide{p, math.FMA(a, b, -p)}
}

// Widen makes a float64 a Wide.
func Widen(x float64) Wide { return Wide{x, 0} }

// Float rounds w to a float64.
func (w Wide) Float() float64 { return w.Hi + w.Lo }

// Neg is -w.
func (w Wide) Neg() Wide { return Wide{-w.Hi, -w.Lo} }

// Add is w + v. Terms of opposite sign cost no digits of the larger.
func (w Wide) Add(v Wide) Wide {
	s := TwoSum(w.Hi, v.Hi)
	t := TwoSum(w.Lo, v.Lo)
	s = quickTwoSum(s.Hi, s.Lo+t.Hi)
	return quickTwoSum(s.Hi, s.Lo+t.Lo)
}

// Sub is w - v.
func (w Wide) Sub(v Wide) Wide { return w.Add(v.Neg()) }

// Plus is w + x.
func (w Wide) Plus(x float64) Wide {
	s := TwoSum(w.Hi, x)
	return quickTwoSum(s.Hi, s.Lo+w.Lo)
}

// Mul is w * v.
func (w Wide) Mul(v Wide) Wide {
	p := TwoProduct(w.Hi, v.Hi)
	return quickTwoSum(p.Hi, p.Lo+(float64(w.Hi*v.Lo)+float64(w.Lo*v.Hi)))
}

// Times is w * x.
func (w Wide) Times(x float64) Wide {
	p := TwoProduct(w.Hi, x)
	return quickTwoSum(p.Hi, p.Lo+float64(w.Lo*x))
}

// Div is w / v.
func (w Wide) Div(v Wide) Wide {
	q := w.Hi / v.Hi
	if math.IsInf(q, 0) || math.IsNaN(q) {
		return Wide{q, 0}
	}
	// The remainder w - q v, then one more digit of the quotient from it.
	p := TwoProduct(q, v.Hi)
	r := ((w.Hi - p.Hi) - p.Lo) + (w.Lo - float64(q*v.Lo))
	return quickTwoSum(q, r/v.Hi)
}

// Over is w / x.
func (w Wide) Over(x float64) Wide { return w.Div(Wide{x, 0}) }
