package calculation

import (
	"slices"
	"sync"
)

// rooms keeps the memory of samples that were let go for the next ones: for long
// columns, new memory costs more than reading the values into it.
type rooms struct {
	mu     sync.Mutex
	values [][]float64
	rows   [][]int32
}

// forValues gives room for n values, or more.
func (r *rooms) forValues(n int) []float64 { return fromSpare(r, &r.values, n) }

// forRows gives room for n rows, or more.
func (r *rooms) forRows(n int) []int32 { return fromSpare(r, &r.rows, n) }

// fromSpare takes what is needed of the smallest spare room that is large enough.
func fromSpare[T any](r *rooms, spare *[][]T, n int) []T {
	r.mu.Lock()
	defer r.mu.Unlock()
	best := -1
	for i, s := range *spare {
		if cap(s) >= n && (best < 0 || cap(s) < cap((*spare)[best])) {
			best = i
		}
	}
	if best < 0 {
		return make([]T, 0, n)
	}
	s := (*spare)[best]
	if rest := s[n:cap(s)]; cap(rest) >= leastSpare {
		(*spare)[best] = rest
	} else {
		*spare = slices.Delete(*spare, best, best+1)
	}
	return s[:0:n]
}

// Shorter spare lists, and more of them, are not worth keeping.
const leastSpare, mostSpare = 512, 32

// takeBack takes the memory of a reading that nobody reads any more.
func (r *rooms) takeBack(read *reading) {
	r.mu.Lock()
	defer r.mu.Unlock()
	for _, s := range read.series {
		if cap(s.values) >= leastSpare && len(r.values) < mostSpare {
			r.values = append(r.values, s.values)
		}
		if !s.rows.lent && cap(s.rows.list) >= leastSpare && len(r.rows) < mostSpare {
			r.rows = append(r.rows, s.rows.list)
		}
		s.values, s.rows = nil, rowList{}
	}
}
