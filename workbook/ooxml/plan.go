package ooxml

import (
	"cmp"
	"errors"
	"fmt"
	"iter"
	"slices"
	"strings"
)

// planner goes along with a scan and turns edits into patches of the part's
// bytes. Its methods on a nil planner do nothing, for scans without edits.
type planner struct {
	asked   []Edit
	edits   []Edit      // in order of rows, then columns
	known   *knownSheet // what an earlier scan found; nil without one
	text    func(index int) (string, error)
	rows    []editRow
	byRow   map[int]int // index in rows
	passed  int         // rows below it are at or before the greatest row met so far
	columns []columnStyle

	current *editRow
	tag     tagAt // of the current row
	found   []bool
	before  []int64 // by edit: where its cell is to be added, -1 for the row's end
	next    int     // edits of the current row below it are left of a column met so far

	dataTag    tagAt
	dataEnd    int64
	hasData    bool
	size       Range // the dimension
	sizeAt     int64 // where it stands in the part
	sizeLength int64 // 0 if there is none to grow
	patches    []patch
	changed    []int // the edits that change their cell
}

// editRow is a row with edits[from:to].
type editRow struct {
	row, from, to int
	found         bool
	before        int64 // where the row is to be added, -1 for the end of the data
}

func newPlanner(edits []Edit, text func(index int) (string, error)) (*planner, error) {
	p := &planner{asked: slices.Clone(edits), edits: slices.Clone(edits), text: text, byRow: make(map[int]int), found: make([]bool, len(edits)), before: make([]int64, len(edits))}
	slices.SortStableFunc(p.edits, func(a, b Edit) int { return cmp.Or(cmp.Compare(a.Row, b.Row), cmp.Compare(a.Col, b.Col)) })
	for i, e := range p.edits {
		err := e.Value.check()
		switch {
		case e.Row < 1 || e.Row > maxRows || e.Col < 1 || e.Col > maxColumns:
			err = &Error{Kind: ErrEdit, Reason: fmt.Sprintf("there is no cell in row %d, column %d", e.Row, e.Col), Advice: "write to a cell from A1 to XFD1048576"}
		case err != nil:
			err.Cell = CellName(e.Row, e.Col)
		case i > 0 && e.Row == p.edits[i-1].Row && e.Col == p.edits[i-1].Col:
			err = &Error{Kind: ErrEdit, Cell: CellName(e.Row, e.Col), Reason: "two values are to be written to this cell", Advice: "write one"}
		}
		if err != nil {
			return nil, err
		}
		p.before[i] = -1
		if i == 0 || e.Row != p.edits[i-1].Row {
			p.byRow[e.Row] = len(p.rows)
			p.rows = append(p.rows, editRow{row: e.Row, from: i, before: -1})
		}
		p.rows[len(p.rows)-1].to = i + 1
	}
	return p, nil
}

// errPlanned ends a scan that has met all it looked for, in a sheet that was
// scanned to its end before.
var errPlanned = errors.New("all edits are planned")

// over tells whether no row with edits can follow.
func (p *planner) over() bool {
	return p != nil && p.known != nil && p.known.inOrder && p.passed == len(p.rows)
}

// answers tells whether the edits are those that were planned, or those of them
// that change their cell.
func (p *planner) answers(edits []Edit) bool {
	return p != nil && (slices.Equal(edits, p.asked) || slices.Equal(edits, p.changes()))
}

// changes are the edits that change their cell, in order of rows and columns.
func (p *planner) changes() []Edit {
	list := make([]Edit, len(p.changed))
	for i, k := range p.changed {
		list[i] = p.edits[k]
	}
	return list
}

// wants tells whether the row has edits.
func (p *planner) wants(row int) bool {
	if p == nil {
		return false
	}
	_, ok := p.byRow[row]
	return ok
}

// dimension takes note of the sheet's declared size. The current token is its
// start tag.
func (p *planner) dimension(x *lexer) {
	if p == nil {
		return
	}
	for _, a := range x.attrs {
		if string(a.name) != "ref" {
			continue
		}
		if r, ok := ParseRange(string(a.value)); ok {
			p.size = r
			p.sizeLength = int64(len(a.value))
			p.sizeAt = x.offset(x.start+1+a.to-1) - p.sizeLength
		}
	}
}

