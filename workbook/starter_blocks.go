package workbook

import (
	"context"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// starterBlock is one block of a starter: functions of the same inputs.
type starterBlock struct {
	functions []*funcs.Function
	columns   []starterColumn
	rows      []starterRow // worked rows
	overTrips bool         // some row reads the sheet of trips
}

// starterColumn is one column of a block.
type starterColumn struct {
	title   string
	note    string   // what belongs there
	choices []string // what may be picked there
	result  bool
	text    bool // it holds words, not numbers
	width   float64
}

// starterRow is a worked row.
type starterRow struct {
	cells  map[string]any    // by the title of the column
	filled map[string]string // the texts that a fill writes, which the row has room for
}

// readyRows is how many empty rows each block has, ready to be filled in.
const readyRows = 3

// starterBlocks lays out the blocks of some functions, and works out what each
// says about the trips.
func starterBlocks(ctx context.Context, list []*funcs.Function) ([]*starterBlock, error) {
	var blocks []*starterBlock
	for _, f := range list {
		i := slices.IndexFunc(blocks, func(b *starterBlock) bool { return sameInputs(b.functions[0], f) && fits(b.functions, f) })
		if i < 0 {
			blocks, i = append(blocks, &starterBlock{}), len(blocks)
		}
		blocks[i].functions = append(blocks[i].functions, f)
	}
	for _, b := range blocks {
		b.columns = columnsOf(b.functions)
		for _, f := range b.functions {
			if err := b.addRows(ctx, f); err != nil {
				return nil, err
			}
		}
	}
	return blocks, nil
}

// sameInputs reports whether two functions of one family can stand in one block
// whose lists and notes hold for both.
func sameInputs(a, b *funcs.Function) bool {
	return a.Family == b.Family && slices.EqualFunc(a.Inputs, b.Inputs, func(x, y funcs.Input) bool {
		return x.Name == y.Name && x.Kind == y.Kind && reflect.DeepEqual(x.Default, y.Default) && slices.Equal(x.Choices, y.Choices)
	})
}

// fits reports whether the list of a block's functions has room for one more.
func fits(list []*funcs.Function, f *funcs.Function) bool {
	return units(strings.Join(append(namesOf(list), f.Name), ",")) <= mostList
}

func namesOf(list []*funcs.Function) []string {
	names := make([]string, len(list))
	for i, f := range list {
		names[i] = f.Name
	}
	return names
}

// closing are the common results that every block ends with: how far the answer
// may be trusted, its words, and what verify goes by.
var closing = []string{"status", "note", "sentence", "fingerprint"}

// longestDefault is the room for the name of a default, in the first column.
const longestDefault = len("default significance")

// The columns of a block that are neither an input nor a result.
const (
	workTitle  = "work out"
	labelTitle = "label"
	tableTitle = "table sheet"
)

func columnsOf(list []*funcs.Function) []starterColumn {
	names := namesOf(list)
	longest := 0
	for _, n := range names {
		longest = max(longest, len(n))
	}
	columns := []starterColumn{
		{title: workTitle, note: "The function that this row works out. More of its inputs and results stand on the sheet Names: head a column with one, a result after >.", choices: names, text: true, width: float64(max(longest, longestDefault)) + 3},
		{title: labelTitle, note: "Your own words for this row. They are left as they are.", text: true, width: 28},
	}
	for i, in := range list[0].Inputs {
		columns = append(columns, starterColumn{title: in.Name, note: inputNote(list, i), choices: choicesOf(in),
			text: in.Kind != funcs.Number && in.Kind != funcs.Count && in.Kind != funcs.Level, width: inputWidth(in)})
	}
	if slices.ContainsFunc(list, func(f *funcs.Function) bool { return len(f.Table) > 0 }) {
		columns = append(columns, starterColumn{title: tableTitle, text: true, width: 22,
			note: "The name of a new sheet, to which the table that the function gives is written."})
	}
	for _, r := range mainResults(list) {
		columns = append(columns, starterColumn{title: "> " + r.Name, note: sentenceOf(r.Summary) + " It is filled in.", result: true,
			text: r.Kind == funcs.Text, width: resultWidth(r)})
	}
	return columns
}

// foremost is how many of a function's results, which stand in the order of
// their weight, have a column; decisive are those that have one in any case.
const foremost = 4

var decisive = []string{"p-value"}

// mainResults gives the results that a block of some functions has columns for:
// the foremost, the decisive, those that the sources of the examples give, those
// that bear an input's name and would else be looked for under it, and the
// closing ones. The rest stand on the sheet of names.
func mainResults(list []*funcs.Function) []funcs.Result {
	var main []funcs.Result
	add := func(r funcs.Result) {
		if !slices.ContainsFunc(main, func(m funcs.Result) bool { return m.Name == r.Name }) {
			main = append(main, r)
		}
	}
	for _, f := range list {
		for i, r := range f.Results {
			inExample := slices.ContainsFunc(f.Example.Want, func(a funcs.Argument) bool { return a.Name == r.Name })
			_, isInput := f.Input(r.Name)
			if i < foremost || inExample || isInput || slices.Contains(decisive, r.Name) {
				add(r)
			}
		}
	}
	for _, name := range closing {
		r, _ := list[0].Result(name)
		add(r)
	}
	return main
}

// choicesOf lists what may be picked for an input; of levels the usual ones.
func choicesOf(in funcs.Input) []string {
	switch in.Kind {
	case funcs.Choice:
		return in.Choices
	case funcs.YesNo:
		return []string{"yes", "no"}
	case funcs.Level:
		if in.Default != nil {
			return usualLevels(in.Default.(float64))
		}
	}
	return nil
}

// usualLevels are those on the side of one half where the default lies.
func usualLevels(standard float64) []string {
	list := []float64{0.80, 0.90, 0.95, 0.99}
	if standard < 0.5 {
		list = []float64{0.10, 0.05, 0.01}
	}
	texts := make([]string, len(list))
	for i, x := range list {
		texts[i] = percent(x)
	}
	return texts
}

// percent writes a level as people do, where two decimals are enough for that;
// else as a number.
func percent(x float64) string {
	for decimals := range 3 {
		scale := math.Pow(10, float64(decimals+2))
		if n := math.Round(x * scale); n/scale == x {
			return fmt.Sprintf("%.*f%%", decimals, n/math.Pow(10, float64(decimals)))
		}
	}
	return funcs.FormatArgument(x)
}

// written writes a value of an input as it is shown.
func written(in funcs.Input, value any) string {
	if x, ok := value.(float64); ok && in.Kind == funcs.Level {
		return percent(x)
	}
	return funcs.FormatArgument(value)
}

// inputNote says what an input is, what it takes, and what an empty cell means.
func inputNote(list []*funcs.Function, i int) string {
	in := list[0].Inputs[i]
	var texts []string
	for _, f := range list {
		if text := sentenceOf(f.Inputs[i].Summary); !slices.Contains(texts, text) {
			texts = append(texts, text)
		}
	}
	if len(texts) > 1 {
		for k := range texts {
			texts[k] = list[k].Name + ": " + texts[k]
		}
	}
	text := strings.Join(texts, " ")
	if takes := in.Expects(); takes != funcs.OrList(in.Choices) && in.Kind != funcs.YesNo && in.Kind != funcs.Text {
		text += " " + sentenceOf(takes)
	}
	switch {
	case in.Default != nil:
		text += " If empty: " + written(in, in.Default) + "."
	case in.Optional:
		text += " It may stay empty."
	}
	if how := howWritten[in.Kind]; how != "" && units(text+" "+how) <= mostNote {
		text += " " + how
	}
	return text
}

// howWritten says how the values of a kind are written.
var howWritten = map[funcs.Kind]string{
	funcs.Sample:  "Write: 12.1; 11.8; 12.6, or minutes in Trips where depot = North, or Trips!D2:D41.",
	funcs.Samples: "Write: minutes in Trips for each depot, or North = 12.1; 11.8 | Quay = 10.2; 10.9.",
	funcs.Numbers: "Write numbers with ; between them, or words that name them.",
}

func sentenceOf(text string) string { return strings.ToUpper(text[:1]) + text[1:] + "." }

func inputWidth(in funcs.Input) float64 {
	switch in.Kind {
	case funcs.Sample, funcs.Samples:
		return 30
	case funcs.Numbers:
		return 22
	}
	width := headWidth(in.Name)
	for _, c := range in.Choices {
		width = max(width, len(c))
	}
	return float64(max(width+3, 12))
}

// headWidth is the room that a header needs: a long name may be broken at its
// hyphens.
func headWidth(name string) int {
	const short = 16
	if len(name) <= short {
		return len(name)
	}
	longest := 0
	for part := range strings.SplitSeq(name, "-") {
		longest = max(longest, len(part)+1)
	}
	return longest
}

func resultWidth(r funcs.Result) float64 {
	switch r.Name {
	case "note":
		return 40
	case "sentence":
		return 50
	case "fingerprint":
		return 19
	}
	return float64(max(headWidth("> "+r.Name)+2, 13))
}

// addRows adds the worked rows of a function: its example, and where there is
// anything to say of the trips, a row about them.
func (b *starterBlock) addRows(ctx context.Context, f *funcs.Function) error {
	cells, args := map[string]any{}, map[string]any{}
	for _, a := range f.Example.Arguments {
		cells[a.Name], args[a.Name] = a.Value, a.Value
	}
	out, err := f.Answer(ctx, args)
	if err != nil {
		return err
	}
	b.addRow(out, cells, f.Example.Label, f.Name)
	cells, out, err = overTrips(ctx, f)
	if err != nil || cells == nil {
		return err
	}
	b.overTrips = true
	b.addRow(out, cells, "the trips of Larkmoor Parcels", f.Name+" 2")
	return nil
}

func (b *starterBlock) addRow(out *funcs.Outcome, cells map[string]any, label, table string) {
	row := starterRow{cells: cells, filled: map[string]string{"> note": funcs.Note(out.Findings)}}
	if text, ok := out.Get("sentence"); ok {
		row.filled["> sentence"] = text.(string)
	}
	cells[workTitle], cells[labelTitle] = out.Function.Name, label
	if len(out.Function.Table) > 0 {
		cells[tableTitle] = table
	}
	b.rows = append(b.rows, row)
}

// aboutFunction says what a function gives and which inputs go together.
func aboutFunction(f *funcs.Function) string {
	text := sentenceOf(f.Summary)
	for _, one := range f.OneOf {
		text += " Give " + one.String() + "."
	}
	return text
}
