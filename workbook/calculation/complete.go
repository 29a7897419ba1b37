package calculation

import (
	"context"
	"strings"
)

// BlockAt gives the block that a cell of a calculation sheet lies in, with the
// cell's column and row; the row is nil in the header and where it is no
// calculation. It is false outside blocks.
func (p *Plan) BlockAt(sheet string, at CellRef) (b *Block, column *BlockColumn, row *Row, ok bool) {
	for _, c := range p.calcs {
		if c.sheet.name != sheet {
			continue
		}
		if b = c.blockAt(at.Row, at.Col); b == nil {
			return nil, nil, nil, false
		}
		for _, r := range b.Rows {
			if r.Number == at.Row {
				row = r
			}
		}
		return b, &b.Columns[at.Col-b.FirstCol], row, true
	}
	return nil, nil, nil, false
}

// HeaderNames gives the names of the columns of a sheet, for completion: the
// texts of the first of its rows that has the most of them.
func HeaderNames(ctx context.Context, source Source, sheet string) ([]string, error) {
	var names []string
	_, err := source.Read(ctx, sheet, func(head *Frame) Columns {
		for row := 1; row <= min(HeadRows, head.LastRow()); row++ {
			var texts []string
			for col := 1; col <= head.LastCol(); col++ {
				if cell := head.At(row, col); cell.Kind == Text && trim(cell.Text) != "" {
					texts = append(texts, trim(cell.Text))
				}
			}
			if len(texts) > len(names) {
				names = texts
			}
		}
		return Columns{}
	})
	return names, err
}

// ColumnValues gives the different texts of a column of a sheet, in their order,
// for completion; as many as asked for at most.
func ColumnValues(ctx context.Context, source Source, sheet, column string, most int) ([]string, error) {
	header, at := 0, 0
	frame, err := source.Read(ctx, sheet, func(head *Frame) Columns {
		for row := 1; row <= min(HeadRows, head.LastRow()); row++ {
			for col := 1; col <= head.LastCol(); col++ {
				if text := headerText(head.At(row, col)); text != "" && headerForm(text) == headerForm(column) {
					header, at = row, col
					return Columns{List: []int{col}}
				}
			}
		}
		return Columns{}
	})
	if err != nil || at == 0 {
		return nil, err
	}
	var values []string
	seen := map[string]bool{}
	for row := header + 1; row <= min(frame.LastRow(), header+mostValues) && len(values) < most; row++ {
		cell := frame.At(row, at)
		if text := trim(cell.Text); cell.Kind == Text && text != "" && !seen[fold(text)] {
			seen[fold(text)] = true
			values = append(values, text)
		}
	}
	return values, nil
}

// NameText writes a name as it stands in an expression, in quotes where it
// needs them.
func NameText(name string) string { return nameText(name) }

// WorkOut reads the text of a header cell: `work out`, or `work out: NAME`.
func WorkOut(text string) (name string, ok bool) { return workOut(Cell{Kind: Text, Text: text}) }

// HeaderName reads a header cell's text as a name in its one form, and reports
// whether a result's mark stands before it.
func HeaderName(text string) (name string, isResult bool) {
	text, isResult = strings.CutPrefix(trim(text), ">")
	name, _ = title(text)
	return name, isResult
}

// DefaultName reads a cell `default NAME`.
func DefaultName(text string) (name string, ok bool) {
	return strings.CutPrefix(nameForm(text), "default-")
}

// OptionNames lists the names that a `default NAME` may set.
func OptionNames() []string { return options() }
