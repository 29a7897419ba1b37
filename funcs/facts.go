package funcs

import (
	"math"
	"slices"
	"sync"

	"halfwidth/funcs/internal/num"
)

// Facts remembers what calls worked out of the lists of values of one reading,
// so that calls on the same values work it out once between them. The zero value
// is ready for use, by several calls at a time; the values must not change.
type Facts struct {
	mu sync.Mutex
	of map[listKey]*listFacts
}

// listKey tells one list of values in memory from another.
type listKey struct {
	first *float64
	n     int
}

func keyOf(values []float64) listKey { return listKey{&values[0], len(values)} }

// about gives the facts of a list that is not empty.
func (f *Facts) about(values []float64) *listFacts {
	f.mu.Lock()
	defer f.mu.Unlock()
	key := keyOf(values)
	if f.of[key] == nil {
		if f.of == nil {
			f.of = map[listKey]*listFacts{}
		}
		f.of[key] = &listFacts{values: values}
	}
	return f.of[key]
}

// listFacts is what is known of one ordered list of values, gaps included; each
// fact is worked out when it is first asked for.
type listFacts struct {
	values []float64

	closing  sync.Once
	closed   *listFacts
	summing  sync.Once
	sums     num.Summary
	pairing  sync.Once
	lag      float64
	ranging  sync.Once
	farthest int
	tailing  sync.Once
	tail     tailIndex
	hasTail  bool
}

// gapless is the same list without its gaps; itself where it has none.
func (f *listFacts) gapless() *listFacts {
	f.closing.Do(func() {
		f.closed = f
		if slices.ContainsFunc(f.values, math.IsNaN) {
			f.closed = &listFacts{values: withoutGaps(f.values)}
		}
	})
	return f.closed
}

// moments are those of a list without gaps.
func (f *listFacts) moments() num.Summary {
	f.summing.Do(func() { f.sums = num.Moments(f.values) })
	return f.sums
}

func (f *listFacts) lag1() float64 {
	f.pairing.Do(func() { f.lag = num.Lag1(f.values) })
	return f.lag
}

// far is the place of the value farthest from the mean, the first of several.
func (f *listFacts) far() int {
	f.ranging.Do(func() {
		mean, far := f.gapless().moments().Mean, -1.0
		for i, x := range f.values {
			if d := math.Abs(x - mean); d > far {
				far, f.farthest = d, i
			}
		}
	})
	return f.farthest
}

// hill is the tail index at the confidence of the automatic check.
func (f *listFacts) hill() (tailIndex, bool) {
	f.tailing.Do(func() { f.tail, f.hasTail = hillTail(f.values, tailConfidence) })
	return f.tail, f.hasTail
}

// remember takes up the facts that came with an argument.
func (c *Call) remember(from From) {
	if from.Origin == nil || from.Origin.Facts == nil {
		return
	}
	take := func(values []float64) {
		if len(values) > 0 {
			c.known[keyOf(values)] = from.Origin.Facts.about(values)
		}
	}
	switch v := from.Value.(type) {
	case []float64:
		take(v)
	case []Group:
		for _, g := range v {
			take(g.Values)
		}
	}
}

// facts are those of a list of values: the ones that came with it, or else what
// this call worked out of it.
func (c *Call) facts(values []float64) *listFacts {
	if len(values) == 0 {
		return &listFacts{}
	}
	key := keyOf(values)
	if c.known[key] == nil {
		c.known[key] = &listFacts{values: values}
	}
	return c.known[key]
}

// gapless gives the values that are no gaps, in their order.
func (c *Call) gapless(values []float64) []float64 {
	f := c.facts(values).gapless()
	if len(f.values) > 0 {
		c.known[keyOf(f.values)] = f
	}
	return f.values
}

// moments are those of values without gaps.
func (c *Call) moments(values []float64) num.Summary { return c.facts(values).moments() }

// summarise reduces values without gaps; sd is 0 where there is one.
func (c *Call) summarise(values []float64) summary { return summaryFrom(c.moments(values)) }
