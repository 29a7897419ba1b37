package workbook

import (
	"context"
	"errors"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// Answer works out one function whose inputs are given as text, by the rules
// for the cells of a calculation sheet. Expressions read the sheets of the book
// at path, which may be empty.
func Answer(ctx context.Context, path string, data []string, f *funcs.Function, texts map[string]string) (*funcs.Outcome, error) {
	var source calculation.Source
	if path != "" {
		b, err := openBook(path, ooxml.Limits{}, newFolders(path, data, ooxml.Limits{}))
		if err != nil {
			return nil, err
		}
		defer b.Close()
		source = b
	}
	args, err := calculation.Arguments(ctx, source, f, texts, calculation.FileOptions{})
	var refusal *calculation.Refusal
	if errors.As(err, &refusal) {
		return funcs.RefusedOutcome(f, refusal.Findings), nil
	}
	if err != nil {
		return nil, err
	}
	return f.Answer(ctx, args)
}