// startRow takes note of a row and tells whether it has edits. A missing row
// goes before the first row with a greater number.
func (p *planner) startRow(number int, tag tagAt) bool {
	for p.passed < len(p.rows) && p.rows[p.passed].row < number {
		p.rows[p.passed].before = tag.from
		p.passed++
	}
	p.current = nil
	if i, ok := p.byRow[number]; ok {
		p.current = &p.rows[i]
		p.current.found = true
		p.tag = tag
		p.next = p.current.from
	}
	return p.current != nil
}

// cell plans the edit of a cell that the general path has just read. A missing
// cell goes before the first cell of its row with a greater column.
func (p *planner) cell(s *scanner, col int) error {
	if p.current == nil {
		return nil
	}
	from, to := s.offset(s.keep), s.offset(s.pos)
	for p.next < p.current.to && p.edits[p.next].Col < col {
		p.before[p.next] = from
		p.next++
	}
	i, ok := slices.BinarySearchFunc(p.edits[p.current.from:p.current.to], col, func(e Edit, col int) int { return cmp.Compare(e.Col, col) })
	if !ok {
		return nil
	}
	i += p.current.from
	p.found[i] = true
	if s.current.Formula {
		return &Error{Kind: ErrEdit, Reason: "the cell holds a formula", Advice: "leave it out, or delete the formula first"}
	}
	same, err := p.holds(s, p.edits[i].Value)
	if err != nil || same {
		return err
	}
	b, err := rewriteCell(s, p.edits[i].Value)
	if err != nil {
		return err
	}
	p.changed = append(p.changed, i)
	p.patches = append(p.patches, patch{at: from, remove: to - from, insert: b})
	return nil
}

// holds tells whether the cell that was read holds the value, however it is
// spelled.
func (p *planner) holds(s *scanner, v Value) (bool, error) {
	c, text := &s.current, s.scratch
	if !c.Saved {
		return v.kind == valueEmpty, nil
	}
	switch c.Type {
	case TypeNumber:
		x, ok := parseNumber(trimSpace(text))
		return ok && v.kind == valueNumber && x == v.number, nil
	case TypeBool:
		return v.kind == valueBool && c.Number == v.number, nil
	case TypeInline, TypeString:
		return v.kind == valueText && string(text) == v.text, nil
	case TypeShared:
		if p.text == nil || v.kind == valueNumber || v.kind == valueBool {
			return false, nil
		}
		held, err := p.text(int(c.Index))
		return held == v.text, err
	}
	return false, nil
}

// endRow adds the cells that the row lacks. end is where its end tag starts.
func (p *planner) endRow(end int64) {
	if p == nil || p.current == nil {
		return
	}
	prefix := prefixOf(p.tag.name)
	var inSingle []byte
	for i := p.current.from; i < p.current.to; i++ {
		e := p.edits[i]
		if p.found[i] || e.Value.kind == valueEmpty {
			continue
		}
		style := p.tag.style
		if style < 0 {
			style = p.columnStyle(e.Col)
		}
		cell := e.Value.appendCell(nil, prefix, e.Row, e.Col, style)
		p.changed = append(p.changed, i)
		at := p.before[i]
		if at < 0 {
			at = end
		}
		if p.tag.single {
			inSingle = append(inSingle, cell...)
		} else {
			p.patches = append(p.patches, patch{at: at, insert: cell})
		}
	}
	if len(inSingle) > 0 {
		p.patches = append(p.patches, unfold(p.tag, inSingle))
	}
	p.current = nil
}

// unfold gives an element that is one tag a content.
func unfold(tag tagAt, content []byte) patch {
	b := append([]byte{'>'}, content...)
	return patch{at: tag.to - 2, remove: 2, insert: fmt.Appendf(b, "</%s>", tag.name)}
}

func prefixOf(name string) string { return name[:strings.IndexByte(name, ':')+1] }

func (p *planner) columnStyle(col int) int {
	for _, c := range p.columns {
		if c.first <= col && col <= c.last {
			return c.style
		}
	}
	return 0
}

// endData takes note of where the sheet's data stood. end is where its end tag
// starts.
func (p *planner) endData(tag tagAt, end int64) {
	if p != nil {
		p.dataTag, p.dataEnd, p.hasData = tag, end, true
	}
}

