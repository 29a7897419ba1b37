package rpc

import (
	"fmt"
	"strings"
)

// near gives the name most like the one given, or "" where none is like it: at
// most a third of its letters put in, left out, changed or swapped (Damerau
// 1964), case and hyphens not counted. Of equals the first counts.
func near(name string, names []string) string {
	best, least := "", len([]rune(name))/3+1
	letters := folded(name)
	for _, candidate := range names {
		if d := distance(letters, folded(candidate)); d < least {
			best, least = candidate, d
		}
	}
	return best
}

// ask is the end of a sentence: a full stop, or a near name as a question.
func ask(near string) string {
	if near == "" {
		return "."
	}
	return fmt.Sprintf("; did you mean %q?", near)
}

var joined = strings.NewReplacer("-", "", "_", "", " ", "")

func folded(name string) []rune { return []rune(strings.ToLower(joined.Replace(name))) }

// distance counts the letters to put in, leave out, change or swap with their neighbour.
func distance(a, b []rune) int {
	const longest = 200 // names are short; a long text is like none
	if len(a) > longest || len(b) > longest {
		return longest
	}
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return last[len(b)]
}
