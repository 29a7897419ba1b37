package calculation

import (
	"strings"
	"unicode"
)

// fold gives the form in which texts are compared: without outer space and
// case, a no-break space as a space.
func fold(s string) string {
	s = trim(s)
	for i := 0; i < len(s); i++ {
		if c := s[i]; c >= 0x80 || 'A' <= c && c <= 'Z' {
			return strings.Map(foldRune, s)
		}
	}
	return s
}

// foldRune maps letters that differ in case only to one of them; by way of the
// capital, so that a final sigma is a sigma.
func foldRune(r rune) rune {
	if unicode.IsSpace(r) && r > 0x80 {
		return ' '
	}
	return unicode.ToLower(unicode.ToUpper(r))
}

func trim(s string) string { return strings.TrimFunc(s, unicode.IsSpace) }

// headerForm gives the form in which names of columns are compared: as fold,
// with inner spaces and line breaks as one space.
func headerForm(s string) string { return fold(strings.Join(strings.Fields(s), " ")) }

// nameForm gives the form of the names of functions, inputs and results: lower
// case, with hyphens for spaces.
func nameForm(s string) string {
	return strings.Join(strings.FieldsFunc(fold(s), func(r rune) bool {
		return r == '-' || r == '_' || r == '\u2010' || r == '\u2011' || unicode.IsSpace(r)
	}), "-")
}

// looksLikeNumber reports whether a text is a number but for separators, a
// currency sign or a percent sign.
func looksLikeNumber(s string) bool {
	digits := false
	for i, r := range trim(s) {
		switch {
		case '0' <= r && r <= '9':
			digits = true
		case strings.ContainsRune(".,'’%", r) || unicode.IsSpace(r) || unicode.Is(unicode.Sc, r):
		case (r == '-' || r == '−' || r == '+') && i == 0:
		default:
			return false
		}
	}
	return digits
}

// plural words a count: "1 row", "3 rows".
func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return decimal(n) + " " + noun + "s"
}
