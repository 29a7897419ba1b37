package funcs

import (
	"errors"
	"fmt"
	"strings"
)

// The sentinels that errors of this package wrap.
var (
	ErrArgument = errors.New("wrong argument")
	ErrUnknown  = errors.New("unknown name")
	ErrInternal = errors.New("internal error")
)

// ArgumentError reports one bad argument of a call.
type ArgumentError struct {
	Function string
	Argument string
	Index    int    // element of a list, from 0; -1 for the whole argument
	Group    string // the sample concerned, where there are several
	Got      string // what was found, as text
	Reason   string // what is wrong with it, as the end of a sentence
	Advice   string // what to write instead
}

// Error words the fault as a sentence without its full stop.
func (e *ArgumentError) Error() string {
	var b strings.Builder
	b.WriteString(e.Argument)
	if e.Group != "" {
		fmt.Fprintf(&b, " (%s)", e.Group)
	}
	if e.Index >= 0 {
		fmt.Fprintf(&b, ", value %d", e.Index+1)
	}
	if e.Got != "" {
		b.WriteString(" is " + e.Got + ", but")
	}
	b.WriteString(" " + e.Reason)
	if e.Advice != "" {
		b.WriteString("; " + e.Advice)
	}
	return b.String()
}

// Unwrap makes every ArgumentError match ErrArgument.
func (e *ArgumentError) Unwrap() error { return ErrArgument }

// ArgumentErrors is every bad argument of one call, in catalogue order.
type ArgumentErrors []*ArgumentError

// Error joins the faults, one a line.
func (es ArgumentErrors) Error() string {
	lines := make([]string, len(es))
	for i, e := range es {
		lines[i] = e.Function + ": " + e.Error()
	}
	return strings.Join(lines, "\n")
}

// Unwrap gives the single faults to errors.Is and errors.As.
func (es ArgumentErrors) Unwrap() []error {
	out := make([]error, len(es))
	for i, e := range es {
		out[i] = e
	}
	return out
}

// UnknownError reports a name that nothing bears.
type UnknownError struct {
	What    string   // "function", "input of mean-interval"
	Name    string   // as written
	Closest []string // names that exist, the likeliest first
}

// Error words the fault and the closest names.
func (e *UnknownError) Error() string {
	text := fmt.Sprintf("there is no %s %q", e.What, e.Name)
	if len(e.Closest) > 0 {
		text += "; " + didYouMean(e.Closest)
	}
	return text
}

// Unwrap makes every UnknownError match ErrUnknown.
func (e *UnknownError) Unwrap() error { return ErrUnknown }

// didYouMean words the names near to what was written.
func didYouMean(near []string) string { return "did you mean " + OrList(quoted(near)) + "?" }

// quoted puts double quotes round each text.
func quoted(texts []string) []string {
	out := make([]string, len(texts))
	for i, t := range texts {
		out[i] = `"` + t + `"`
	}
	return out
}

// OrList joins texts as "a, b or c".
func OrList(texts []string) string { return joinList(texts, " or ") }

// AndList joins texts as "a, b and c".
func AndList(texts []string) string { return joinList(texts, " and ") }

func joinList(texts []string, last string) string {
	if len(texts) < 2 {
		return strings.Join(texts, "")
	}
	n := len(texts) - 1
	return strings.Join(texts[:n], ", ") + last + texts[n]
}
