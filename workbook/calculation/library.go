package calculation

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// fault is something that keeps an expression or a row from being answered, or
// that should be known about it.
type fault struct {
	funcs.Finding
	span    Span     // in the expression or the cell's text; empty for the whole
	tail    bool     // the message goes on from the input's name
	instead []string // what may have been meant by the span
}

// library reads the sheets that expressions name, each of them once.
type library struct {
	own     *shelf // the book of the calculation sheet; nil where there is none
	files   map[fileKey]*shelf
	order   []*sheet    // sheets asked for, in the order in which they were first named
	options FileOptions // of the block that is being read
	asking  string      // the calculation sheet that is being read; empty where there is none
}

// fileKey is a file together with how it is read.
type fileKey struct {
	name    string
	options FileOptions
}

// shelf is an open Source.
type shelf struct {
	file   string // as written in expressions; "" for the book itself
	source Source
	places []Place
	sheets map[string]*sheet

	folded  map[string][]Place // by folded name, made when the first is looked up
	offered []string           // names to offer for unknown ones, made when one is met
	unknown int                // how many of them there were
	err     error              // why the file cannot be read
}

// sheet is one sheet of a shelf. Expressions say by want what they need of it;
// then it is read.
type sheet struct {
	shelf *shelf
	name  string
	label string // as it stands before the exclamation mark of an address
	wants []func(head *Frame) Columns
	frame *Frame
	err   error
	calc  *calcSheet // the calculation sheet that stands on it, or nil
	// headers is the columns of each text, of the rows looked at for headers.
	headers map[int]map[string][]int
	facts   facts
}

// located is a place that was found.
type located struct {
	sheet *sheet
	place Place
}

func newLibrary(own Source) *library {
	lib := &library{files: map[fileKey]*shelf{}}
	if own != nil {
		lib.own = newShelf("", own)
	}
	return lib
}

func newShelf(file string, source Source) *shelf {
	return &shelf{file: file, source: source, places: source.Places(), sheets: map[string]*sheet{}}
}

// sheet gives the sheet of that name, as the Source spells it.
func (s *shelf) sheet(name string) *sheet {
	if sh, ok := s.sheets[name]; ok {
		return sh
	}
	label := (&PlaceRef{Name: name}).String()
	if s.file != "" {
		ref := PlaceRef{File: s.file, Name: name}
		if s.sheetCount() == 1 {
			ref.Name = ""
		}
		label = ref.String()
	} else if _, ok := ParseArea(name); ok {
		label = quote(name)
	}
	sh := &sheet{shelf: s, name: name, label: label}
	s.sheets[name] = sh
	return sh
}

func (s *shelf) sheetCount() int {
	n := 0
	for _, p := range s.places {
		if p.Kind == Sheet {
			n++
		}
	}
	return n
}

// address writes a cell with its sheet.
func (sh *sheet) address(row, col int) string { return sh.label + "!" + CellRef{row, col}.String() }

// names lists the names of the places, of one kind or of all, each once.
func (s *shelf) names(kinds ...PlaceKind) []string {
	var out []string
	seen := map[string]bool{}
	for _, p := range s.places {
		if (len(kinds) == 0 || slices.Contains(kinds, p.Kind)) && !p.empty() && !seen[p.Name] {
			seen[p.Name] = true
			out = append(out, p.Name)
		}
	}
	return out
}

