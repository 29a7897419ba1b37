package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// studentized is the law of M/s, where M is a statistic of normal variables of
// known spread (a range, a largest difference) and s = chi/sqrt(df) is
// independent of it. Each tail is the average of the same tail of M at q*s over
// log s, by the trapezoidal rule.
type studentized struct {
	df   float64                             // > 0, may be infinite
	tail func(w float64, upper bool) float64 // P(M <= w) or P(M > w), each for itself
	band float64                             // about how often sd(log M) goes into 1, less 2
}

// scaleNodes holds the tail of M at nodes that do not depend on q, so that a
// quantile needs no more of them than one probability: with s = exp(u) and
// q = base*exp(y) the nodes are w = base*exp(x), and the weight of a node is the
// density of log s at x - y.
//
// Nodes are x = v - exp(-v-3) for evenly spaced v: the slow left tail
// exp(df*u) of few degrees of freedom then ends doubly exponentially, and
// nothing changes near v = 0.
type scaleNodes struct {
	law   studentized
	upper bool
	base  float64
	first float64 // y of the first argument asked for
	step  float64
	tails map[int]float64 // by the node's number in the finest spacing
}

const finestSpacing = 1 << 10

// leastNormal is the least float64 of full length: a tail below it, as the tails of M
// that it is the average of, has no digits left that closer nodes could settle.
const leastNormal = 0x1p-1022

func (n *scaleNodes) node(i int) (x, slope float64) {
	v := float64(float64(i) * (n.step / finestSpacing))
	if n.law.df >= 30 {
		return v, 1
	}
	e := num.Exp(-v - 3)
	return v - e, 1 + e
}

func (n *scaleNodes) tail(i int, x float64) float64 {
	if t, ok := n.tails[i]; ok {
		return t
	}
	t := n.law.tail(n.base*num.Exp(x), n.upper)
	n.tails[i] = t
	return t
}

// middle is the node from which the sum at y goes both ways. The largest term is
// at x = 0 for the first argument asked for, and for others between there and as
// far from there as y has moved.
func (n *scaleNodes) middle(y float64) int {
	v := y - n.first
	if n.law.df < 30 {
		v = min(max(v, -2), 2)
	}
	return int(math.Round(v/n.step)) * finestSpacing
}

// average is the tail of M/s at base*exp(y).
func (n *scaleNodes) average(y float64) float64 {
	if math.IsNaN(y) {
		return y
	}
	peak := 0.0
	side := func(first, stride int) float64 {
		sum := 0.0
		for i := first; ; i += stride {
			x, slope := n.node(i)
			term := num.Exp(n.law.df*scaleExponent(x-y)) * slope
			faded := term == 0 && (x > y) == (stride > 0)
			if term > 0 {
				tail := n.tail(i, x)
				if tail == 0 && n.upper == ((stride > 0) == (n.base > 0)) {
					return sum // the tail is 0 from here on
				}
				term *= tail
			}
			sum += term
			peak = max(peak, term)
			// The terms are log-concave: once they have grown and fallen they
			// stay small, but up to 0 and y they may still grow from nothing.
			passed := stride > 0 && x > max(y, 0) || stride < 0 && x < min(y, 0)
			if faded || (passed || peak > 0) && !(term > peak*1e-18) {
				return sum
			}
		}
	}
	middle, stride := n.middle(y), finestSpacing
	total, density := side(middle, stride)+side(middle-stride, -stride), scaleDensity1(n.law.df)
	for {
		half := stride / 2
		peak = 0
		finer := total + side(middle+half, stride) + side(middle-half, -stride)
		steady := math.Abs(finer-2*total) <= 1e-8*finer
		total, stride = finer, half
		average := density * (total * (n.step * (float64(stride) / finestSpacing)))
		if steady || stride == 1 || average < leastNormal {
			return average
		}
	}
}

// nodes prepares the nodes for arguments near q, which is not 0; none where the
// tail is too small for a float64.
func (s studentized) nodes(q float64, upper bool) *scaleNodes {
	base := q
	band := 2*s.df + float64(s.band*s.band)
	if t := s.tail(q, upper); t < 1e-4 {
		u, largest := s.likeliestLogScale(q, upper)
		if largest < -800 {
			return nil // the tail underflows
		}
		base = q * num.Exp(u)
		band *= max(1, num.Exp(2*u))
	}
	return &scaleNodes{
		law: s, upper: upper, base: base, first: num.Log(q / base),
		step: min(0.15, 0.84/math.Sqrt(band)), tails: make(map[int]float64, 64),
	}
}

// likeliestLogScale is log s where the average at q has its largest part, to
// about the width of that part, and the logarithm of that part: in a far tail
// it is not near 0.
func (s studentized) likeliestLogScale(q float64, upper bool) (u, logPart float64) {
	f := func(u float64) float64 {
		return float64(s.df*scaleExponent(u)) + num.Log(s.tail(q*num.Exp(u), upper))
	}
	move, here := 1/math.Sqrt(2*s.df+20), f(0)
	for math.IsInf(here, -1) && move < 1000 {
		if s.df*max(scaleExponent(move), scaleExponent(-move)) < -800 {
			break // no likely s makes the tail a float64
		}
		if left := f(-move); !math.IsInf(left, -1) {
			u, here = -move, left
		} else if right := f(move); !math.IsInf(right, -1) {
			u, here = move, right
		}
		move *= 2
	}
	for narrow := 1 / math.Sqrt(2*s.df+20); move > narrow/2; {
		left, right := f(u-move), f(u+move)
		switch {
		case left > here:
			u, here = u-move, left
		case right > here:
			u, here = u+move, right
		default:
			move /= 2
		}
	}
	return u, here
}

// probability is P(M/s <= q) or P(M/s > q).
func (s studentized) probability(q float64, upper bool) float64 {
	if s.df > manyDF || q == 0 {
		return s.tail(q, upper)
	}
	n := s.nodes(q, upper)
	if n == nil {
		return 0
	}
	return min(1, n.average(n.first))
}

// solve finds q of the same sign as start whose lower or upper tail is p.
func (s studentized) solve(p float64, upper bool, start float64) float64 {
	target := num.Log(p)
	// For a known spread first, to which each step costs one tail. The nodes then
	// lie where M does, whatever s does to q.
	known := func(y float64) float64 { return num.Log(s.tail(start*num.Exp(y), upper)) - target }
	if s.df > manyDF {
		return start * num.Exp(crossing(known, 0, 0.1, -700, 700, math.Abs(target)))
	}
	start *= num.Exp(crossingWithin(known, 0, 0.1, -700, 700, 0.1/math.Sqrt(s.df+10), 1e-3))
	n := s.nodes(start, upper)
	if n == nil {
		return math.NaN()
	}
	f := func(y float64) float64 { return num.Log(n.average(y)) - target }
	step := min(0.1, 1/math.Sqrt(s.df))
	return n.base * num.Exp(crossing(f, n.first, step, -700, 700, math.Abs(target)))
}
