package rpc

import (
	"fmt"

	"halfwidth/funcs"
)

// near gives the name most like the one given, or "" where none is like it.
func near(name string, names []string) string {
	if best := funcs.Closest(name, names); len(best) > 0 {
		return best[0]
	}
	return ""
}

// ask is the end of a sentence: a full stop, or a near name as a question.
func ask(near string) string {
	if near == "" {
		return "."
	}
	return fmt.Sprintf("; did you mean %q?", near)
}
