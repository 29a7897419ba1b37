package rpc

import (
	"maps"
	"slices"

	"halfwidth/workbook/calculation"
)

// books are the open books by name, as they were when a call came in turn: a
// change makes new ones. Each entry gives a Source for one call, which reads
// from the goroutine of that call alone; or the reason why the book cannot be
// read, as where a change of it was lost.
type books map[string]func() (calculation.Source, *Error)

// source finds the book that a call names; nil where it names none.
func (b books) source(name *string) (calculation.Source, *Error) {
	if name == nil {
		return nil, nil
	}
	open, ok := b[*name]
	if !ok {
		names := slices.Sorted(maps.Keys(b))
		e := badParams("/book", "book", "is "+quoted(*name)+", and no book of that name is open", "open its sheets with sheets/didOpen first, or leave book out")
		if best := near(*name, names); best != "" {
			e.Data.Suggestion = best
		}
		return nil, e
	}
	return open()
}
