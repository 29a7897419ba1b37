package calculation

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// Refusal says that well-formed expressions gave data that no call can use,
// such as durations without a unit. It is an outcome, not a faulty call.
type Refusal struct{ Findings []funcs.Finding }

// Error joins the messages.
func (r *Refusal) Error() string { return funcs.Note(r.Findings) }

// Arguments reads the inputs of a call that are given as text: values, levels,
// choices and sample expressions, by the rules for the cells of a calculation
// sheet. Expressions read the places of the source, or files beside it; source
// may be nil. Samples that must pair are read together.
//
// The error is a funcs.ArgumentErrors with every bad text, a *Refusal, or the
// context's. A text for a name that is no input comes back as it is, so that
// the call reports it.
func Arguments(ctx context.Context, source Source, f *funcs.Function, texts map[string]string, options FileOptions) (map[string]any, error) {
	lib := newLibrary(source)
	lib.options = options
	out := map[string]any{}
	for name, text := range texts {
		if _, ok := f.Input(name); !ok {
			out[name] = text
		}
	}
	terms := map[string]*term{}
	var wrong funcs.ArgumentErrors
	for _, in := range f.Inputs {
		text, given := texts[in.Name]
		if !given {
			continue
		}
		t, fl := (&reader{lib: lib}).term(in, asText(text))
		if fl != nil {
			wrong = append(wrong, argumentError(f, in.Name, fl))
			continue
		}
		if fl := checkKey(f, t); fl != nil {
			wrong = append(wrong, argumentError(f, in.Name, fl))
			continue
		}
		terms[in.Name] = t
	}
	// Texts that cannot be read leave the others to be read all the same, so
	// that all that is wrong is told at once.
	if err := lib.read(ctx); err != nil {
		return nil, err
	}
	args, err := evaluateAll(ctx, f, terms, noRows, &cache{})
	if err != nil {
		return nil, err
	}
	var refusal Refusal
	for _, in := range f.Inputs {
		a := args[in.Name]
		if a == nil {
			continue
		}
		for _, fl := range a.faults {
			if slices.Contains(wordingFaults, fl.Code) {
				wrong = append(wrong, argumentError(f, in.Name, &fl))
			} else {
				refusal.Findings = append(refusal.Findings, placed(in.Name, "", &fl))
			}
		}
		if len(a.faults) > 0 && a.from.Origin != nil {
			for _, finding := range a.from.Origin.Findings {
				finding.Input = in.Name
				refusal.Findings = append(refusal.Findings, finding)
			}
		}
		out[in.Name] = a.from
	}
	switch {
	case wrong != nil:
		slices.SortStableFunc(wrong, func(a, b *funcs.ArgumentError) int { return place(f, a.Argument) - place(f, b.Argument) })
		return nil, wrong
	case slices.ContainsFunc(refusal.Findings, func(f funcs.Finding) bool { return f.Severity == funcs.Refused }):
		funcs.SortFindings(refusal.Findings)
		return nil, &refusal
	}
	return out, nil
}

// wordingFaults are the codes of faults in what was written, not in the data.
var wordingFaults = []string{"bad-value", "bad-expression", "unknown-name", "unreadable-file", "unreadable-sheet", "different-rows"}

// place is that of an input in the catalogue.
func place(f *funcs.Function, input string) int {
	return slices.IndexFunc(f.Inputs, func(in funcs.Input) bool { return in.Name == input })
}

// checkKey refuses a key where nothing pairs, and groups where one sample is
// wanted.
func checkKey(f *funcs.Function, t *term) *fault {
	if t == nil || t.query == nil {
		return nil
	}
	q := t.query.query
	switch {
	case q.Matched != nil && !f.Paired:
		fl := bad("bad-value", fmt.Sprintf("has a key, but %s does not pair its samples; leave out matched by %s, or use paired-interval", f.Name, nameText(q.Matched.Name)))
		fl.span = q.Matched.Span
		return fl
	case q.ForEach != nil && t.input.Kind == funcs.Sample:
		fl := bad("bad-value", fmt.Sprintf("takes one sample, but for each %s gives several; write a condition, or ask once for each group", nameText(q.ForEach.Name)))
		fl.span = q.ForEach.Span
		return fl
	}
	return nil
}

// argumentError words a fault as the error of a call's argument.
func argumentError(f *funcs.Function, input string, fl *fault) *funcs.ArgumentError {
	e := &funcs.ArgumentError{Function: f.Name, Argument: input, Index: -1, Reason: strings.TrimSuffix(fl.Message, ".")}
	if !fl.tail {
		e.Reason = "cannot be read: " + e.Reason
	}
	// In "numbers with ; between them" the mark is no end of a clause.
	if reason, advice, ok := strings.Cut(e.Reason, "; "); ok && !strings.HasSuffix(reason, " ") {
		e.Reason, e.Advice = reason, advice
	}
	return e
}

// noRows answers for results of rows where there is no calculation sheet.
func noRows(resultCell) (Cell, *fault) { return Cell{}, bad("no-value", "is a cell of no sheet") }
