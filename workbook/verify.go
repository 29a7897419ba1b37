package workbook

import (
	"context"

	"halfwidth/workbook/calculation"
)

// Verification is what a comparison of stored results with those of now gave.
type Verification struct {
	Compared    int          // how many result cells were looked at, those of table sheets included
	Differences []Difference // those that do not hold what is worked out now
}

// Verify works out the calculation sheets of a file as Fill does and compares
// the results with those that are stored. It writes nothing. The report's
// Verification lists what a fill would change, so that a file that was just
// filled has no differences.
func Verify(ctx context.Context, path string, o Options) (*Report, error) {
	d, plan, err := open(ctx, path, o)
	if err != nil {
		return nil, err
	}
	defer d.Close()
	results, err := plan.Run(ctx, o.workers())
	if err != nil {
		return nil, err
	}
	changes, err := d.changes(results)
	if err != nil {
		return nil, err
	}
	list, err := changes.differences()
	if err != nil {
		return nil, err
	}
	return &Report{Book: path, Plan: plan, Results: results, Verification: &Verification{Compared: changes.compared(), Differences: list}}, nil
}

// OutOfDate gives the rows of which some stored result differs.
func (v *Verification) OutOfDate() map[*calculation.RowResult]bool {
	rows := map[*calculation.RowResult]bool{}
	for _, d := range v.Differences {
		rows[d.Row] = true
	}
	return rows
}
