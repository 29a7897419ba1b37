package funcs

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sync/atomic"
)

// Call is one evaluation of a function: its bound arguments, what it found so
// far, and the results.
type Call struct {
	Function *Function

	ctx      context.Context
	args     map[string]From
	findings []Finding
	results  map[string]any
	rows     []Row
	used     int  // values that entered the computation
	counted  bool // whether used was set
	dropped  int  // values left out by the function itself, such as unpaired ones
	method   string
	sentence string
	known    map[listKey]*listFacts
	critical map[farRule]float64
	among    int // the samples that the automatic cautions look at; 0 stands for one
}

// Answer evaluates the function of that name. The arguments are values of the
// Go types that the kinds name (an int or a whole float64 for a count, the text
// "infinite" for infinite degrees of freedom), or such a value in a From.
//
// The error is an *UnknownError, an ArgumentErrors, the context's error, or
// wraps ErrInternal; a statistical refusal is an outcome, not an error.
func Answer(ctx context.Context, name string, arguments map[string]any) (*Outcome, error) {
	f, err := Lookup(name)
	if err != nil {
		return nil, err
	}
	return f.Answer(ctx, arguments)
}

// busy is how many goroutines are at work on answers: one for each call, and those
// that help with it.
var busy atomic.Int32

// Answer evaluates the function; see the package's Answer.
func (f *Function) Answer(ctx context.Context, arguments map[string]any) (out *Outcome, err error) {
	busy.Add(1)
	defer busy.Add(-1)
	defer func() {
		if p := recover(); p != nil {
			out, err = nil, fmt.Errorf("%w: %s: %v", ErrInternal, f.Name, p)
		}
	}()
	c, err := f.bind(ctx, arguments)
	if err != nil {
		return nil, err
	}
	err = f.compute(c)
	var refused *refusal
	switch {
	case err == nil:
	case errors.As(err, &refused):
		c.findings = append(c.findings, refused.finding)
	default:
		return nil, err
	}
	return c.outcome()
}

// Check binds the arguments and reports every bad one, without computing.
func (f *Function) Check(arguments map[string]any) error {
	_, err := f.bind(context.Background(), arguments)
	return err
}

// refusal carries a refusing finding out of a compute function.
type refusal struct{ finding Finding }

func (r *refusal) Error() string { return r.finding.Message }

// refuse ends a computation that has no answer.
func refuse(code, input, format string, a ...any) error {
	return &refusal{Finding{Code: code, Severity: Refused, Input: input, Message: fmt.Sprintf(format, a...)}}
}

// wrong reports an argument that only the computation can tell to be wrong,
// such as lists of different lengths.
func (c *Call) wrong(input, got, reason, advice string) error {
	return ArgumentErrors{{Function: c.Function.Name, Argument: input, Index: -1, Got: got, Reason: reason, Advice: advice}}
}

// caution adds a finding of severity caution.
func (c *Call) caution(code, input, format string, a ...any) {
	c.add(Finding{Code: code, Severity: Caution, Input: input, Message: fmt.Sprintf(format, a...)})
}

// inform adds a finding that leaves the status ok.
func (c *Call) inform(code, input, format string, a ...any) {
	c.add(Finding{Code: code, Severity: Information, Input: input, Message: fmt.Sprintf(format, a...)})
}

func (c *Call) add(f Finding) { c.findings = append(c.findings, f) }

// set gives a result its value: float64, int, string or bool.
func (c *Call) set(name string, value any) {
	if x, ok := value.(float64); ok && x == 0 {
		value = 0.0 // never -0, which a sheet cannot show
	}
	c.results[name] = value
}

// has reports whether the input was given or has a default.
func (c *Call) has(name string) bool {
	_, ok := c.args[name]
	return ok
}

// count records how many values entered the computation.
func (c *Call) count(n int) { c.used, c.counted = n, true }

// origin is where the input's value came from; never nil.
func (c *Call) origin(name string) *Origin {
	if o := c.args[name].Origin; o != nil {
		return o
	}
	return &Origin{}
}

// address is the cell of value i of a sample, which is group 0, or of one of the
// groups of an input, as a list of at most one.
func (c *Call) address(input string, group, i int) []string {
	if o := c.origin(input); o.Address != nil {
		if a := o.Address(group, i); a != "" {
			return []string{a}
		}
	}
	return nil
}

// cancelled reports whether the caller has given up; long work asks often.
func (c *Call) cancelled() error { return c.ctx.Err() }

// outcome checks what the computation gave and adds the common results.
func (c *Call) outcome() (*Outcome, error) {
	for name, v := range c.results {
		r, ok := c.Function.Result(name)
		if !ok {
			return nil, fmt.Errorf("%w: %s gave a result %q that it does not declare", ErrInternal, c.Function.Name, name)
		}
		if !fits(v, r.Kind) {
			return nil, fmt.Errorf("%w: %s gave %s as %T", ErrInternal, c.Function.Name, name, v)
		}
	}
	for _, r := range c.Function.Results {
		if !finite(c.results[r.Name]) {
			c.add(beyondDouble(r.Name))
		}
	}
	for i := range c.rows {
		row := &c.rows[i]
		for _, column := range c.Function.Table {
			if !finite(row.Values[column.Name]) {
				delete(row.Values, column.Name)
				row.Findings = append(row.Findings, beyondDouble(column.Name))
			}
		}
	}
	return c.finish(), nil
}

func beyondDouble(result string) Finding {
	return Finding{Code: "too-large-to-hold", Severity: Refused, Message: fmt.Sprintf(
		"The %s passes what a double can hold; give the numbers in a larger or smaller unit.", result)}
}

func finite(v any) bool {
	x, ok := v.(float64)
	return !ok || !(math.IsNaN(x) || math.IsInf(x, 0))
}

func fits(v any, k Kind) bool {
	switch v.(type) {
	case float64:
		return k == Number
	case int:
		return k == Whole
	case string:
		return k == Text
	case bool:
		return k == YesNo
	}
	return false
}
