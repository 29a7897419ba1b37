package rpc

import (
	"encoding/base64"
	"encoding/binary"
	"fmt"
	"math"
	"strconv"
)

const packedName = "float64le"

// packed reads the rest of {"float64le": "BASE64"}: doubles as 8 bytes each,
// lowest first, in standard base64 with padding (RFC 4648, section 4). NaN is a
// gap. Before a second member it stops, and gives a text with a fault.
func (p *valueParser) packed(pointer string) (Value, error) {
	v := Value{Kind: Numbers, Packed: true, Pointer: pointer}
	raw, escaped, err := p.text()
	if err != nil {
		return v, err
	}
	p.space()
	switch p.peek() {
	case '}':
		p.pos++
	case ',':
		at := pointerTo(pointer, packedName)
		fault := badParams(at, packedName, "stands beside other members", "let it stand alone in its object")
		return Value{Kind: Text, Pointer: at, Fault: fault}, nil
	default:
		return v, p.unexpected("a comma or } in an object")
	}
	if escaped {
		raw = []byte(plain(raw, true))
	}
	v.Numbers, v.Fault = unpack(raw, pointer)
	return v, nil
}

func unpack(text []byte, pointer string) ([]float64, *Error) {
	at := pointerTo(pointer, packedName)
	bad := func(reason string) ([]float64, *Error) {
		return nil, badParams(at, packedName, reason, "give the doubles as 8 bytes each, lowest byte first, in base64 with padding")
	}
	var piece [24 << 10]byte // of a size that doubles and groups of base64 both divide
	const step = len(piece) / 3 * 4
	numbers := make([]float64, 0, len(text)/4*3/8)
	for len(text) > 0 {
		n := min(step, len(text))
		got, err := base64.StdEncoding.Strict().Decode(piece[:], text[:n])
		if err != nil || n == step && got != len(piece) {
			return bad("is not base64")
		}
		if got%8 != 0 {
			return bad(fmt.Sprintf("has %d bytes, which is no whole number of doubles", len(numbers)*8+got))
		}
		text = text[n:]
		for b := piece[:got]; len(b) > 0; b = b[8:] {
			x := math.Float64frombits(binary.LittleEndian.Uint64(b))
			if math.IsInf(x, 0) {
				return bad(fmt.Sprintf("holds an infinite number at place %d", len(numbers)+1))
			}
			numbers = append(numbers, x)
		}
	}
	return numbers, nil
}

// Series is a list of numbers on its way out: a gap (NaN) goes as null.
type Series []float64

// MarshalJSON writes the numbers as encoding/json would write each.
func (s Series) MarshalJSON() ([]byte, error) {
	b := make([]byte, 0, 2+20*len(s))
	b = append(b, '[')
	for i, x := range s {
		if i > 0 {
			b = append(b, ',')
		}
		if math.IsInf(x, 0) {
			return nil, fmt.Errorf("number %d of a list is infinite", i+1)
		}
		b = appendNumber(b, x)
	}
	return append(b, ']'), nil
}

// appendNumber writes the shortest text that reads back as x, and null for NaN.
// Like ECMAScript, and so like most readers of JSON, it writes an exponent only
// below 1e-6 and from 1e21 on.
func appendNumber(b []byte, x float64) []byte {
	if math.IsNaN(x) {
		return append(b, "null"...)
	}
	format := byte('f')
	if a := math.Abs(x); a != 0 && (a < 1e-6 || a >= 1e21) {
		format = 'e'
	}
	b = strconv.AppendFloat(b, x, format, -1, 64)
	if n := len(b); format == 'e' && b[n-4] == 'e' && b[n-2] == '0' {
		b = append(b[:n-2], b[n-1]) // e-09 as e-9
	}
	return b
}
