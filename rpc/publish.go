package rpc

import (
	"context"
	"fmt"
	"runtime/debug"
	"slices"
	"time"

	"halfwidth/workbook/calculation"
)

// liveBook works out a book whose sheets are open, and tells the client what a
// change altered.
type liveBook struct {
	session *Session
	name    string
	held    *bookState // the newest; of the goroutine that reads messages
	newest  newest[*bookState]

	// Of the work that goes on:
	results *calculation.Results // of what was published last
	told    told
}

func newLiveBook(s *Session, name string) *liveBook {
	b := &liveBook{session: s, name: name, told: newTold()}
	b.newest.settle, b.newest.work = s.options.settle, b.work
	b.newest.begin = func(run func(context.Context)) { s.Go(publishMethod, run) }
	return b
}

// changed makes a state the newest. One of which a sheet is lost, or without
// sheets, is not worked out.
func (b *liveBook) changed(state *bookState) {
	b.held = state
	if len(state.sheets) == 0 || slices.ContainsFunc(state.sheets, func(s *heldSheet) bool { return s.lost != nil }) {
		b.newest.drop()
		return
	}
	b.newest.changed(state)
}

// work works a state out and gives what publishes it.
func (b *liveBook) work(ctx context.Context, state *bookState) (send func()) {
	start := time.Now()
	results, plan, err := b.workOut(ctx, state)
	return func() {
		switch {
		case err != nil:
			b.session.remarks.say("the book %s cannot be worked out: %v", quoted(b.name), err)
			b.session.LogMessage(LogError, fmt.Sprintf("The book %s cannot be worked out: %v", quoted(b.name), err))
		case results != nil:
			b.publish(state, results, plan)
			b.session.logTrace(fmt.Sprintf("%s of %s published after %v", publishMethod, quoted(b.name), time.Since(start).Round(time.Microsecond)),
				func() string { return workedAnew(results) })
		}
	}
}

// workedAnew says how many rows a change has had worked out again.
func workedAnew(r *calculation.Results) string {
	anew := 0
	for _, row := range r.Rows {
		if !row.Kept {
			anew++
		}
	}
	return fmt.Sprintf("%d of %d rows worked out anew", anew, len(r.Rows))
}

// workOut works a state out. The results are nil where there is nothing to
// tell.
func (b *liveBook) workOut(ctx context.Context, state *bookState) (results *calculation.Results, plan *calculation.Plan, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			b.session.remarks.trace(fmt.Sprintf("fault in working out a book: %v", fault), debug.Stack())
			err = fmt.Errorf("%s", internalFault)
		}
	}()
	source, fault := state.source()
	if fault != nil {
		return nil, nil, fault
	}
	plan, err = calculation.NewPlan(ctx, source, calculation.Options{MayReplace: b.told.ownTable})
	if err != nil || len(plan.Sheets) == 0 && b.results == nil {
		return nil, nil, err
	}
	results, err = plan.RunAfter(ctx, b.session.sheetWorkers(), b.results)
	return results, plan, err
}

// publish tells the client what the results of a state altered.
func (b *liveBook) publish(state *bookState, results *calculation.Results, plan *calculation.Plan) {
	p := publication{Book: b.name, Versions: map[string]int{}}
	for _, s := range state.sheets {
		p.Versions[s.name] = s.version
	}
	b.told.fill(&p, results, plan)
	b.results = results
	b.session.notifyOpen(publishMethod, p)
}

const publishMethod = "sheets/publishResults"

// publication is the params of sheets/publishResults.
type publication struct {
	Book     string           `json:"book" doc:"the book"`
	Versions map[string]int   `json:"versions" doc:"the version of each of its sheets that the results were worked out from"`
	Cells    []publishedCell  `json:"cells" doc:"the result cells that have altered; null empties a cell"`
	Rows     []publishedRow   `json:"rows" doc:"the calculations whose status or findings have altered"`
	Tables   []publishedTable `json:"tables,omitempty" doc:"the sheets that results form and that have altered, whole"`
	Findings *[]rowFinding    `json:"findings,omitempty" doc:"what was found about the layout of the calculation sheets, all of it, where that has altered"`
}

type publishedCell struct {
	Sheet string `json:"sheet"`
	Cell  string `json:"cell"`
	Value any    `json:"value"`
}

type publishedRow struct {
	Sheet    string       `json:"sheet"`
	Row      int          `json:"row"`
	Column   string       `json:"column"` // the first of its block, as blocks may stand side by side
	Function string       `json:"function,omitempty"`
	Label    string       `json:"label,omitempty"`
	Status   string       `json:"status,omitempty"` // absent: there is no calculation in that row any more
	Findings []rowFinding `json:"findings"`
}

type rowFinding struct {
	Sheet    string   `json:"sheet,omitempty"` // the calculation sheet, of a finding about a layout
	Code     string   `json:"code"`
	Severity string   `json:"severity"`
	Input    string   `json:"input,omitempty"`
	Message  string   `json:"message"`
	Cell     string   `json:"cell"`            // of the calculation sheet
	Cells    []string `json:"cells,omitempty"` // where it came from
}

type publishedTable struct {
	Sheet   string   `json:"sheet"`
	Header  []string `json:"header"`
	Rows    [][]any  `json:"rows"`
	Refused string   `json:"refused,omitempty"`
}

func findingOf(d calculation.Diagnostic) rowFinding {
	return rowFinding{"", d.Code, d.Severity.String(), d.Input, d.Message, d.Cell.String(), d.Cells}
}

// wireCell gives what stands in a result cell as JSON.
func wireCell(value any) any {
	if x, ok := value.(float64); ok {
		return shortNumber(x)
	}
	return value
}
