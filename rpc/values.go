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
// twice. A list of numbers is one slice, in which a gap (null) is NaN. A value
// with a Fault, its own or that of a part, must not be used.
type Value struct {
	Kind    Kind
	YesNo   bool
	Number  float64
	Text    string
	Numbers []float64
	List    []Value
	Members []Member // of an object, in their order
	Packed  bool     // Numbers came as {"float64le": …}
	Pointer string   // where it stood in the params (RFC 6901)
	Fault   *Error   // -32602, the first of the value and its parts; nil where there is none
}

// Member is one named value of an object.
type Member struct {
	Name  string
	Value Value
}

// ParseValue reads a JSON text. Its errors are -32602 and name the place.
func ParseValue(text []byte, pointer string) (Value, error) {
	v, err := parseFaulty(text, pointer)
	if err == nil && v.Fault != nil {
		err = v.Fault
	}
	return v, err
}

// parseFaulty reads a JSON text to its end, and leaves faults in the values
// that have them. Its error means that the text is no JSON.
func parseFaulty(text []byte, pointer string) (Value, error) {
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
		v.Number, v.Fault, err = p.double(pointer, -1)
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
func (p *valueParser) double(pointer string, element int) (float64, *Error, error) {
	start := p.pos
	if err := p.number(); err != nil {
		return 0, nil, err
	}
	x, err := strconv.ParseFloat(string(p.data[start:p.pos]), 64)
	if err != nil {
		argument := lastOf(pointer)
		if element >= 0 {
			pointer = pointerTo(pointer, strconv.Itoa(element))
		}
		return 0, badElement(pointer, argument, element+1, fmt.Sprintf("is %.40s, which no double holds", p.data[start:p.pos]), "the largest is about 1.8e308"), nil
	}
	return x, nil, nil
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
			v.List, v.Numbers, v.Kind = v.Elements(), nil, List
		}
		switch {
		case v.Kind == List:
			element, err := p.value(pointerTo(pointer, strconv.Itoa(i)))
			if err != nil {
				return v, err
			}
			v.List = append(v.List, element)
			v.take(element.Fault)
		case number:
			x, fault, err := p.double(pointer, i)
			if err != nil {
				return v, err
			}
			v.take(fault)
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

// take keeps the fault of a part, if it is the first.
func (v *Value) take(fault *Error) {
	if v.Fault == nil {
		v.Fault = fault
	}
}

// Elements gives the values of any list.
func (v Value) Elements() []Value {
	if v.Kind != Numbers {
		return v.List
	}
	list := make([]Value, len(v.Numbers), len(v.Numbers)+1)
	for i, x := range v.Numbers {
		element := Value{Kind: Number, Number: x, Pointer: pointerTo(v.Pointer, strconv.Itoa(i))}
		if math.IsNaN(x) {
			element.Kind, element.Number = Null, 0
		}
		if v.Fault != nil && v.Fault.Data.Pointer == element.Pointer {
			element.Fault = v.Fault
		}
		list[i] = element
	}
	return list
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
			packed, err := p.packed(pointer)
			if err != nil || packed.Kind == Numbers {
				return packed, err
			}
			v.Members = append(v.Members, Member{name, packed})
			v.take(packed.Fault)
			p.pos++
			continue
		}
		value, err := p.value(pointerTo(pointer, name))
		if err != nil {
			return v, err
		}
		v.Members = append(v.Members, Member{name, value})
		v.take(value.Fault)
		p.space()
		switch p.peek() {
		case ',':
			p.pos++
		case '}':
			p.pos++
			v.onceEach()
			return v, nil
		default:
			return v, p.unexpected("a comma or } in an object")
		}
	}
}

// onceEach finds fault with a member that stands twice.
func (v *Value) onceEach() {
	const few = 8 // are compared with each other for less than a map costs
	var seen map[string]bool
	if len(v.Members) > few {
		seen = make(map[string]bool, len(v.Members))
	}
	for i := range v.Members {
		m := &v.Members[i]
		twice := seen[m.Name]
		for j := 0; seen == nil && j < i && !twice; j++ {
			twice = v.Members[j].Name == m.Name
		}
		if twice {
			m.Value.Fault = badParams(m.Value.Pointer, m.Name, "is given twice", "give each member once")
			v.take(m.Value.Fault)
		}
		if seen != nil {
			seen[m.Name] = true
		}
	}
}
