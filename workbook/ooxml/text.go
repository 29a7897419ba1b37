package ooxml

import (
	"bytes"
	"fmt"
	"unicode/utf16"
	"unicode/utf8"
)

// appendText decodes a stretch of text: line ends (XML 1.0, 2.11), and, unless
// it is literal, references.
func (x *lexer) appendText(dst, raw []byte, literal bool) ([]byte, error) {
	for len(raw) > 0 {
		i := 0
		for i < len(raw) && raw[i] != '&' && raw[i] != '\r' {
			i++
		}
		dst = append(dst, raw[:i]...)
		raw = raw[i:]
		switch {
		case len(raw) == 0:
		case raw[0] == '\r':
			dst = append(dst, '\n')
			raw = raw[1:]
			if len(raw) > 0 && raw[0] == '\n' {
				raw = raw[1:]
			}
		case literal:
			dst = append(dst, '&')
			raw = raw[1:]
		default:
			end := bytes.IndexByte(raw[:min(len(raw), 16)], ';')
			if end < 0 {
				return dst, x.wrong("the text holds an & that starts no reference")
			}
			c, ok := reference(raw[1:end])
			if !ok {
				return dst, x.wrong("the reference %s means nothing in a workbook", raw[:end+1])
			}
			dst = utf8.AppendRune(dst, c)
			raw = raw[end+1:]
		}
	}
	return dst, nil
}

// reference gives the character of an XML reference, written without & and ;.
func reference(name []byte) (rune, bool) {
	switch string(name) {
	case "lt":
		return '<', true
	case "gt":
		return '>', true
	case "amp":
		return '&', true
	case "quot":
		return '"', true
	case "apos":
		return '\'', true
	}
	if len(name) < 2 || name[0] != '#' {
		return 0, false
	}
	base, digits := rune(10), name[1:]
	if digits[0] == 'x' {
		base, digits = 16, digits[1:]
	}
	if len(digits) == 0 {
		return 0, false
	}
	var c rune
	for _, d := range digits {
		v := hexDigit(d)
		if v >= base {
			return 0, false
		}
		if c = c*base + v; c > utf8.MaxRune {
			return 0, false
		}
	}
	return c, isXMLChar(c)
}

// hexDigit gives the value of a hexadecimal digit, 16 for anything else.
func hexDigit(c byte) rune {
	switch {
	case '0' <= c && c <= '9':
		return rune(c - '0')
	case 'a' <= c|0x20 && c|0x20 <= 'f':
		return rune(c|0x20-'a') + 10
	}
	return 16
}

// isXMLChar is the production Char of XML 1.0.
func isXMLChar(c rune) bool {
	return c == '\t' || c == '\n' || c == '\r' ||
		0x20 <= c && c <= 0xD7FF || 0xE000 <= c && c <= 0xFFFD || 0x10000 <= c && c <= 0x10FFFF
}

// plain tells whether text means what its bytes say: nothing in it is to be
// decoded or refused.
func plain(b []byte) bool {
	for i, c := range b {
		switch {
		case c >= 0x80:
			return plainRunes(b[i:])
		case c < 0x20 && c != '\t' && c != '\n', c == '&', c == '_' && i+1 < len(b) && b[i+1] == 'x':
			return false
		}
	}
	return true
}

func plainRunes(b []byte) bool {
	for i := 0; i < len(b); {
		c, n := utf8.DecodeRune(b[i:])
		switch {
		case c == utf8.RuneError && n == 1, !isXMLChar(c), c == '\r', c == '&', c == '_' && i+1 < len(b) && b[i+1] == 'x':
			return false
		}
		i += n
	}
	return true
}

// checkText refuses decoded text that XML cannot hold or that is too long.
func (x *lexer) checkText(b []byte) error {
	for i := 0; i < len(b); {
		if b[i] >= 0x20 && b[i] < 0x80 {
			i++
			continue
		}
		c, n := utf8.DecodeRune(b[i:])
		if c == utf8.RuneError && n == 1 {
			return x.wrong("the text is not valid UTF-8")
		}
		if !isXMLChar(c) {
			return x.wrong("the text holds the control character %#02x", c)
		}
		i += n
	}
	return checkLength(b, x.limits)
}

func checkLength(b []byte, limits Limits) error {
	if len(b) > limits.TextLength && utf16Length(b) > limits.TextLength {
		return beyond(fmt.Sprintf("a text has %d characters, the limit is %d", utf16Length(b), limits.TextLength), "TextLength")
	}
	return nil
}

// utf16Length counts the characters as the file format counts them.
func utf16Length(b []byte) int {
	n := 0
	for _, c := range string(b) {
		n++
		if c > 0xFFFF {
			n++
		}
	}
	return n
}

// unescape decodes _xHHHH_, which stands for characters that XML cannot hold
// (ECMA-376 part 1, 22.9.2.19), in place.
func unescape(b []byte) []byte {
	i := bytes.Index(b, []byte("_x"))
	if i < 0 {
		return b
	}
	out := b[:i]
	for i < len(b) {
		c, ok := escaped(b[i:])
		if !ok {
			out = append(out, b[i])
			i++
			continue
		}
		i += 7
		if utf16.IsSurrogate(c) {
			low, _ := escaped(b[i:])
			if c = utf16.DecodeRune(c, low); c != utf8.RuneError {
				i += 7
			}
		}
		out = utf8.AppendRune(out, c)
	}
	return out
}

// escaped reads _xHHHH_ at the start of b.
func escaped(b []byte) (rune, bool) {
	if len(b) < 7 || b[0] != '_' || b[1] != 'x' || b[6] != '_' {
		return 0, false
	}
	var c rune
	for _, d := range b[2:6] {
		v := hexDigit(d)
		if v == 16 {
			return 0, false
		}
		c = c<<4 | v
	}
	return c, true
}

// appendEscaped writes text as the content of an element: XML's own characters
// as references, and what XML cannot hold, or would not keep, as _xHHHH_.
func appendEscaped(dst []byte, s string) []byte {
	for i, c := range s {
		switch {
		case c == '&':
			dst = append(dst, "&amp;"...)
		case c == '<':
			dst = append(dst, "&lt;"...)
		case c == '>':
			dst = append(dst, "&gt;"...)
		case c == '\r' || !isXMLChar(c):
			dst = fmt.Appendf(dst, "_x%04X_", c)
		case c == '_':
			// A text that looks like an escape, or would with the escape that may
			// follow it, is kept from being read as one.
			if _, ok := escaped([]byte(s[i:min(i+6, len(s))] + "_")); ok {
				dst = append(dst, "_x005F"...)
			}
			dst = append(dst, '_')
		default:
			dst = utf8.AppendRune(dst, c)
		}
	}
	return dst
}

// appendAttribute writes text as the value of an attribute in double quotes.
func appendAttribute(dst []byte, s string) []byte {
	for _, c := range s {
		switch c {
		case '&':
			dst = append(dst, "&amp;"...)
		case '<':
			dst = append(dst, "&lt;"...)
		case '>':
			dst = append(dst, "&gt;"...)
		case '"':
			dst = append(dst, "&quot;"...)
		case '\t', '\n', '\r':
			dst = fmt.Appendf(dst, "&#%d;", c)
		default:
			dst = utf8.AppendRune(dst, c)
		}
	}
	return dst
}

// needsSpace tells whether a reader might drop white space from the text unless
// told to keep it.
func needsSpace(s string) bool {
	if s == "" {
		return false
	}
	return isXMLSpace(s[0]) || isXMLSpace(s[len(s)-1]) || bytes.ContainsAny([]byte(s), "\n\t")
}
