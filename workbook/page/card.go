package page

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// newCard shows one calculation.
func newCard(ctx context.Context, i int, r *calculation.RowResult) (card, error) {
	row := r.Row
	c := card{ID: "c" + strconv.Itoa(i+1), Title: row.Label, Place: row.Sheet() + ", row " + strconv.Itoa(row.Number), Status: string(r.Status)}
	if row.Function != nil {
		c.Function = row.Function.Name
	}
	if c.Title == "" {
		c.Title = c.Function
	}
	if c.Title == "" {
		c.Title = c.Place
	}
	for _, f := range r.Findings {
		c.Findings = append(c.Findings, newFinding(f))
	}
	for _, in := range row.Inputs {
		l := line{Name: in.Name, Value: in.Written, More: in.Cell.String()}
		if in.Default {
			l.More = "default, " + l.More
		}
		c.Inputs = append(c.Inputs, l)
	}
	p, err := c.addAnswer(ctx, r)
	if err != nil {
		return c, err
	}
	if p != nil {
		c.Picture, c.Caption = p.svg(c.ID+"-picture"), p.caption
	}
	return c, nil
}

// addAnswer adds results and facts, and gives the picture.
func (c *card) addAnswer(ctx context.Context, r *calculation.RowResult) (*picture, error) {
	switch {
	case len(r.Groups) > 0:
		c.addGroups(r)
		var names []string
		var outcomes []*funcs.Outcome
		for _, g := range r.Groups {
			names, outcomes = append(names, g.Name), append(outcomes, g.Outcome)
		}
		return drawEach(names, outcomes), nil
	case r.Outcome == nil || r.Outcome.Status == funcs.StatusRefused:
		c.Answer = "refused"
		return nil, nil
	}
	out := r.Outcome
	a := answer{Outcome: out, written: map[string]string{}}
	for _, in := range r.Row.Inputs {
		a.written[in.Name] = in.Written
	}
	c.Sentence, _ = a.text("sentence")
	c.Sentence = strings.ReplaceAll(c.Sentence, " = ", "\u00a0=\u00a0") // no line ends inside n = 25
	for _, result := range out.Function.Results {
		if v, ok := out.Get(result.Name); ok {
			l := line{Name: result.Name, Value: show(v), Unit: unitText(result.Unit, a.unit())}
			if x, ok := v.(float64); ok {
				l.Exact = funcs.FormatArgument(x)
			}
			c.Results = append(c.Results, l)
		}
	}
	if len(out.Rows) > 0 {
		c.addTable(out)
	}
	for _, f := range []struct{ name, result string }{{"Method", "method"}, {"Published in", "citation"}, {"Cells read", "range"}} {
		if text, ok := a.text(f.result); ok && text != "" {
			c.Facts = append(c.Facts, line{Name: f.name, Value: text})
		}
	}
	if used, ok := out.Get("used"); ok {
		text := fmt.Sprintf("%v used", used)
		if skipped, ok := out.Get("skipped"); ok && skipped != 0 {
			text += fmt.Sprintf(", %v skipped", skipped)
		}
		c.Facts = append(c.Facts, line{Name: "Values", Value: text})
	}
	if text, ok := a.text("fingerprint"); ok {
		c.Facts = append(c.Facts, line{Name: "Fingerprint", Value: text, More: fmt.Sprintf("version %d of %s", out.Function.Version, out.Function.Name)})
	}
	c.Answer = a.brief()
	return drawPicture(ctx, a)
}

func (a answer) text(result string) (string, bool) {
	v, ok := a.Get(result)
	s, _ := v.(string)
	return s, ok
}

