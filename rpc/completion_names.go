package rpc

import (
	"context"
	"path"
	"slices"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// nameInText writes a name as it stands in an expression.
func nameInText(name string) string { return calculation.NameText(name) }

// The bounds of what is looked into for completion: workbooks whose sheets are
// listed without having been named, and files whose columns are.
const (
	mostBooks       = 10
	mostTables      = 20
	mostColumnItems = 60 // values of a column
)

// expression offers what may be written next in a sample expression. Names are
// read from the data files.
func (c *completer) expression(ctx context.Context, in funcs.Input) error {
	hole := calculation.HoleAt(c.text(), c.within)
	c.begun = hole.Span
	names := &nameReader{state: c.state, folder: openBeside(c.state.path, c.state.folders)}
	defer names.folder.Close()
	switch hole.Kind {
	case calculation.StartHole:
		if hole.Place != nil {
			c.columns(names.columns(ctx, hole.Place), hole.Place.String())
		} else {
			c.starts(ctx, names, in)
		}
	case calculation.ColumnHole:
		c.columns(names.columns(ctx, hole.Place), "")
	case calculation.PlaceHole:
		c.places(names, hole.Begun)
	case calculation.ValueHole:
		for _, text := range names.values(ctx, hole.Place, hole.Column) {
			c.add(calculation.ValueText(text), itemValue, "a value of "+hole.Column)
		}
	}
	for _, word := range hole.Words {
		if hole.Kind != calculation.StartHole || isCount(in) == (word == "count in" || word == "sum of") {
			c.add(word, itemKeyword, "")
		}
	}
	if in.Infinite && hole.Kind == calculation.StartHole {
		c.add(funcs.Infinite, itemValue, in.Summary)
	}
	return ctx.Err()
}

// isCount reports whether an input takes counts and sums, not samples.
func isCount(in funcs.Input) bool { return in.Kind != funcs.Sample && in.Kind != funcs.Samples }

func (c *completer) columns(names []string, of string) {
	for _, name := range names {
		c.add(nameInText(name), itemField, of)
	}
}

// starts offers columns with their place: minutes in trips.csv.
func (c *completer) starts(ctx context.Context, names *nameReader, in funcs.Input) {
	if isCount(in) {
		return
	}
	for i, file := range names.textFiles() {
		if i >= mostTables || ctx.Err() != nil {
			return
		}
		place := &calculation.PlaceRef{File: file}
		for _, name := range names.columns(ctx, place) {
			c.add(nameInText(name)+" in "+nameInText(file), itemField, file)
		}
	}
}

// places offers files, and the sheets, tables and defined names of workbooks.
func (c *completer) places(names *nameReader, begun string) {
	books := 0
	for _, file := range names.folder.Files() {
		if !isBook(file) {
			c.add(nameInText(file), itemFile, "a text file")
			continue
		}
		if books++; books > mostBooks && !strings.HasPrefix(begun, file) {
			c.add(nameInText(file), itemFile, "a workbook")
			continue
		}
		source, err := names.folder.Open(file, calculation.FileOptions{})
		if err != nil {
			continue // a damaged book is told of once it is named
		}
		for _, p := range source.Places() {
			if p.NoRange != "" || p.Kind == calculation.OtherSheet {
				continue
			}
			c.add((&calculation.PlaceRef{File: file, Name: p.Name}).String(), itemModule, p.Kind.String())
		}
	}
	c.add(calculation.TextSheetName, itemModule, "this sheet")
}

func isBook(file string) bool { return strings.HasPrefix(strings.ToLower(path.Ext(file)), ".xls") }

// nameReader reads names and values from the places of expressions. What cannot
// be read gives none.
type nameReader struct {
	state  *textState
	folder *dataFolder
}

func (n *nameReader) textFiles() []string {
	return slices.DeleteFunc(n.folder.Files(), isBook)
}

// sheet finds the sheet that a place is, or lies on.
func (n *nameReader) sheet(place *calculation.PlaceRef) (calculation.Source, string) {
	if place == nil {
		return nil, ""
	}
	source := n.state.sheet.Source(nil)
	if place.File != "" {
		opened, err := n.folder.Open(place.File, calculation.FileOptions{})
		if err != nil {
			return nil, ""
		}
		source = opened
	}
	places := source.Places()
	for _, p := range places {
		if strings.EqualFold(p.Name, place.Name) || place.Name == "" && len(places) == 1 {
			return source, p.Sheet
		}
	}
	return nil, ""
}

func (n *nameReader) columns(ctx context.Context, place *calculation.PlaceRef) []string {
	source, sheet := n.sheet(place)
	if source == nil {
		return nil
	}
	names, err := calculation.HeaderNames(ctx, source, sheet)
	if err != nil {
		return nil
	}
	return names
}

func (n *nameReader) values(ctx context.Context, place *calculation.PlaceRef, column string) []string {
	source, sheet := n.sheet(place)
	if source == nil {
		return nil
	}
	values, err := calculation.ColumnValues(ctx, source, sheet, column, mostColumnItems)
	if err != nil {
		return nil
	}
	slices.Sort(values)
	return values
}
