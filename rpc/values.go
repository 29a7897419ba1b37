package rpc

import (
	"encoding/base64"
	"encoding/binary"
	"fmt"
	"math"
	"strconv"
)

// Kind is what a JSON value is.
type Kind uint8

const (
	Null Kind = iota
	YesNo
	Number
	Text
	Numbers // a list of nothing but numbers and nulls, or {"float64le": …}
	List    // any other list
	Object
)

func (k Kind) String() string {
	return [...]string{"null", "true or false", "a number", "a text", "a list of numbers", "a list", "an object"}[k]
}

// Value is a JSON value read strictly: no number outside the doubles, no member
// twice. A list of numbers is one slice, in which a gap (null) is NaN.
type Value struct {
	Kind    Kind
	YesNo   bool
	Number  float64
	Text    string
	Numbers []float64
	List    []Value
	Members []Member // of an object, in their order
	Pointer string   // where it stood in the params (RFC 6901)
}

// Member is one named value of an object.
type Member struct {
	Name  string
	Value Value
}

// ParseValue reads a JSON text. Its errors are -32602 and name the place.
func ParseValue(text []byte, pointer string) (Value, error) {
	p := valueParser{scanner{data: text}}
	v, err := p.value(pointer)
	if err == nil {
		if p.space(); p.pos < len(text) {
			err = p.unexpected("the end")
		}
	}
	if fault, ok := err.(*syntaxError); ok {
		err = badParams(pointer, "", "The params are no JSON text: "+fault.Error(), "")
	}
	return v, err
}

// valueParser builds values with the scanner's steps. It recurses, and rests on
// the limit that the envelope was held to.
type valueParser struct{ scanner }

func (p *valueParser) value(pointer string) (Value, error) {
	v := Value{Pointer: pointer}
	p.space()
	var err error
	switch c := p.peek(); {
	case c == '{':
		return p.object(pointer)
	case c == '[':
		return p.list(pointer)
	case c == '"':
		v.Kind = Text
		v.Text, err = p.string()
	case c == '-' || isDigit(c):
		v.Kind = Number
		v.Number, err = p.double(pointer, -1)
	case c == 't':
		v.Kind, v.YesNo, err = YesNo, true, p.word("true")
	case c == 'f':
		v.Kind, err = YesNo, p.word("false")
	case c == 'n':
		err = p.word("null")
	default:
		err = p.unexpected("a value")
	}
	return v, err
}

func (p *valueParser) string() (string, error) {
	raw, escaped, err := p.text()
	return plain(raw, escaped), err
}

// double reads a number to the nearest double, as strconv does. element is its
// place in the list at pointer, or -1.
func (p *valueParser) double(pointer string, element int) (float64, error) {
	start := p.pos
	if err := p.number(); err != nil {
		return 0, err
	}
	x, err := strconv.ParseFloat(string(p.data[start:p.pos]), 64)
	if err != nil {
		argument := lastOf(pointer)
		if element >= 0 {
			pointer = pointerTo(pointer, strconv.Itoa(element))
		}
		return 0, badElement(pointer, argument, element+1, fmt.Sprintf("is %.40s, which no double holds", p.data[start:p.pos]), "the largest is about 1.8e308")
	}
	return x, nil
}

// list reads a list, as Numbers as long as numbers and nulls come.
func (p *valueParser) list(pointer string) (Value, error) {
	v := Value{Kind: Numbers, Pointer: pointer}
	p.pos++
	p.space()
	if p.peek() == ']' {
		p.pos++
		return v, nil
	}
	for i := 0; ; i++ {
		p.space()
		c := p.peek()
		number := c == '-' || isDigit(c)
		if v.Kind == Numbers && !number && c != 'n' {
			v.List, v.Numbers, v.Kind = asList(v.Numbers, pointer), nil, List
		}
		switch {
		case v.Kind == List:
			element, err := p.value(pointerTo(pointer, strconv.Itoa(i)))
			if err != nil {
				return v, err
			}
			v.List = append(v.List, element)
		case number:
			x, err := p.double(pointer, i)
			if err != nil {
				return v, err
			}
			if i == 0 {
				v.Numbers = make([]float64, 0, p.countAhead())
			}
			v.Numbers = append(v.Numbers, x)
		default:
			if err := p.word("null"); err != nil {
				return v, err
			}
			v.Numbers = append(v.Numbers, math.NaN())
		}
		p.space()
		switch p.peek() {
		case ',':
			p.pos++
		case ']':
			p.pos++
			return v, nil
		default:
			return v, p.unexpected("a comma or ] in a list")
		}
	}
}

