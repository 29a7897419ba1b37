package texttab

import (
	"io"
	"os"
	"runtime"
	"strings"
	"unicode"

	"golang.org/x/term"
)

// Width is where long lines are broken where there is no terminal that says
// otherwise.
const Width = 100

// Screen is what text is written to.
type Screen struct {
	Width    int  // of a line, in characters of single width
	Terminal bool // somebody looks at it; elsewhere each row of a table is one line, for programs to search
	Styled   bool // it shows bold type
}

// narrowest is the least width that a terminal is taken to have.
const narrowest = 40

// ScreenOf tells what w is, or what its Unwrap gives. A terminal has its own
// width, and shows bold type unless the environment asks for plain text
// (NO_COLOR, TERM=dumb) or a console of Windows may take no commands.
func ScreenOf(w io.Writer) Screen {
	f, ok := w.(interface{ Fd() uintptr }) // a file, or what passes on to one
	if !ok || !term.IsTerminal(int(f.Fd())) {
		return Screen{Width: Width}
	}
	s := Screen{Width: Width, Terminal: true, Styled: os.Getenv("NO_COLOR") == "" && os.Getenv("TERM") != "dumb"}
	if runtime.GOOS == "windows" && os.Getenv("WT_SESSION") == "" && os.Getenv("TERM") == "" {
		s.Styled = false
	}
	if width, _, err := term.GetSize(int(f.Fd())); err == nil && width > 0 {
		s.Width = max(width, narrowest)
	}
	return s
}

// Wrap breaks prose at spaces so that no line passes width where that can be
// done; lines after the first begin with indent.
func Wrap(text string, width int, indent string) string {
	var b strings.Builder
	column := 0
	for i, word := range strings.Fields(Clean(text)) {
		n := cells(word)
		switch {
		case i == 0:
		case column+1+n > width:
			b.WriteString("\n" + indent)
			column = cells(indent)
		default:
			b.WriteByte(' ')
			column++
		}
		b.WriteString(word)
		column += n
	}
	return b.String()
}

// Fit breaks a line of text where w is a terminal that it is too long for;
// elsewhere it stays one line, for programs to search.
func Fit(w io.Writer, line string) string {
	if s := ScreenOf(w); s.Terminal {
		return Wrap(line, s.Width, "  ")
	}
	return Clean(line)
}

// Clean replaces what would steer a terminal instead of being shown: control
// characters and marks that turn the direction of writing. Texts of workbooks
// may hold anything.
func Clean(text string) string {
	return strings.Map(func(r rune) rune {
		switch {
		case unicode.IsSpace(r):
			return r
		case unicode.IsControl(r), '\u202a' <= r && r <= '\u202e', '\u2066' <= r && r <= '\u2069':
			return unicode.ReplacementChar
		}
		return r
	}, text)
}

// wide lists the characters that take two places on a terminal: East Asian wide
// and full-width ones and pictures (Unicode Standard Annex 11, in blocks).
var wide = &unicode.RangeTable{
	R16: []unicode.Range16{{0x1100, 0x115f, 1}, {0x2e80, 0x303e, 1}, {0x3041, 0xa4cf, 1}, {0xac00, 0xd7a3, 1}, {0xf900, 0xfaff, 1},
		{0xfe30, 0xfe6f, 1}, {0xff00, 0xff60, 1}, {0xffe0, 0xffe6, 1}},
	R32: []unicode.Range32{{0x1f300, 0x1f64f, 1}, {0x1f680, 0x1f6ff, 1}, {0x1f900, 0x1f9ff, 1}, {0x20000, 0x3fffd, 1}},
}

// cells is how many places a text takes on a terminal.
func cells(text string) int {
	n := 0
	for _, r := range text {
		switch {
		case r < unicode.MaxASCII:
			n++ // most of them, and quick
		case unicode.In(r, unicode.Mn, unicode.Me, unicode.Cf):
		case unicode.Is(wide, r):
			n += 2
		default:
			n++
		}
	}
	return n
}
