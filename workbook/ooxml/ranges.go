package ooxml

import "iter"

// Ranges is a list of ranges, of which a hostile sheet may have a million: it
// grows a piece at a time, since to lay one long list anew would cost more than
// to read them.
type Ranges struct {
	pieces [][]Range
	n      int
}

const rangesInPiece = 1024

func (r *Ranges) add(a Range) {
	if r.n%rangesInPiece == 0 {
		size := rangesInPiece
		if r.n == 0 {
			size = 8 // most sheets have few
		}
		r.pieces = append(r.pieces, make([]Range, 0, size))
	}
	last := len(r.pieces) - 1
	r.pieces[last] = append(r.pieces[last], a)
	r.n++
}

// Len is the number of ranges.
func (r *Ranges) Len() int { return r.n }

// All gives the ranges in the order of the file.
func (r *Ranges) All() iter.Seq[Range] {
	return func(yield func(Range) bool) {
		for _, piece := range r.pieces {
			for _, a := range piece {
				if !yield(a) {
					return
				}
			}
		}
	}
}