// countAhead guesses the length of a list whose first number has been passed:
// exactly, for a list of numbers; for any text, no more than half its bytes.
func (p *valueParser) countAhead() int {
	n := 1
	for _, c := range p.data[p.pos:] {
		if c == ',' {
			n++
		} else if c == ']' || c == '"' || c == '{' {
			break
		}
	}
	return min(n, (len(p.data)-p.pos)/2+1)
}

func asList(numbers []float64, pointer string) []Value {
	list := make([]Value, 0, len(numbers)+1)
	for i, x := range numbers {
		element := Value{Kind: Number, Number: x, Pointer: pointerTo(pointer, strconv.Itoa(i))}
		if math.IsNaN(x) {
			element.Kind, element.Number = Null, 0
		}
		list = append(list, element)
	}
	return list
}

// Elements gives the values of any list.
func (v Value) Elements() []Value {
	if v.Kind == Numbers {
		return asList(v.Numbers, v.Pointer)
	}
	return v.List
}

const packedName = "float64le"

func (p *valueParser) object(pointer string) (Value, error) {
	v := Value{Kind: Object, Pointer: pointer}
	p.pos++
	p.space()
	if p.peek() == '}' {
		p.pos++
		return v, nil
	}
	for {
		p.space()
		raw, escaped, err := p.key()
		if err != nil {
			return v, err
		}
		name := plain(raw, escaped)
		p.space()
		if name == packedName && len(v.Members) == 0 && p.peek() == '"' {
			return p.packed(pointer)
		}
		value, err := p.value(pointerTo(pointer, name))
		if err != nil {
			return v, err
		}
		v.Members = append(v.Members, Member{name, value})
		p.space()
		switch p.peek() {
		case ',':
			p.pos++
		case '}':
			p.pos++
			return v, v.onceEach()
		default:
			return v, p.unexpected("a comma or } in an object")
		}
	}
}

// onceEach refuses a member that stands twice.
func (v Value) onceEach() error {
	if len(v.Members) < 2 {
		return nil
	}
	seen := make(map[string]bool, len(v.Members))
	for _, m := range v.Members {
		if seen[m.Name] {
			return badParams(m.Value.Pointer, m.Name, "is given twice", "give each member once")
		}
		seen[m.Name] = true
	}
	return nil
}

// packed reads the rest of {"float64le": "BASE64"}: doubles as 8 bytes each,
// lowest first, in standard base64 with padding (RFC 4648, section 4). NaN is a gap.
func (p *valueParser) packed(pointer string) (Value, error) {
	v := Value{Kind: Numbers, Pointer: pointer}
	raw, escaped, err := p.text()
	if err != nil {
		return v, err
	}
	p.space()
	if p.peek() != '}' {
		if p.peek() == ',' {
			return v, badParams(pointerTo(pointer, packedName), packedName, "has members beside it", "let it stand alone in its object")
		}
		return v, p.unexpected("a comma or } in an object")
	}
	p.pos++
	if escaped {
		raw = []byte(plain(raw, true))
	}
	v.Numbers, err = unpack(raw, pointer)
	return v, err
}

func unpack(text []byte, pointer string) ([]float64, error) {
	at := pointerTo(pointer, packedName)
	bad := func(reason string) ([]float64, error) {
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
