package ooxml

import (
	"fmt"
	"path"
	"strings"
)

// NewSheet is a worksheet to add to a book.
type NewSheet struct {
	Name   string
	Rows   [][]Value     // from A1; empty values leave their cell out
	Widths []float64     // of the columns from A on, in characters; 0 leaves the standard width
	Names  []DefinedName // names to add that hold for this sheet only; their Sheet is not read
}

// check refuses names that no sheet may have, or that the book has already, and
// cells beyond the format.
func (n NewSheet) check(taken func(name string) bool) *Error {
	fail := func(reason, advice string) *Error {
		return &Error{Kind: ErrEdit, Sheet: n.Name, Reason: reason, Advice: advice}
	}
	switch {
	case n.Name == "" || utf16Length([]byte(n.Name)) > 31:
		return fail("a sheet's name has 1 to 31 characters", "choose another name")
	case strings.ContainsAny(n.Name, `[]:*?/\`) || strings.HasPrefix(n.Name, "'") || strings.HasSuffix(n.Name, "'") || strings.ContainsFunc(n.Name, func(c rune) bool { return c < ' ' || !isXMLChar(c) }):
		return fail(`a sheet's name must not hold [ ] : * ? / \, nor start or end with '`, "choose another name")
	case strings.EqualFold(n.Name, "History"):
		return fail("no sheet may have this name", "choose another name")
	case taken(n.Name):
		return fail("the book has a sheet of this name", "choose another name, or change that sheet")
	case len(n.Rows) > maxRows:
		return fail(fmt.Sprintf("the sheet has %d rows; a sheet holds %d", len(n.Rows), maxRows), "write fewer rows")
	}
	for i, row := range n.Rows {
		if len(row) > maxColumns {
			return fail(fmt.Sprintf("row %d has %d columns; a sheet holds %d", i+1, len(row), maxColumns), "write fewer columns")
		}
		for k, v := range row {
			if e := v.check(); e != nil {
				e.Sheet, e.Cell = n.Name, CellName(i+1, k+1)
				return e
			}
		}
	}
	return nil
}

// part writes the sheet's XML.
func (n NewSheet) part(strict bool) []byte {
	space := mainTransitional
	if strict {
		space = mainStrict
	}
	b := fmt.Appendf(nil, "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n<worksheet xmlns=\"%s\">", space)
	open := false
	for i, width := range n.Widths {
		if !(width > 0 && width <= 255) {
			continue
		}
		if !open {
			b = append(b, "<cols>"...)
			open = true
		}
		b = fmt.Appendf(b, `<col min="%[1]d" max="%[1]d" width="%.2[2]f" customWidth="1"/>`, i+1, width)
	}
	if open {
		b = append(b, "</cols>"...)
	}
	b = append(b, "<sheetData>"...)
	for i, row := range n.Rows {
		var cells []byte
		for k, v := range row {
			cells = v.appendCell(cells, "", i+1, k+1, 0)
		}
		if cells != nil {
			b = fmt.Appendf(b, `<row r="%d">%s</row>`, i+1, cells)
		}
	}
	return append(b, "</sheetData></worksheet>"...)
}

// addSheets adds the parts of new sheets and says so in the workbook's
// relationships and in the content types. It gives the id of each relationship.
func (b *Book) addSheets(j *job, sheets []NewSheet, strict bool) ([]string, error) {
	if len(sheets) == 0 {
		return nil, nil
	}
	workbook := b.name(b.workbook)
	relations := b.find(relationsPart(workbook))
	types := b.find("[Content_Types].xml")
	if types < 0 {
		return nil, missing("the content types", "")
	}
	names := b.freeNames(workbook, len(sheets))
	relationType := relTransitional + "/worksheet"
	if strict {
		relationType = relStrict + "/worksheet"
	}
	taken := make(map[string]bool)
	list, err := b.container.relations(workbook)
	if err != nil {
		return nil, err
	}
	for _, r := range list {
		taken[strings.ToLower(r.id)] = true
	}
	ids := make([]string, 0, len(sheets))
	for n := 1; len(ids) < len(sheets); n++ {
		if id := fmt.Sprintf("rId%d", n); !taken[strings.ToLower(id)] {
			ids = append(ids, id)
		}
	}
	err = b.extend(j, relations, spacePackage, "Relationships", func(dst []byte, prefix string) []byte {
		for i, name := range names {
			dst = fmt.Appendf(dst, `<%sRelationship Id="%s" Type="%s" Target="/`, prefix, ids[i], relationType)
			dst = append(appendAttribute(dst, name), `"/>`...)
		}
		return dst
	})
	if err != nil {
		return nil, err
	}
	err = b.extend(j, types, spaceContentTypes, "Types", func(dst []byte, prefix string) []byte {
		for _, name := range names {
			dst = fmt.Appendf(dst, `<%sOverride PartName="/`, prefix)
			dst = append(appendAttribute(dst, name), `" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/>`...)
		}
		return dst
	})
	if err != nil {
		return nil, err
	}
	for i, sheet := range sheets {
		j.add = append(j.add, newPart{names[i], sheet.part(strict)})
	}
	return ids, nil
}

// freeNames gives names for new sheet parts, in the folder of sheets beside the
// workbook part.
func (b *Book) freeNames(workbook string, count int) []string {
	dir := path.Dir(path.Clean("/" + slashes(workbook))[1:])
	var names []string
	for n := 1; len(names) < count; n++ {
		if name := path.Join(dir, fmt.Sprintf("worksheets/sheet%d.xml", n)); b.find(name) < 0 {
			names = append(names, name)
		}
	}
	return names
}

// extend adds XML before the end of a part's root element.
func (b *Book) extend(j *job, entry int, space namespace, root string, add func(dst []byte, prefix string) []byte) error {
	data, order, err := b.document(entry)
	if err != nil {
		return err
	}
	x := dataLexer(data, b.limits)
	var tag tagAt
	for {
		if err := x.next(); err != nil {
			return place(err, "", b.name(entry), "")
		}
		switch {
		case x.kind == tokenEOF:
			return nil
		case x.kind == tokenStart && x.depth() == 1:
			if x.space != space || string(x.local) != root {
				return place(x.wrong("the part holds a <%.40s>, not <%s>", x.local, root), "", b.name(entry), "")
			}
			tag = tagAt{to: x.offset(x.pos), single: x.single, name: string(x.name)}
		case x.kind == tokenEnd && x.depth() == 0:
			content := add(nil, prefixOf(tag.name))
			p := patch{at: x.offset(x.start), insert: content}
			if tag.single {
				p = unfold(tag, content)
			}
			j.rewriteData(entry, data, order, []patch{p})
		}
	}
}
