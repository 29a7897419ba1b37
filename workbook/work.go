package workbook

import "context"

// Work works out the calculation sheets of a workbook as Fill does, and writes
// nothing.
func Work(ctx context.Context, path string, o Options) (*Report, error) {
	d, plan, err := open(ctx, path, o)
	if err != nil {
		return nil, err
	}
	defer d.Close()
	results, err := plan.Run(ctx, o.workers())
	if err != nil {
		return nil, err
	}
	return &Report{Book: path, Notes: d.notes(plan), Plan: plan, Results: results}, nil
}
