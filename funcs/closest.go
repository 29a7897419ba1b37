package funcs

import (
	"cmp"
	"math/bits"
	"slices"
	"strings"
)

// Closest gives the names nearest to what was written, the likeliest first and
// three at most; none where nothing is near. Case, spaces, hyphens and
// underscores do not count as differences.
func Closest(written string, names []string) []string { return NewNameList(names).Closest(written) }

// NameList is names made ready for Closest to be asked more than once. To search
// a hundred thousand takes some hundredths of a second.
type NameList struct{ list []plainName }

// plainName is a name, and what of it is compared.
type plainName struct {
	name, plain string
	length      int    // of plain, in characters
	letters     uint64 // which characters stand in it, as far as 64 bits tell them apart
}

// NewNameList makes names ready.
func NewNameList(names []string) *NameList {
	n := &NameList{make([]plainName, len(names))}
	for i, name := range names {
		n.list[i] = plainNameOf(name)
	}
	return n
}

var uncounted = strings.NewReplacer(" ", "", "-", "", "_", "", "\u00a0", "")

func plainNameOf(name string) plainName {
	p := plainName{name: name, plain: uncounted.Replace(strings.ToLower(name))}
	for _, r := range p.plain {
		p.length++
		p.letters |= 1 << (r % 64)
	}
	return p
}

// longestSlip is the most characters of names of which the edits are counted,
// which takes as many steps as the product of the lengths.
const longestSlip = 100

// Closest gives the names nearest to what was written, as the function Closest.
// Names in which three or more letters stand as written are near too, behind
// those that a few edits lead to.
func (n *NameList) Closest(written string) []string {
	type candidate struct {
		name     string
		distance int
	}
	w := plainNameOf(written)
	var edits editTable
	var near []candidate // the best three
	for i := range n.list {
		name := &n.list[i]
		short, long := min(w.length, name.length), max(w.length, name.length)
		most := max(1, long/3)
		if len(near) == 3 {
			most = min(most, near[2].distance) // what is farther does not count any more
		}
		// Each edit mends the length by one at most, and one character that the
		// other does not have.
		d := max(long-short, bits.OnesCount64(w.letters&^name.letters), bits.OnesCount64(name.letters&^w.letters))
		if d <= most {
			d = most + 1
			if long <= longestSlip {
				d = edits.distance(w.plain, name.plain, most)
			}
		}
		if d > most {
			if short < 3 || w.letters&^name.letters != 0 || !strings.Contains(name.plain, w.plain) {
				continue
			}
			d = long/3 + 1
		}
		at, _ := slices.BinarySearchFunc(near, candidate{name.name, d}, func(a, b candidate) int {
			return cmp.Or(cmp.Compare(a.distance, b.distance), cmp.Compare(a.name, b.name))
		})
		if at < 3 {
			near = slices.Insert(near, at, candidate{name.name, d})
			near = near[:min(3, len(near))]
		}
	}
	out := make([]string, len(near))
	for i, c := range near {
		out[i] = c.name
	}
	return out
}

// editTable is room for counting edits.
type editTable struct {
	a, b              []rune
	before, last, row []int
}

// distance counts the insertions, deletions, replacements and exchanges of
// neighbours that turn one text into another (optimal string alignment); more
// than most is most + 1. Only prefixes whose lengths differ by most at most are
// looked at.
func (t *editTable) distance(from, to string, most int) int {
	a, b := t.a[:0], t.b[:0]
	for _, r := range from {
		a = append(a, r)
	}
	for _, r := range to {
		b = append(b, r)
	}
	t.a, t.b = a, b
	for _, room := range []*[]int{&t.before, &t.last, &t.row} {
		*room = slices.Grow((*room)[:0], len(b)+1)[:len(b)+1]
	}
	before, last, row := t.before, t.last, t.row
	for j := range last {
		last[j] = j
	}
	leastBefore := 0
	for i := 1; i <= len(a); i++ {
		from, to := max(1, i-most), min(len(b), i+most)
		row[from-1] = most + 1
		if from == 1 {
			row[0] = i
		}
		if to == i+most {
			last[to] = most + 1
		}
		least := row[from-1]
		for j := from; j <= to; j++ {
			change := 1
			if a[i-1] == b[j-1] {
				change = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+change)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
			least = min(least, row[j])
		}
		if min(least, leastBefore) > most { // an exchange goes on from the row before
			return most + 1
		}
		before, last, row, leastBefore = last, row, before, least
	}
	return min(last[len(b)], most+1)
}
