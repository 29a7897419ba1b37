package ooxml

import (
	"bytes"
	"fmt"
	"strings"
)

// workbookMap says where in the workbook part new things go.
type workbookMap struct {
	name      string // of the root element, with its prefix
	strict    bool
	relation  string           // the prefix of the relationships namespace, with its colon
	elements  map[string]tagAt // the root's children, by local name
	ends      map[string]int64 // where their end tags start
	after     map[string]int64 // where they end
	calc      []attr           // of calcPr
	calcAt    int64            // where its start tag's name starts
	highestID int              // of the sheets
}

func readWorkbookMap(x *lexer) (*workbookMap, error) {
	m := &workbookMap{elements: make(map[string]tagAt), ends: make(map[string]int64), after: make(map[string]int64)}
	err := walk(x, func(x *lexer) error {
		m.name = string(x.name)
		for _, a := range x.attrs {
			prefix, ok := strings.CutPrefix(string(a.name), "xmlns:")
			uri, _ := x.value(a.value)
			if ok && namespaceOf(uri) == spaceRelationships {
				m.relation = prefix + ":"
			}
			m.strict = m.strict || uri == mainStrict
		}
		return x.children(func() error { return m.child(x) })
	})
	return m, err
}

// child takes note of a child of the root.
func (m *workbookMap) child(x *lexer) error {
	if x.space != spaceMain {
		return x.skip()
	}
	local := string(x.local)
	m.elements[local] = tagAt{from: x.offset(x.start), to: x.offset(x.pos), single: x.single, name: string(x.name)}
	if local == "calcPr" {
		m.calcAt = x.offset(x.start + 1)
		for _, a := range x.attrs {
			m.calc = append(m.calc, attr{name: bytes.Clone(a.name), value: bytes.Clone(a.value), from: a.from, to: a.to})
		}
	}
	err := x.children(func() error {
		if local == "sheets" && x.is("sheet") {
			id, err := x.number("sheetId", 0)
			m.highestID = max(m.highestID, id)
			return err
		}
		return x.skip()
	})
	m.ends[local], m.after[local] = x.offset(x.start), x.offset(x.pos)
	return err
}

// prepareWorkbook makes ready what new sheets and a recalculation on load change
// in the workbook part.
func (b *Book) prepareWorkbook(j *job, changes Changes) error {
	if len(changes.Sheets) == 0 && (!changes.Recalculate || b.mode.OnLoad) {
		return nil
	}
	data, order, err := b.document(b.workbook)
	if err != nil {
		return err
	}
	m, err := readWorkbookMap(dataLexer(data, b.limits))
	if err != nil {
		return place(err, "", b.name(b.workbook), "")
	}
	var patches []patch
	if len(changes.Sheets) > 0 {
		if patches, err = b.sheetPatches(j, m, changes.Sheets); err != nil {
			return err
		}
	}
	if changes.Recalculate && !b.mode.OnLoad {
		patches = append(patches, m.recalculate())
	}
	j.rewriteData(b.workbook, data, order, patches)
	return nil
}

// recalculate sets fullCalcOnLoad (ECMA-376 part 1, 18.2.2).
func (m *workbookMap) recalculate() patch {
	tag, ok := m.elements["calcPr"]
	if !ok {
		b := fmt.Appendf(nil, `<%scalcPr fullCalcOnLoad="1"/>`, prefixOf(m.name))
		return patch{at: m.afterLast("sheets", "functionGroups", "externalReferences", "definedNames"), insert: b}
	}
	for _, a := range m.calc {
		if string(a.name) == "fullCalcOnLoad" {
			return patch{at: m.calcAt + int64(a.to-1-len(a.value)), remove: int64(len(a.value)), insert: []byte("1")}
		}
	}
	return patch{at: m.calcAt + int64(len(tag.name)), insert: []byte(` fullCalcOnLoad="1"`)}
}

// afterLast gives the place after the last of the elements, whose order the
// format fixes.
func (m *workbookMap) afterLast(names ...string) int64 {
	var at int64
	for _, name := range names {
		at = max(at, m.after[name])
	}
	return at
}

func (b *Book) sheetPatches(j *job, m *workbookMap, sheets []NewSheet) ([]patch, error) {
	if b.locked {
		return nil, &Error{Kind: ErrEdit, Reason: "the book is protected against new sheets", Advice: "take off the protection of its structure, or name a sheet that it has"}
	}
	for i, n := range sheets {
		taken := func(name string) bool {
			for _, other := range sheets[:i] {
				if strings.EqualFold(other.Name, name) {
					return true
				}
			}
			return b.SheetIndex(name) >= 0
		}
		if e := n.check(taken); e != nil {
			return nil, e
		}
	}
	ids, err := b.addSheets(j, sheets, m.strict)
	if err != nil {
		return nil, err
	}
	prefix := prefixOf(m.name)
	var list, names []byte
	for i, n := range sheets {
		declare, relation := "", m.relation
		if relation == "" {
			relation = "r:"
			declare = ` xmlns:r="` + relTransitional + `"`
			if m.strict {
				declare = ` xmlns:r="` + relStrict + `"`
			}
		}
		list = fmt.Appendf(list, `<%ssheet name="`, prefix)
		list = appendAttribute(list, n.Name)
		list = fmt.Appendf(list, `" sheetId="%d"%s %sid="%s"/>`, m.highestID+1+i, declare, relation, ids[i])
		for _, d := range n.Names {
			names = fmt.Appendf(names, `<%sdefinedName name="`, prefix)
			names = appendAttribute(names, d.Name)
			names = fmt.Appendf(names, `" localSheetId="%d"`, len(b.sheets)+i)
			if d.Hidden {
				names = append(names, ` hidden="1"`...)
			}
			names = appendEscaped(append(names, '>'), d.Ref)
			names = fmt.Appendf(names, `</%sdefinedName>`, prefix)
		}
	}
	patches := []patch{{at: m.ends["sheets"], insert: list}}
	tag, ok := m.elements["definedNames"]
	switch {
	case len(names) == 0:
	case !ok:
		names = fmt.Appendf(nil, `<%[1]sdefinedNames>%[2]s</%[1]sdefinedNames>`, prefix, names)
		patches = append(patches, patch{at: m.afterLast("sheets", "functionGroups", "externalReferences"), insert: names})
	case tag.single:
		patches = append(patches, unfold(tag, names))
	default:
		patches = append(patches, patch{at: m.ends["definedNames"], insert: names})
	}
	return patches, nil
}
