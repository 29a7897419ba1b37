package funcs

import (
	"cmp"
	"errors"
	"fmt"
	"slices"
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

// Closest gives the names nearest to what was written, the likeliest first and
// three at most; none where nothing is near. Case, spaces, hyphens and
// underscores do not count as differences.
func Closest(written string, names []string) []string {
	type candidate struct {
		name     string
		distance int
	}
	plain := func(s string) []rune {
		return []rune(strings.NewReplacer(" ", "", "-", "", "_", "", "\u00a0", "").Replace(strings.ToLower(s)))
	}
	w := plain(written)
	var near []candidate
	for _, name := range names {
		n := plain(name)
		short, long := min(len(w), len(n)), max(len(w), len(n))
		d := long - short // at least; a very long text is compared with no name
		if d <= max(1, long/3) {
			d = editDistance(w, n)
		}
		switch {
		case d <= max(1, long/3):
		case short >= 3 && strings.Contains(string(n), string(w)):
			d = long/3 + 1
		default:
			continue
		}
		near = append(near, candidate{name, d})
	}
	slices.SortStableFunc(near, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.distance, b.distance), cmp.Compare(a.name, b.name))
	})
	out := make([]string, 0, 3)
	for _, c := range near[:min(3, len(near))] {
		out = append(out, c.name)
	}
	return out
}

// editDistance counts the insertions, deletions, replacements and exchanges of
// neighbours that turn a into b (optimal string alignment).
func editDistance(a, b []rune) int {
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			change := 1
			if a[i-1] == b[j-1] {
				change = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+change)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return last[len(b)]
}

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
