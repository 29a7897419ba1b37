package ooxml

import (
	"fmt"
	"strings"
)

// readWorkbook reads the workbook part: the list of sheets, the defined names
// and the settings that matter to values.
func (b *Book) readWorkbook(related map[string]relation) error {
	part := b.name(b.workbook)
	root, sheetsSeen := false, false
	err := b.walk(b.workbook, func(x *lexer) error {
		if !root {
			if root = true; !x.is("workbook") {
				return &Error{Kind: ErrNotWorkbook, Reason: fmt.Sprintf("the file holds a <%.40s>, not a workbook", x.local), Advice: "name a workbook (.xlsx or .xlsm)"}
			}
			return nil
		}
		if x.depth() != 2 || x.space != spaceMain {
			return nil
		}
		switch string(x.local) {
		case "workbookPr":
			b.date1904 = x.flag("date1904")
		case "workbookProtection":
			b.locked = x.flag("lockStructure")
		case "calcPr":
			b.mode = Calculation{Manual: string(x.attr("calcMode")) == "manual", OnLoad: x.flag("fullCalcOnLoad")}
		case "sheets":
			if sheetsSeen {
				return x.wrong("the list of sheets is given twice")
			}
			sheetsSeen = true
			return b.readSheetList(x, related)
		case "definedNames":
			return b.readNames(x)
		}
		return nil
	})
	if err != nil {
		return err
	}
	if len(b.sheets) == 0 {
		e := damaged("the workbook lists no sheets")
		e.Part = part
		return e
	}
	for _, n := range b.names {
		if n.Sheet >= len(b.sheets) {
			e := damaged(fmt.Sprintf("the defined name %s is for sheet number %d of %d", n.Name, n.Sheet+1, len(b.sheets)))
			e.Part = part
			return e
		}
	}
	return nil
}

// children calls visit at each start tag directly in the current element, which
// holds no text of its own, and reads on to the element's end.
func (x *lexer) children(visit func() error) error {
	depth := x.depth()
	for {
		if err := x.nextIn(depth); err != nil {
			return err
		}
		switch {
		case x.kind == tokenEnd && x.depth() < depth:
			return nil
		case x.kind == tokenStart && x.depth() == depth+1:
			if err := visit(); err != nil {
				return err
			}
		}
	}
}

func (b *Book) readSheetList(x *lexer, related map[string]relation) error {
	used := make(map[int]string)
	return x.children(func() error {
		if !x.is("sheet") {
			return nil
		}
		name, err := x.attrText("name")
		if err != nil {
			return err
		}
		name = string(unescape([]byte(name)))
		fail := func(e *Error) error {
			e.Sheet = name
			return e
		}
		if name == "" {
			return x.wrong("sheet number %d has no name", len(b.sheets)+1)
		}
		if b.SheetIndex(name) >= 0 {
			return fail(damaged("two sheets have this name"))
		}
		id, err := x.attrIn(spaceRelationships, "id")
		if err != nil {
			return err
		}
		r := related[id]
		entry := -1
		if r.target != "" {
			entry = b.find(r.target)
		}
		if entry < 0 {
			return fail(missing("this sheet", r.target))
		}
		if other, ok := used[entry]; ok {
			return fail(damaged("the sheet and the sheet " + other + " share one part"))
		}
		used[entry] = name
		s := Sheet{Name: name, Part: b.container.name(entry), Kind: MacroSheet}
		switch r.kind {
		case "worksheet":
			s.Kind = Worksheet
		case "chartsheet":
			s.Kind = ChartSheet
		case "dialogsheet":
			s.Kind = DialogSheet
		}
		switch string(x.attr("state")) {
		case "hidden":
			s.State = Hidden
		case "veryHidden":
			s.State = VeryHidden
		}
		b.byName[foldName(name)] = len(b.sheets)
		b.sheets = append(b.sheets, s)
		b.entries = append(b.entries, entry)
		return nil
	})
}

func (b *Book) readNames(x *lexer) error {
	return x.children(func() error {
		if !x.is("definedName") {
			return nil
		}
		if len(b.names) == x.limits.Names {
			return beyond(fmt.Sprintf("the workbook has more than %d defined names", x.limits.Names), "Names")
		}
		n := DefinedName{Sheet: -1, Hidden: x.flag("hidden")}
		var err error
		if n.Name, err = x.attrText("name"); err != nil {
			return err
		}
		if n.Sheet, err = x.number("localSheetId", -1); err != nil {
			return err
		}
		if n.Ref, err = x.content(); err != nil {
			return err
		}
		n.Ref = strings.TrimPrefix(strings.TrimSpace(n.Ref), "=")
		b.names = append(b.names, n)
		return nil
	})
}

// readTables reads the tables of all worksheets.
func (b *Book) readTables() error {
	used := make(map[int]bool)
	for i, s := range b.sheets {
		if s.Kind != Worksheet {
			continue
		}
		list, err := b.relations(s.Part)
		if err != nil {
			return place(err, "", "", s.Name)
		}
		for _, r := range list {
			if !r.isOffice || r.kind != "table" {
				continue
			}
			entry := b.find(r.target)
			if r.target == "" || entry < 0 {
				return place(missing("a table of this sheet", r.target), "", "", s.Name)
			}
			if used[entry] {
				return place(damaged("two tables share the part "+b.name(entry)), "", "", s.Name)
			}
			used[entry] = true
			t := Table{Sheet: i}
			if err := b.readTable(entry, &t); err != nil {
				return place(err, "", "", s.Name)
			}
			b.tables = append(b.tables, t)
		}
	}
	return nil
}

func (b *Book) readTable(entry int, t *Table) error {
	root := false
	err := b.walk(entry, func(x *lexer) error {
		switch {
		case !root:
			if root = true; !x.is("table") {
				return x.wrong("the part holds a <%.40s>, not a table", x.local)
			}
			return readTableHead(x, t)
		case x.is("tableColumn") && x.depth() == 3:
			name, err := x.attrText("name")
			t.Columns = append(t.Columns, string(unescape([]byte(name))))
			return err
		}
		return nil
	})
	if width := t.Range.LastCol - t.Range.FirstCol + 1; err == nil && len(t.Columns) != width {
		e := damaged(fmt.Sprintf("the table %s names %d columns, its range %s has %d", t.Name, len(t.Columns), t.Range, width))
		e.Part = b.name(entry)
		return e
	}
	return err
}

func readTableHead(x *lexer, t *Table) error {
	var err error
	if t.Name, err = x.attrText("displayName"); err != nil {
		return err
	}
	if t.Name == "" {
		if t.Name, err = x.attrText("name"); err != nil {
			return err
		}
	}
	t.Name = string(unescape([]byte(t.Name)))
	ref, err := x.attrText("ref")
	if err != nil {
		return err
	}
	var ok bool
	if t.Range, ok = ParseRange(ref); !ok {
		return x.wrong("the table %s has the range %.40q", t.Name, ref)
	}
	if t.HeaderRows, err = x.number("headerRowCount", 1); err != nil {
		return err
	}
	if t.TotalsRows, err = x.number("totalsRowCount", 0); err != nil {
		return err
	}
	if t.HeaderRows+t.TotalsRows > t.Range.LastRow-t.Range.FirstRow+1 {
		return x.wrong("the table %s has more header and totals rows than rows", t.Name)
	}
	return nil
}
