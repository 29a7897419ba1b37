package calculation

import (
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// Edit is what a fill puts into a cell: a float64, int, string or bool, or nil
// to empty it.
type Edit struct {
	Cell  CellRef
	Value any
}

// TableSheet is a sheet that a row writes anew: a header and rows of plain
// values. Where the row is refused, Refused says why and there are no rows, so
// that the table of an earlier fill does not stay.
type TableSheet struct {
	Name    string
	Row     *Row
	Header  []string
	Rows    [][]any // float64, int, string or bool; nil for what is absent
	Refused string
}

// value gives a result of the row.
func (r *RowResult) value(name string) (any, bool) {
	switch {
	case name == "status":
		return string(r.Status), true
	case name == "note":
		return r.Note(), true
	case r.Status == funcs.StatusRefused:
		return nil, false
	case r.Outcome != nil:
		return r.Outcome.Get(name)
	case r.Groups != nil:
		return r.groupValue(name)
	}
	return nil, false
}

// groupValue gives what the groups of a row have in common: how many values were
// used and skipped, and the common results that are the same for all.
func (r *RowResult) groupValue(name string) (any, bool) {
	switch name {
	case "used":
		sum := 0
		for _, g := range r.Groups {
			if g.Outcome != nil {
				if n, ok := g.Outcome.Get(name); ok {
					sum += n.(int)
				}
			}
		}
		return sum, true
	case "skipped":
		return r.skipped, true
	case "level", "direction", "citation", "version":
		for _, g := range r.Groups {
			if g.Outcome != nil && g.Outcome.Status != funcs.StatusRefused {
				return g.Outcome.Get(name)
			}
		}
	}
	return nil, false
}

// sumUpGroups adds what the row says of its groups as a whole.
func (r *RowResult) sumUpGroups() {
	var refused, cautions []string
	for _, g := range r.Groups {
		switch {
		case g.Outcome == nil || g.Outcome.Status == funcs.StatusRefused:
			refused = append(refused, quote(g.Name))
		case g.Outcome.Status == funcs.StatusCaution:
			cautions = append(cautions, quote(g.Name))
		}
	}
	f := funcs.Finding{Code: "groups", Severity: funcs.Information, Input: r.Row.each.Name,
		Message: fmt.Sprintf("%s in the sheet %s.", standGroups(len(r.Groups)), quote(r.Row.table))}
	switch {
	case len(refused) == len(r.Groups):
		f.Severity = funcs.Refused
		f.Message = "Every group is refused: " + strings.TrimSuffix(groupNote(r.Groups[0]), ".") + "."
		if len(r.Groups) > 1 {
			f.Message += fmt.Sprintf(" See the sheet %s for the others.", quote(r.Row.table))
		}
	case refused != nil:
		f.Severity = funcs.Caution
		f.Message += fmt.Sprintf(" Refused: %s; see the notes there.", few(refused))
	case cautions != nil:
		f.Severity = funcs.Caution
		f.Message += fmt.Sprintf(" With a caution: %s; see the notes there.", few(cautions))
	}
	r.add(f, nil)
}

func standGroups(n int) string {
	if n == 1 {
		return "1 group stands"
	}
	return decimal(n) + " groups stand"
}

// groupNote gives the note of a group.
func groupNote(g GroupOutcome) string {
	if g.Outcome == nil {
		return g.Note
	}
	return funcs.Note(g.Outcome.Findings)
}

// tabulate makes the table sheet of a row that names one.
func (r *RowResult) tabulate() {
	name, f := r.Row.table, r.Row.Function
	if name == "" {
		return
	}
	t := &TableSheet{Name: name, Row: r.Row}
	switch {
	case r.Groups != nil:
		r.tabulateGroups(t)
	case r.Status == funcs.StatusRefused:
		t.Refused = r.Note()
	case r.Outcome != nil:
		for _, c := range f.Table {
			t.Header = append(t.Header, c.Name)
		}
		t.Header = append(t.Header, "status", "note")
		for _, row := range r.Outcome.Rows {
			var line []any
			for _, c := range f.Table {
				line = append(line, row.Values[c.Name])
			}
			findings := slices.Clone(row.Findings)
			funcs.SortFindings(findings)
			t.Rows = append(t.Rows, append(line, string(row.Status()), textOrNil(funcs.Note(findings))))
		}
	}
	r.table = t
}

// tabulateGroups makes a row of results for each group.
func (r *RowResult) tabulateGroups(t *TableSheet) {
	f := r.Row.Function
	results := slices.Concat(f.Results, funcs.CommonResults)
	t.Header = []string{trim(r.Row.each.term.query.query.ForEach.Name)}
	for _, res := range results {
		t.Header = append(t.Header, res.Name)
	}
	for _, g := range r.Groups {
		line := []any{groupCell(g.Name)}
		for _, res := range results {
			var v any
			switch {
			case g.Outcome == nil && res.Name == "status":
				v = string(funcs.StatusRefused)
			case g.Outcome == nil && res.Name == "note":
				v = g.Note
			case g.Outcome != nil:
				v, _ = g.Outcome.Get(res.Name)
			}
			if text, ok := v.(string); ok {
				v = textOrNil(text)
			}
			line = append(line, v)
		}
		t.Rows = append(t.Rows, line)
	}
}

// groupCell gives a group's name as the number that it is, if it is one.
func groupCell(name string) any {
	if x, ok := parseNumber(name); ok && funcs.FormatNumber(x) == name {
		return x
	}
	return name
}

func textOrNil(text string) any {
	if text == "" {
		return nil
	}
	return clip(text)
}

// maxText is how many UTF-16 units a cell holds, as spreadsheet programs agree.
const maxText = 32767

// clip shortens a text that no cell can hold.
func clip(text string) string {
	if len(text) <= maxText || ByteToUTF16(text, len(text)) <= maxText {
		return text
	}
	return text[:UTF16ToByte(text, maxText-1)] + "…"
}

// edits gives what stands in the row's result cells. A refused row has them all
// emptied but for its status and its reason.
func (r *RowResult) edits() []Edit {
	columns := slices.DeleteFunc(r.Row.Block.resultColumns(), func(c BlockColumn) bool { return r.Row.closed[c.Col] })
	out := make([]Edit, len(columns))
	placed := false
	for i, c := range columns {
		out[i].Cell = CellRef{r.Row.Number, c.Col}
		if r.Row.Block.duplicated(c) {
			continue
		}
		v, _ := r.value(c.Name)
		if text, ok := v.(string); ok {
			v = textOrNil(text)
		}
		out[i].Value = v
		placed = placed || c.Name == "status" || c.Name == "note"
	}
	if r.Status == funcs.StatusRefused && !placed && len(out) > 0 {
		out[0].Value = clip("refused: " + r.Note())
	}
	return out
}

// duplicated reports whether the same result has a column before this one.
func (b *Block) duplicated(c BlockColumn) bool {
	first := b.column(ResultColumn, c.Name)
	return first != nil && first.Col != c.Col
}

// ResultName is the name of the result that a column of the block is for, empty
// for other columns.
func (b *Block) ResultName(col int) string {
	for _, c := range b.Columns {
		if c.Col == col && c.Role == ResultColumn {
			return c.Name
		}
	}
	return ""
}
