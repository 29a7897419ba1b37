package rpc

import (
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
