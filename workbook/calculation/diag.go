package calculation

import "strings"

// orList joins texts as "a, b or c".
func orList(texts []string) string { return joinList(texts, " or ") }

// andList joins texts as "a, b and c".
func andList(texts []string) string { return joinList(texts, " and ") }

func joinList(texts []string, last string) string {
	if len(texts) < 2 {
		return strings.Join(texts, "")
	}
	n := len(texts) - 1
	return strings.Join(texts[:n], ", ") + last + texts[n]
}

// quoteAll puts double quotes round each text.
func quoteAll(texts []string) []string {
	out := make([]string, len(texts))
	for i, t := range texts {
		out[i] = quote(t)
	}
	return out
}
