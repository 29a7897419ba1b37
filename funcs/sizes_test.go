package funcs

import (
	"context"
	"testing"
)

// answered evaluates a function that must not be refused.
func answered(t *testing.T, name string, arguments map[string]any) *Outcome {
	t.Helper()
	out, err := Answer(context.Background(), name, arguments)
	if err != nil {
		t.Fatalf("%s(%v): %v", name, arguments, err)
	}
	if out.Status == StatusRefused {
		t.Fatalf("%s(%v): refused: %s", name, arguments, Note(out.Findings))
	}
	checkDeclared(t, out.Function, out)
	return out
}

func (o *Outcome) float(t *testing.T, name string) float64 {
	t.Helper()
	v, ok := o.Get(name)
	x, isFloat := v.(float64)
	if !ok || !isFloat {
		t.Fatalf("%s: %s is %v", o.Function.Name, name, v)
	}
	return x
}

func (o *Outcome) whole(t *testing.T, name string) int {
	t.Helper()
	v, ok := o.Get(name)
	n, isInt := v.(int)
	if !ok || !isInt {
		t.Fatalf("%s: %s is %v", o.Function.Name, name, v)
	}
	return n
}