// finish adds the missing rows, grows the dimension, and refuses edits of cells
// that belong to others.
func (p *planner) finish(facts *SheetFacts) error {
	if err := p.refuse(facts); err != nil {
		return err
	}
	var inSingle []byte
	for i := range p.rows {
		r := &p.rows[i]
		b := p.newRow(r)
		switch {
		case b == nil:
		case !p.hasData:
			return damaged("the sheet has no place for cells")
		case p.dataTag.single:
			inSingle = append(inSingle, b...)
		case r.before >= 0:
			p.patches = append(p.patches, patch{at: r.before, insert: b})
		default:
			p.patches = append(p.patches, patch{at: p.dataEnd, insert: b})
		}
	}
	if len(inSingle) > 0 {
		p.patches = append(p.patches, unfold(p.dataTag, inSingle))
	}
	slices.Sort(p.changed)
	p.growDimension()
	slices.SortStableFunc(p.patches, func(a, b patch) int {
		return cmp.Or(cmp.Compare(a.at, b.at), cmp.Compare(a.remove, b.remove))
	})
	return nil
}

// newRow writes a row that the sheet lacks; nil where it needs none.
func (p *planner) newRow(r *editRow) []byte {
	if r.found {
		return nil
	}
	prefix := prefixOf(p.dataTag.name)
	var cells []byte
	for i := r.from; i < r.to; i++ {
		if e := p.edits[i]; e.Value.kind != valueEmpty {
			cells = e.Value.appendCell(cells, prefix, e.Row, e.Col, p.columnStyle(e.Col))
			p.changed = append(p.changed, i)
		}
	}
	if cells == nil {
		return nil
	}
	return fmt.Appendf(nil, `<%[1]srow r="%[2]d">%[3]s</%[1]srow>`, prefix, r.row, cells)
}

func (p *planner) growDimension() {
	if p.sizeLength == 0 {
		return
	}
	size := p.size
	for _, i := range p.changed {
		if e := p.edits[i]; e.Value.kind != valueEmpty {
			size.FirstRow, size.LastRow = min(size.FirstRow, e.Row), max(size.LastRow, e.Row)
			size.FirstCol, size.LastCol = min(size.FirstCol, e.Col), max(size.LastCol, e.Col)
		}
	}
	if size != p.size {
		p.patches = append(p.patches, patch{at: p.sizeAt, remove: p.sizeLength, insert: []byte(size.String())})
	}
}

// refuse finds edits inside the range of an array formula, or inside a merged
// range other than at its first cell.
func (p *planner) refuse(facts *SheetFacts) error {
	if err := p.refuseIn(facts.Merged.All(), true, "the cell lies inside the merged range %s", "write to its first cell, or unmerge the range"); err != nil {
		return err
	}
	return p.refuseIn(slices.Values(facts.Arrays), false, "the cell lies in the range %s of one array formula", "leave it out, or delete the formula first")
}

// refuseIn goes down the rows with edits and keeps the ranges that reach the
// row. Ranges that do not overlap, as in every sound sheet, are no more than a
// row has columns.
func (p *planner) refuseIn(all iter.Seq[Range], first bool, reason, advice string) error {
	if len(p.rows) == 0 {
		return nil
	}
	var list []Range
	for r := range all {
		if r.FirstRow <= p.rows[len(p.rows)-1].row && r.LastRow >= p.rows[0].row {
			list = append(list, r)
		}
	}
	slices.SortFunc(list, func(a, b Range) int { return cmp.Compare(a.FirstRow, b.FirstRow) })
	var reach []Range
	for _, row := range p.rows {
		reach = slices.DeleteFunc(reach, func(r Range) bool { return r.LastRow < row.row })
		for len(list) > 0 && list[0].FirstRow <= row.row {
			if list[0].LastRow >= row.row {
				reach = append(reach, list[0])
			}
			list = list[1:]
		}
		if len(reach) > maxColumns {
			return damaged(fmt.Sprintf("merged ranges or array formulas overlap in row %d", row.row))
		}
		for _, e := range p.edits[row.from:row.to] {
			for _, r := range reach {
				if r.Contains(e.Row, e.Col) && !(first && e.Row == r.FirstRow && e.Col == r.FirstCol) {
					return &Error{Kind: ErrEdit, Cell: CellName(e.Row, e.Col), Reason: fmt.Sprintf(reason, r), Advice: advice}
				}
			}
		}
	}
	return nil
}