// locate finds what a name after `in` stands for.
func (lib *library) locate(ref *PlaceRef) (located, *fault) {
	sh, f := lib.shelfOf(ref)
	if f != nil {
		return located{}, f
	}
	name := ref.Name
	if ref.File != "" && name == "" {
		sheets := sh.names(Sheet)
		if len(sheets) != 1 {
			return located{}, unknownPlace(ref.Span, fmt.Sprintf("The file %s has %s", ref.File, plural(len(sheets), "sheet")),
				"Name one after a slash: "+(&PlaceRef{File: ref.File, Name: firstOr(sheets, "Trips")}).String()+".")
		}
		name = sheets[0]
	}
	asking := ""
	if sh == lib.own {
		asking = lib.asking
	}
	found := sh.called(name, asking)
	switch {
	case len(found) == 1 && found[0].Kind == OtherSheet:
		return located{}, unknownPlace(ref.Span, fmt.Sprintf("%s is %s, without cells", quote(name), OtherSheet), "Name a worksheet.")
	case len(found) == 1 && found[0].NoRange != "":
		return located{}, unknownPlace(ref.Span, fmt.Sprintf("%s is a defined name for %.60s, which is not one range of a sheet", quote(name), found[0].NoRange), "Let it stand for one, or name the sheet.")
	case len(found) == 1:
		return located{sh.sheet(found[0].Sheet), found[0]}, nil
	case len(found) > 1:
		kinds := make([]string, len(found))
		for i, p := range found {
			kinds[i] = p.Kind.String()
			switch {
			case p.Only != "":
				kinds[i] += " of the sheet " + p.Only
			case p.Kind != Sheet && p.Sheet != "":
				kinds[i] += " on " + p.Sheet
			}
		}
		return located{}, unknownPlace(ref.Span, fmt.Sprintf("%s is the name of %s", quote(name), funcs.AndList(kinds)), "Rename one of them.")
	case ref.File == "" && fileEnd(name) == len(name):
		return lib.locate(&PlaceRef{File: name, HeaderRow: ref.HeaderRow, Span: ref.Span})
	}
	if sh.offered == nil {
		sh.offered = sh.names()
		sh.offered = sh.offered[:min(len(sh.offered), mostOffered)]
	}
	if sh.unknown++; sh.unknown > mostUnknown {
		sh.offered = sh.offered[:min(len(sh.offered), mostNamed)]
	}
	f = unknownPlace(ref.Span, fmt.Sprintf("There is no sheet, table or defined name %s%s", quote(name), inFile(ref.File)), suggest(name, sh.offered))
	for _, near := range funcs.Closest(name, sh.offered) {
		f.instead = append(f.instead, (&PlaceRef{File: ref.File, Name: near}).String())
	}
	return located{}, f
}

// called gives the places of a name, seen from a sheet. Of defined names of one
// name, that of the sheet itself hides that of the book, which hides those of
// other sheets, as spreadsheet programs have it. One that stands for no range is
// found where nothing else is.
func (s *shelf) called(name, from string) []Place {
	if s.folded == nil {
		s.folded = make(map[string][]Place, len(s.places))
		for _, p := range s.places {
			s.folded[fold(p.Name)] = append(s.folded[fold(p.Name)], p)
		}
	}
	rank := func(p Place) int {
		switch p.Only {
		case from:
			return 2
		case "":
			return 1
		}
		return 0
	}
	best := 0
	found := slices.Clone(s.folded[fold(name)])
	for _, p := range found {
		if p.Kind == DefinedName {
			best = max(best, rank(p))
		}
	}
	found = slices.DeleteFunc(found, func(p Place) bool { return p.Kind == DefinedName && rank(p) < best })
	if !slices.ContainsFunc(found, func(p Place) bool { return !p.empty() }) {
		return found[:min(1, len(found))]
	}
	return slices.DeleteFunc(found, Place.empty)
}

// empty tells whether nothing can be found in a place.
func (p Place) empty() bool { return p.NoRange != "" || p.Kind == OtherSheet }

// An unknown name is compared with mostOffered others, from the second hundred of
// unknown ones on with a few: whatever takes so many is no slip of the pen, and
// the comparison of thousands with thousands takes long.
const (
	mostOffered = 500
	mostUnknown = 100
	mostNamed   = 8
)

func firstOr(list []string, otherwise string) string {
	if len(list) > 0 {
		return list[0]
	}
	return otherwise
}

func inFile(file string) string {
	if file == "" {
		return ""
	}
	return " in " + file
}

// suggest words which names exist: the closest, or the first few.
func suggest(name string, names []string) string {
	if near := funcs.Closest(name, names); len(near) > 0 {
		return "Did you mean " + funcs.OrList(quoteAll(near)) + "?"
	}
	if len(names) == 0 {
		return "There is none at all."
	}
	const most = 8
	if len(names) > most {
		return "Names are " + strings.Join(names[:most], ", ") + " and others."
	}
	return "Names are " + funcs.AndList(names) + "."
}

