package rpc

import (
	"fmt"

	"halfwidth/workbook/calculation"
)

// newCells fills the frame of a sheet that is opened.
type newCells struct {
	frame  *calculation.Frame
	room   int // cells that may still be held
	most   int // the limit, for the message
	since  int // cells set since room was looked at
	totals map[uint32]bool
}

func newSheetCells(room, most int) *newCells {
	return &newCells{frame: calculation.NewFrame(), room: room, most: most, totals: map[uint32]bool{}}
}

// lookEvery is how many cells are set between two looks at the room that they
// take: a cell far from the others may take that of thousands.
const lookEvery = 4096

func (n *newCells) look() *Error {
	if n.since++; n.since < lookEvery {
		return nil
	}
	n.since = 0
	return n.full()
}

func (n *newCells) full() *Error {
	if n.frame.Held() > n.room {
		return tooManyCells(n.most)
	}
	return nil
}

func tooManyCells(most int) *Error {
	return &Error{Code: CodeRequestFailed, Message: fmt.Sprintf("The open sheets would hold more than %d cells, the blanks between them counted; close some, or start the server with a higher --max-open-cells.", most)}
}

func (n *newCells) set(row, col int, cell calculation.Cell) *Error {
	if cell == (calculation.Cell{}) {
		if n.frame.At(row, col) != cell {
			return badParams("/cells", "cells", fmt.Sprintf("give %s a value and blank it again", calculation.CellRef{Row: row, Col: col}), "give each cell once")
		}
		return nil
	}
	if cell.Kind == calculation.Number && !cell.Formula {
		n.frame.SetRow(row, calculation.RowFilled)
		n.frame.Column(col).SetNumber(row, calculation.Number, cell.Number)
	} else {
		n.frame.Set(row, col, cell)
	}
	return n.look()
}

func (n *newCells) setText(row, col int, text []byte) *Error {
	id := n.frame.InternBytes(text)
	total, known := n.totals[id]
	if !known {
		total = calculation.StartsLikeTotal(string(text))
		n.totals[id] = total
	}
	flags := calculation.RowFilled
	if total {
		flags |= calculation.RowTotal
	}
	n.frame.SetRow(row, flags)
	n.frame.Column(col).SetText(row, calculation.Text, id)
	return n.look()
}

func (n *newCells) clear(calculation.Area) *Error {
	return badParams("/cells", "cells", "clears a range of a sheet that is only being opened", "leave clear out")
}

// changedCells gathers the changes of a sheet that is open.
type changedCells struct {
	frame   *calculation.Frame
	changes []calculation.Change
	steps   int // cells that clearing may still look at
}

func (c *changedCells) set(row, col int, cell calculation.Cell) *Error {
	c.changes = append(c.changes, calculation.Change{At: calculation.CellRef{Row: row, Col: col}, Value: cell})
	return nil
}

func (c *changedCells) setText(row, col int, text []byte) *Error {
	return c.set(row, col, calculation.Cell{Kind: calculation.Text, Text: string(text)})
}

// clear empties the cells of an area that hold something, also what this
// message has put there before.
func (c *changedCells) clear(area calculation.Area) *Error {
	if area.WholeCols {
		area.LastRow = calculation.MaxRow
	}
	if area.WholeRows {
		area.LastCol = calculation.MaxCol
	}
	within := area
	within.LastRow, within.LastCol = min(area.LastRow, c.frame.LastRow()), min(area.LastCol, c.frame.LastCol())
	if c.steps -= sizeOf(within) + len(c.changes); c.steps < 0 {
		return tooManySteps("/cells")
	}
	for _, before := range c.changes {
		if area.Contains(before.At) && before.Value != (calculation.Cell{}) {
			c.changes = append(c.changes, calculation.Change{At: before.At})
		}
	}
	for col := within.FirstCol; col <= within.LastCol; col++ {
		for row := within.FirstRow; row <= within.LastRow; row++ {
			if c.frame.At(row, col) != (calculation.Cell{}) {
				c.changes = append(c.changes, calculation.Change{At: calculation.CellRef{Row: row, Col: col}})
			}
		}
	}
	return nil
}
