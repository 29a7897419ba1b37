package calculation

import (
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// newCalcSheet reads the layout of a calculation sheet: blocks, defaults, and
// what is wrong with them. The sheet must be read.
func newCalcSheet(sh *sheet) *calcSheet {
	c := &calcSheet{sheet: sh, results: map[CellRef]resultCell{}}
	sh.calc = c
	for _, p := range sh.shelf.places {
		if p.Kind == Table && p.Sheet == sh.name {
			c.tables = append(c.tables, p)
		}
	}
	isWork := func(text string) bool { _, ok := workOut(Cell{Kind: Text, Text: text}); return ok }
	for _, at := range sh.frame.findTexts(isWork) {
		c.addBlock(at.Row, at.Col)
	}
	for _, b := range c.blocks {
		b.LastRow = c.lastRow(b)
	}
	c.findSettings()
	for _, b := range c.blocks {
		c.readHeader(b)
		c.readRows(b)
	}
	for _, b := range c.blocks {
		c.findLeftRows(b)
	}
	return c
}

// workOut reads a header cell `work out` or `work out: NAME`; the name is empty
// in the first form.
func workOut(cell Cell) (name string, ok bool) {
	if cell.Kind != Text {
		return "", false
	}
	if form, _ := title(cell.Text); form == "work-out" {
		return "", true
	}
	text := headerForm(cell.Text)
	rest, ok := strings.CutPrefix(text, "work out")
	rest = trim(rest)
	if !ok || !strings.HasPrefix(rest, ":") {
		return "", false
	}
	return nameForm(rest[1:]), true
}

// addBlock adds the block of a `work out` cell, if the header cells that adjoin
// it hold a known input or result.
func (c *calcSheet) addBlock(row, work int) {
	first, last := work, work
	for first > 1 && c.isHeader(row, first-1) {
		first--
	}
	for col := first; col < work; col++ {
		if _, ok := workOut(c.at(row, col)); ok {
			first = work // the cells between belong to the block before
		}
	}
	for c.isHeader(row, last+1) {
		if _, ok := workOut(c.at(row, last+1)); ok {
			break
		}
		last++
	}
	all, known := words(nil), false
	for col := first; col <= last; col++ {
		cell := c.at(row, col)
		if cell.Kind != Text || col == work {
			continue
		}
		name, _ := title(cell.Text)
		known = known || strings.HasPrefix(trim(cell.Text), ">") || all.hasInput(name) || all.hasResult(name)
	}
	if !known {
		if first < last {
			c.find(CellRef{row, work}, funcs.Caution, "no-known-header", "No header cell beside `work out` is an input or a result, so nothing was worked out here. "+
				"Head columns with an input, such as sample, and with > and a result, such as > mean.")
		}
		return
	}
	c.blocks = append(c.blocks, &Block{Sheet: c.sheet.name, Header: row, FirstCol: first, LastCol: last, work: work, calc: c})
}

func (c *calcSheet) isHeader(row, col int) bool {
	cell := c.at(row, col)
	return isFilled(cell) || cell.Covered
}

// lastRow finds the last row of a block: before the first that is blank across
// its columns, or that is another block's header.
func (c *calcSheet) lastRow(b *Block) int {
	for row := b.Header + 1; ; row++ {
		blank := true
		for col := b.FirstCol; col <= b.LastCol && blank; col++ {
			blank = !isFilled(c.at(row, col))
		}
		if blank || c.headerBelow(b, row) != nil {
			return row - 1
		}
	}
}

// headerBelow gives the block whose header stands in a row under some column
// of b.
func (c *calcSheet) headerBelow(b *Block, row int) *Block {
	for _, other := range c.blocks {
		if other != b && other.Header == row && other.FirstCol <= b.LastCol && b.FirstCol <= other.LastCol {
			return other
		}
	}
	return nil
}

// blockAt gives the block that a cell lies in, nil where there is none.
func (c *calcSheet) blockAt(row, col int) *Block {
	for _, b := range c.blocks {
		if b.Header <= row && row <= b.LastRow && b.FirstCol <= col && col <= b.LastCol {
			return b
		}
	}
	return nil
}

// readHeader gives the columns of a block their roles.
func (c *calcSheet) readHeader(b *Block) {
	name, _ := workOut(c.at(b.Header, b.work))
	known := words(nil)
	if name != "" {
		b.named = true
		f, err := funcs.Lookup(name)
		if err != nil {
			c.refuseBlock(b, b.work, "unknown-name", ended(fmt.Sprintf("%s names no function: %s", CellRef{b.Header, b.work}, err)))
			b.refused.span, b.refused.instead = afterColon(c.at(b.Header, b.work).Text), closestOf(err)
		} else {
			b.Function, known = f, words(f)
		}
	} else if text := c.at(b.Header, b.work).Text; strings.Contains(text, ":") {
		b.named = true
		c.refuseBlock(b, b.work, "unknown-name", "No function is named after `work out:`. Write one, or leave out the colon and name a function in every row.")
	}
	for col := b.FirstCol; col <= b.LastCol; col++ {
		cell := c.at(b.Header, col)
		bc := BlockColumn{Col: col, Title: trim(cell.Text)}
		if col == b.work {
			bc.Role = WorkColumn
		} else if cell.Kind == Text {
			c.readTitle(b, &bc, known)
		}
		b.Columns = append(b.Columns, bc)
	}
	c.checkColumns(b)
	for _, bc := range b.Columns {
		if bc.Role == OwnColumn && bc.Title != "" {
			c.checkOwn(b, bc, known)
		}
		if bc.Role == InputColumn && slices.Contains(summaries, bc.Name) && b.column(ResultColumn, bc.Name) == nil && c.isEmpty(b, bc.Col) && c.someGives(b, bc.Name) {
			c.find(CellRef{b.Header, bc.Col}, funcs.Information, "missing-result-mark",
				fmt.Sprintf("The column %s is empty. It is an input; write > %s to have the result filled in.", quote(bc.Title), bc.Name))
			c.meant("> " + bc.Name)
		}
	}
}

// summaries are names that are inputs of some functions and results of others.
var summaries = []string{"mean", "sd", "n"}

// someGives reports whether a function that a block names gives a result.
func (c *calcSheet) someGives(b *Block, name string) bool {
	gives := func(f *funcs.Function) bool {
		_, ok := f.Result(name)
		return ok
	}
	if b.Function != nil {
		return gives(b.Function)
	}
	for row := b.Header + 1; row <= b.LastRow; row++ {
		if f, err := funcs.Lookup(nameForm(c.at(row, b.work).Text)); err == nil && gives(f) {
			return true
		}
	}
	return false
}

// readTitle reads one header cell.
func (c *calcSheet) readTitle(b *Block, bc *BlockColumn, known vocabulary) {
	text, isResult := strings.CutPrefix(bc.Title, ">")
	name, unit := title(text)
	bc.Name, bc.Unit = name, unit
	switch {
	case isResult && known.hasResult(name):
		bc.Role = ResultColumn
	case isResult:
		message := fmt.Sprintf("There is no result %s%s, so this column is left alone. %s", quote(name), ofFunction(b.Function), suggest(name, known.results))
		if name == "" {
			message = "No result is named after the > sign, so this column is left alone. Write a result, such as > mean."
		}
		c.find(CellRef{b.Header, bc.Col}, funcs.Caution, "unknown-name", message)
		if name != "" {
			c.meant(funcs.Closest(name, known.results)...)
		}
		bc.Name = ""
	case known.hasInput(name):
		bc.Role = InputColumn
	case name == "label":
		bc.Role = LabelColumn
	case name == "table-sheet":
		bc.Role = TableColumn
	}
}

func ofFunction(f *funcs.Function) string {
	if f == nil {
		return ""
	}
	return " of " + f.Name
}

// refuseBlock keeps why a block is not worked out; the first reason counts.
func (c *calcSheet) refuseBlock(b *Block, col int, code, message string) {
	if b.refused == nil {
		b.refused = &fault{Finding: funcs.Finding{Code: code, Severity: funcs.Refused, Message: message,
			Cells: []string{c.sheet.address(b.Header, col)}}}
	}
}

// checkColumns refuses a block that gives the same input or result twice, and
// finds one without results.
func (c *calcSheet) checkColumns(b *Block) {
	for i, bc := range b.Columns {
		if bc.Role != InputColumn && bc.Role != ResultColumn && bc.Role != TableColumn {
			continue
		}
		first := slices.IndexFunc(b.Columns, func(o BlockColumn) bool { return o.Role == bc.Role && o.Name == bc.Name })
		if first < i {
			one, two := c.sheet.address(b.Header, b.Columns[first].Col), c.sheet.address(b.Header, bc.Col)
			c.refuseBlock(b, bc.Col, "given-twice", fmt.Sprintf("%s stands twice in this block, in %s and %s. Remove or rename one of the columns.",
				quote(bc.Title), one, two))
		}
	}
	if !b.gives() && b.LastRow > b.Header {
		c.find(CellRef{b.Header, b.work}, funcs.Caution, "no-result-column", "This block has no result column, so nothing was worked out. "+
			"Head a column with > and a result, such as > mean, > lower or > note.")
	}
}

// checkOwn points out a user's column that was probably meant as an input or a
// result.
func (c *calcSheet) checkOwn(b *Block, bc BlockColumn, known vocabulary) {
	at := CellRef{b.Header, bc.Col}
	if strings.HasPrefix(bc.Title, ">") {
		return
	}
	switch {
	case known.hasResult(bc.Name) && b.column(ResultColumn, bc.Name) == nil && c.isEmpty(b, bc.Col):
		c.find(at, funcs.Caution, "missing-result-mark", fmt.Sprintf("%s is a result's name, but its column is left alone. Write > %s to have it filled in.", quote(bc.Title), bc.Name))
		c.meant("> " + bc.Name)
	case b.Function != nil && words(nil).hasInput(bc.Name):
		c.find(at, funcs.Caution, "near-miss", fmt.Sprintf("%s is no input of %s, so this column is left alone. Its inputs are %s.",
			quote(bc.Title), b.Function.Name, funcs.AndList(known.inputs)))
	case !known.hasResult(bc.Name):
		if near := known.nearly(bc.Name); near != "" {
			c.find(at, funcs.Caution, "near-miss", fmt.Sprintf("%s is no known name, so this column is left alone. Did you mean %s?", quote(bc.Title), quote(near)))
			c.meant(near)
		}
	}
}

// isEmpty reports whether a column is blank in all rows of its block.
func (c *calcSheet) isEmpty(b *Block, col int) bool {
	for row := b.Header + 1; row <= b.LastRow; row++ {
		if isFilled(c.at(row, col)) {
			return false
		}
	}
	return b.LastRow > b.Header
}

// findSettings reads the `default NAME` cells outside blocks.
func (c *calcSheet) findSettings() {
	known := options()
	const prefix = "default-"
	isDefault := func(text string) bool { return strings.HasPrefix(nameForm(text), prefix) }
	for _, at := range c.sheet.frame.findTexts(isDefault) {
		if c.blockAt(at.Row, at.Col) == nil {
			c.addSetting(at, strings.TrimPrefix(nameForm(c.at(at.Row, at.Col).Text), prefix), known)
		}
	}
}

func (c *calcSheet) addSetting(at CellRef, name string, known []string) {
	value := CellRef{at.Row, at.Col + 1}
	switch {
	case !slices.Contains(known, name) && words(nil).hasInput(name):
		c.find(at, funcs.Caution, "unknown-name", fmt.Sprintf("%s is data and no option, so it has no default. Give it in a column of the block.", quote(name)))
	case !slices.Contains(known, name):
		c.find(at, funcs.Caution, "unknown-name", fmt.Sprintf("There is no option %s, so this default sets nothing. %s", quote(name), suggest(name, known)))
		c.meant(funcs.Closest(name, known)...)
	case !isFilled(c.at(value.Row, value.Col)):
		c.find(at, funcs.Caution, "no-value", fmt.Sprintf("The default %s has no value in %s, so it sets nothing. Write one there, or empty this cell.", name, value))
	case name == decimalMark && !slices.Contains([]string{".", ",", "comma", "point"}, strings.Trim(fold(labelText(c.at(value.Row, value.Col))), `"'`)):
		c.find(value, funcs.Caution, "bad-value", "The decimal mark of text files is . or ,; this default sets nothing.")
	default:
		c.settings = append(c.settings, setting{name, value, at})
	}
}

// setting gives the default of that name for a block: the nearest above it.
func (c *calcSheet) setting(name string, b *Block) *setting {
	for i := len(c.settings) - 1; i >= 0; i-- {
		if s := &c.settings[i]; s.name == name && s.cell.Row < b.Header {
			return s
		}
	}
	return nil
}

// findLeftRows finds rows below the blank row that ends a block which still
// hold a function's name or an expression under its columns.
func (c *calcSheet) findLeftRows(b *Block) {
	var rows []int
	last := c.sheet.frame.lastHeld(b.FirstCol, b.LastCol)
	for row := b.LastRow + 1; row <= last && c.headerBelow(b, row) == nil; row++ {
		if c.looksLeft(b, row) {
			rows = append(rows, row)
		}
	}
	if len(rows) == 0 {
		return
	}
	message := fmt.Sprintf("Row %d was not worked out: it stands below the blank row that ends the block of row %d. Remove the blank row, or give it a header row of its own.", rows[0], b.Header)
	if n := len(rows); n > 1 {
		message = fmt.Sprintf("Rows %d to %d (%s) were not worked out: they stand below the blank row that ends the block of row %d. Remove the blank row, or give them a header row of their own.",
			rows[0], rows[n-1], plural(n, "row"), b.Header)
	}
	c.find(CellRef{rows[0], b.work}, funcs.Caution, "not-worked-out", message)
}

func (c *calcSheet) looksLeft(b *Block, row int) bool {
	for _, bc := range b.Columns {
		cell := c.at(row, bc.Col)
		if cell.Kind != Text || c.blockAt(row, bc.Col) != nil {
			continue
		}
		if bc.Role == WorkColumn && !b.named {
			if _, err := funcs.Lookup(nameForm(cell.Text)); err == nil {
				return true
			}
		}
		if bc.Role == InputColumn {
			if _, err := ParseExpression(cell.Text); err == nil {
				return true
			}
		}
	}
	return false
}