func unknownPlace(span Span, what, advice string) *fault {
	return &fault{Finding: funcs.Finding{Code: "unknown-name", Severity: funcs.Refused, Message: ended(what) + " " + advice}, span: span}
}

// sentence makes a clause a sentence.
func sentence(s string) string {
	r := firstRune(s)
	return ended(strings.ToUpper(string(r)) + s[len(string(r)):])
}

// ended gives a clause its full stop, unless it ends in a mark already.
func ended(s string) string {
	if strings.HasSuffix(s, "?") || strings.HasSuffix(s, ".") {
		return s
	}
	return s + "."
}

// shelfOf gives the source that a place is in: the book itself, or a file.
func (lib *library) shelfOf(ref *PlaceRef) (*shelf, *fault) {
	if ref.File == "" {
		if lib.own == nil && fileEnd(ref.Name) == len(ref.Name) && ref.Name != "" {
			return lib.shelfOf(&PlaceRef{File: ref.Name, Span: ref.Span})
		}
		if lib.own == nil {
			return nil, unknownPlace(ref.Span, "No workbook is open, so there is no place "+quote(ref.Name), "Name a file, such as trips.csv or other-book.xlsx/Trips.")
		}
		return lib.own, nil
	}
	sh, ok := lib.files[fileKey{ref.File, lib.options}]
	if !ok {
		sh = &shelf{file: ref.File}
		if opener := lib.opener(); opener == nil {
			sh.err = fmt.Errorf("cannot be read here")
		} else if source, err := opener.Beside(ref.File, lib.options); err != nil {
			sh.err = err
		} else {
			sh = newShelf(ref.File, source)
		}
		lib.files[fileKey{ref.File, lib.options}] = sh
	}
	if sh.err != nil {
		return nil, &fault{Finding: funcs.Finding{Code: "unreadable-file", Severity: funcs.Refused, Message: ended("The file " + ref.File + " " + sh.err.Error())}, span: ref.Span}
	}
	return sh, nil
}

func (lib *library) opener() Source {
	if lib.own == nil {
		return nil
	}
	return lib.own.source
}

// want asks for a sheet; choose says which columns, once its head is known.
func (lib *library) want(sh *sheet, choose func(head *Frame) Columns) {
	if len(sh.wants) == 0 && sh.frame == nil {
		lib.order = append(lib.order, sh)
	}
	sh.wants = append(sh.wants, choose)
}

// read reads every sheet asked for that was not read yet. A sheet that cannot
// be read keeps the reason in err; the error is that of the context only.
func (lib *library) read(ctx context.Context) error {
	for _, sh := range lib.order {
		if sh.frame == nil && sh.err == nil {
			sh.frame, sh.err = sh.shelf.source.Read(ctx, sh.name, sh.choose)
		} else if sh.frame != nil {
			sh.choose(sh.frame)
		}
		sh.wants = nil
		if err := ctx.Err(); err != nil {
			return err
		}
	}
	lib.order = nil
	return nil
}

// choose joins what all the expressions over the sheet want.
func (sh *sheet) choose(head *Frame) Columns {
	var all Columns
	seen := map[int]bool{}
	for _, want := range sh.wants {
		c := want(head)
		all.All = all.All || c.All
		for _, col := range c.List {
			if !seen[col] {
				seen[col] = true
				all.List = append(all.List, col)
			}
		}
	}
	slices.Sort(all.List)
	return all
}

// unreadable gives the fault of a sheet that could not be read.
func (sh *sheet) unreadable(span Span) *fault {
	says := " cannot be read: "
	if bad := (*CSVError)(nil); errors.As(sh.err, &bad) {
		says = " "
	}
	return &fault{Finding: funcs.Finding{Code: "unreadable-sheet", Severity: funcs.Refused, Message: ended(sh.label + says + sh.err.Error())}, span: span}
}