// brief is the answer in a few words: the interval, a size, else the first
// result that is no count, with the p-value.
func (a answer) brief() string {
	v := a.interval()
	if gives("sd-lower")(a.Function) {
		v = a.intervalOf("sd-lower", "sd-upper")
		v.name, v.estimate = "sd", a.result("sd")
		if pooled := a.result("pooled-sd"); !math.IsNaN(pooled) {
			v.name, v.estimate = "pooled sd", pooled
		}
	}
	if v.has() {
		return v.label()
	}
	text := ""
	for _, r := range a.Function.Results {
		value, ok := a.Get(r.Name)
		x, isNumber := value.(float64)
		switch {
		case !ok || text != "" && (r.Name != "p-value" || a.Function.Family == "sizes"):
			continue
		case isNumber && r.Name == "p-value" && text != "":
			return text + ", p = " + short(x)
		case isNumber:
			text = spaced(r.Name) + " " + short(x)
		case r.Kind == funcs.Whole && a.Function.Family == "samples":
			continue
		case r.Kind == funcs.Whole:
			text = spaced(r.Name) + " = " + show(value)
			if second, ok := a.Get("second-n"); ok && r.Name == "n" {
				text += " and " + show(second)
			}
		default:
			text = spaced(r.Name) + ": " + show(value)
		}
	}
	if text == "" {
		return "a table of " + plural(len(a.Rows), "row")
	}
	return text
}

func unitText(u funcs.Unit, unit string) string {
	switch {
	case unit == "" || u == funcs.NoUnit:
		return ""
	case u == funcs.SquaredUnit:
		return unit + " squared"
	}
	return unit
}

// show writes a result for reading.
func show(v any) string {
	switch v := v.(type) {
	case float64:
		return figure(v)
	case bool:
		if v {
			return "yes"
		}
		return "no"
	}
	return fmt.Sprint(v)
}

// shown is a cell of a table.
func shown(v any, number bool) cell {
	if v == nil {
		return cell{Number: number}
	}
	c := cell{Text: show(v), Number: number}
	if x, ok := v.(float64); ok {
		c.Exact = funcs.FormatArgument(x)
	}
	return c
}

// addTable adds the table that a function gives.
func (c *card) addTable(out *funcs.Outcome) {
	t := &table{Caption: "Results, row by row"}
	notes := false
	for _, col := range out.Function.Table {
		t.Columns = append(t.Columns, column{col.Name, col.Kind != funcs.Text})
	}
	for _, row := range out.Rows {
		var cells []cell
		for i, col := range out.Function.Table {
			cells = append(cells, shown(row.Values[col.Name], t.Columns[i].Number))
		}
		cells = append(cells, cell{Text: funcs.Note(row.Findings)})
		notes = notes || len(row.Findings) > 0
		t.Rows = append(t.Rows, cells)
	}
	c.Table = t.withNotes(notes)
}

// withNotes keeps the last cell of each row, which is its note, or drops it.
func (t *table) withNotes(keep bool) *table {
	if keep {
		t.Columns = append(t.Columns, column{Name: "note"})
		return t
	}
	for i := range t.Rows {
		t.Rows[i] = t.Rows[i][:len(t.Rows[i])-1]
	}
	return t
}

// addGroups adds a row for each group of a sample given `for each`.
func (c *card) addGroups(r *calculation.RowResult) {
	f := r.Row.Function
	t := &table{Caption: "Results, group by group", Columns: []column{{Name: "group"}}}
	for _, result := range f.Results {
		t.Columns = append(t.Columns, column{result.Name, result.Kind != funcs.Text})
	}
	notes := false
	for _, g := range r.Groups {
		cells := []cell{{Text: g.Name}}
		note := g.Note
		for i, result := range f.Results {
			var v any
			if g.Outcome != nil && g.Outcome.Status != funcs.StatusRefused {
				v, _ = g.Outcome.Get(result.Name)
			}
			cells = append(cells, shown(v, t.Columns[i+1].Number))
		}
		if g.Outcome != nil {
			note = funcs.Note(g.Outcome.Findings)
			if c.Facts == nil && g.Outcome.Status != funcs.StatusRefused {
				for _, fact := range []struct{ name, result string }{{"Method", "method"}, {"Published in", "citation"}} {
					if text, ok := (answer{Outcome: g.Outcome}).text(fact.result); ok {
						c.Facts = append(c.Facts, line{Name: fact.name, Value: text})
					}
				}
			}
		}
		notes = notes || note != ""
		t.Rows = append(t.Rows, append(cells, cell{Text: note}))
	}
	c.Table = t.withNotes(notes)
	c.Answer = plural(len(r.Groups), "group")
}
