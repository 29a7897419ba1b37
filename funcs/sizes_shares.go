package funcs

import "halfwidth/funcs/internal/num"

// The power of a test of proportions is a sum over counts, and it does not rise
// steadily with n: whenever the region of rejection loses a count, the power
// drops a little. Two bounds tame this. Let the region be wider, or narrower, by
// one count than the p-value allows: with limits of the region that need not be
// whole the power would rise steadily, and it would lie between the two. So no n
// up to one at which the wider region falls short can hold, and every n from one
// at which the narrower region suffices does hold. Only the n between are looked
// at: one by one, or, where counts are rare, by the runs of n over which the
// region stays the same and the power only rises or only falls.

// sharesTest is a test of one or two proportions.
type sharesTest interface {
	// power of n, with the region of rejection wider by so many counts; narrower
	// where that is negative, and then without its side away from the truth.
	power(n, wider int) float64
	// run is the last of the n', from n on, over which the power only rises or
	// only falls; n itself where runs are short.
	run(n int) int
	// cost of one power, in units of one count looked at.
	cost(n int) float64
	// largest is the largest n that may be planned.
	largest() int
}

// affordable is how much a plan may cost when it goes through n.
const affordable = 2e7

// sharesPlan is the answer of planShares.
type sharesPlan struct {
	n, first int
	excess   int // how far n may lie above the smallest, where n is only a bound
	found    bool
}

// planShares finds the smallest n from which every n' up to 2n holds too, and
// the first n that holds. Where the n between the bounds would cost too much, n
// is the upper bound and first is 0.
func (c *Call) planShares(t sharesTest, wanted, guess float64) (sharesPlan, error) {
	var stopped error
	holds := func(n, wider int) bool {
		if stopped == nil {
			stopped = c.cancelled()
		}
		return stopped != nil || reaches(t.power(n, wider), wanted)
	}
	// The bounds are looked for in steps of 1/4096 of n where going through as many
	// n would already cost too much.
	start, grain := clampPlan(guess, smallestGroup, t.largest()), 1
	if step := start / 4096; float64(step)*t.cost(start) > affordable {
		grain = step
	}
	bound := func(hi, wider int) (n int, found bool) {
		k, found := num.Smallest((smallestGroup+grain-1)/grain, (hi+grain-1)/grain, start/grain, func(k int) bool { return holds(min(k*grain, hi), wider) })
		return min(k*grain, hi), found
	}
	high, found := bound(t.largest(), -1)
	if !found || stopped != nil {
		return sharesPlan{}, stopped
	}
	low, _ := bound(high, +1)
	low = max(smallestGroup, low-grain+1)
	first, short, ok := failures(t, low, high, func(n int) bool { return holds(n, 0) }, func() bool { return stopped != nil })
	if !ok || stopped != nil {
		return sharesPlan{n: high, excess: high - low, found: true}, stopped
	}
	// n is first, or follows a stretch that falls short; it will do when the next
	// stretch lies beyond 2n.
	n := first
	for _, s := range short {
		if s.to < n || s.from > 2*n {
			continue
		}
		n = s.to + 1
	}
	return sharesPlan{n: n, first: first, found: true}, nil
}

// stretch is a stretch of n that fall short.
type stretch struct{ from, to int }

// failures gives the first n from low to high that holds (high does), and the
// stretches below high that fall short. ok is false where that costs too much, or
// once stopped.
func failures(t sharesTest, low, high int, holds func(n int) bool, stopped func() bool) (first int, short []stretch, ok bool) {
	runs := float64(high-low)*t.cost(high) > affordable
	if runs && float64(high-low)/float64(t.run(low)-low+1)*t.cost(high) > affordable {
		return 0, nil, false
	}
	first = high
	var cost float64
	for n, to := low, 0; n < high; n = to + 1 {
		if cost += t.cost(high); cost > affordable || stopped() {
			return 0, nil, false
		}
		to = n
		if runs {
			to = min(t.run(n), high-1)
		}
		begins, ends := holds(n), true
		if ends = begins; to > n {
			ends = holds(to)
		}
		holding := stretch{n, to}
		switch {
		case !begins && !ends:
			short = append(short, stretch{n, to})
			continue
		case !begins: // rises
			from, _ := num.Smallest(n, to, n+(to-n)/2, holds)
			short = append(short, stretch{n, from - 1})
			holding.from = from
		case !ends: // falls
			from, _ := num.Smallest(n, to, n+(to-n)/2, func(n int) bool { return !holds(n) })
			short = append(short, stretch{from, to})
		}
		first = min(first, holding.from)
	}
	return first, short, true
}
