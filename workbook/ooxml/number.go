package ooxml

import "strconv"

// powers holds the powers of ten that are doubles exactly.
var powers = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// scanNumber reads the decimal number at b[i:] and gives the index after it. Up
// to 19 digits whose whole is at most 2^53 are exact as a double, and so is a
// power of ten up to 10^22; one multiplication or division of the two is then
// rounded once and correctly (W. D. Clinger, How to read floating point numbers
// accurately, PLDI 1990). Everything else is left to strconv. b must hold a byte
// after the number that belongs to none. ok is false where no number stands
// there, or none that a double can hold.
func scanNumber(b []byte, i int) (x float64, next int, ok bool) {
	from := i
	negative := false
	if b[i] == '-' {
		negative = true
		i++
	} else if b[i] == '+' {
		i++
	}
	var whole uint64
	first := i
	for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
		whole = whole*10 + uint64(d)
		i++
	}
	digits, decimals := i-first, 0
	if b[i] == '.' {
		i++
		first = i
		for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
			whole = whole*10 + uint64(d)
			i++
		}
		decimals = i - first
		digits += decimals
	}
	if digits == 0 {
		return 0, from, false
	}
	exponent := 0
	if b[i]|0x20 == 'e' {
		i++
		minus := b[i] == '-'
		if minus || b[i] == '+' {
			i++
		}
		first = i
		for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
			if exponent < 100000 {
				exponent = exponent*10 + int(d)
			}
			i++
		}
		if i == first {
			return 0, from, false
		}
		if minus {
			exponent = -exponent
		}
	}
	exponent -= decimals
	if digits > 19 || whole > 1<<53 || exponent < -22 || exponent > 22 {
		x, err := strconv.ParseFloat(string(b[from:i]), 64)
		return x, i, err == nil
	}
	x = float64(whole)
	if exponent < 0 {
		x /= powers[-exponent]
	} else if exponent > 0 {
		x *= powers[exponent]
	}
	if negative {
		x = -x
	}
	return x, i, true
}

// parseNumber reads a text that is a number and nothing else.
func parseNumber(text []byte) (float64, bool) {
	var short [64]byte
	b := append(append(short[:0], text...), 0)
	x, next, ok := scanNumber(b, 0)
	return x, ok && next == len(text)
}

// appendNumber writes the shortest decimal that reads back as the same double:
// plainly within 1e-5 and 1e15, with an exponent outside. x must be finite.
func appendNumber(b []byte, x float64) []byte {
	if x == 0 {
		return append(b, '0')
	}
	form := byte('E')
	if size := max(x, -x); size >= 1e-5 && size < 1e15 {
		form = 'f'
	}
	return strconv.AppendFloat(b, x, form, -1, 64)
}
