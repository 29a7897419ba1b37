package page

import (
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// figure writes a number for reading: 6 significant digits, whole numbers in
// full, a minus sign that looks like one.
func figure(x float64) string {
	a := math.Abs(x)
	switch {
	case math.IsInf(x, 1):
		return "infinite"
	case x == math.Trunc(x) && a < 1e15:
		return minus(strconv.FormatFloat(x, 'f', 0, 64))
	case a >= 1e6 && a < 1e15:
		return minus(strconv.FormatFloat(x, 'f', 0, 64))
	}
	rounded, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 6, 64), 64)
	if a < 1e-5 || a >= 1e15 {
		return minus(strconv.FormatFloat(rounded, 'e', -1, 64))
	}
	return minus(strconv.FormatFloat(rounded, 'f', -1, 64))
}

// percent writes a level: 0.95 is 95%.
func percent(level float64) string { return strconv.FormatFloat(level*100, 'g', 12, 64) + "%" }

// plural words a count.
func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return strconv.Itoa(n) + " " + noun + "s"
}

// spaced writes a name with spaces for its hyphens, where they do not belong to
// the word.
func spaced(name string) string {
	return hyphened.Replace(strings.ReplaceAll(name, "-", " "))
}

var hyphened = strings.NewReplacer("half width", "half-width", "p value", "p-value", "lag 1 ", "lag-1 ")

// short writes a number to 4 significant digits, whole numbers in full.
func short(x float64) string {
	if x == math.Trunc(x) {
		return figure(x)
	}
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 4, 64), 64)
	if err != nil {
		return figure(x)
	}
	return figure(rounded)
}

// sentence gives a phrase its capital and its full stop.
func sentence(s string) string {
	if s == "" {
		return ""
	}
	r, n := utf8.DecodeRuneInString(s)
	s = string(unicode.ToUpper(r)) + s[n:]
	if strings.HasSuffix(s, ".") || strings.HasSuffix(s, "?") {
		return s
	}
	return s + "."
}

// withoutGaps gives the values that are there.
func withoutGaps(v []float64) []float64 {
	out := make([]float64, 0, len(v))
	for _, x := range v {
		if !math.IsNaN(x) {
			out = append(out, x)
		}
	}
	return out
}

// printable puts a space in place of characters that XML does not allow.
func printable(s string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsControl(r) || r == '\uFFFE' || r == '\uFFFF' {
			return ' '
		}
		return r
	}, strings.ToValidUTF8(s, "\uFFFD"))
}

// minus writes a negative number with a minus sign.
func minus(s string) string {
	if rest, ok := strings.CutPrefix(s, "-"); ok {
		return "−" + rest
	}
	return s
}
