package rpc

import (
	"bytes"
	"fmt"
	"math"
	"strconv"
	"unicode/utf8"

	"halfwidth/funcs"
)

// object is a JSON object whose members keep their order.
type object []entry

type entry struct {
	name  string
	value any
}

// MarshalJSON writes the members in their order.
func (o object) MarshalJSON() ([]byte, error) {
	var b bytes.Buffer
	b.WriteByte('{')
	for i, e := range o {
		if i > 0 {
			b.WriteByte(',')
		}
		b.Write(appendText(b.AvailableBuffer(), e.name))
		b.WriteByte(':')
		if err := encodeJSON(&b, e.value); err != nil {
			return nil, err
		}
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// appendText writes a JSON string.
func appendText(b []byte, text string) []byte {
	simple := utf8.ValidString(text)
	for i := 0; i < len(text) && simple; i++ {
		simple = plainInText[text[i]]
	}
	if simple {
		b = append(b, '"')
		b = append(b, text...)
		return append(b, '"')
	}
	var buf bytes.Buffer
	_ = encodeJSON(&buf, text) // a text cannot fail
	return append(b, buf.Bytes()...)
}

// appendResult writes a result. One that JSON does not hold is a fault of ours.
func appendResult(b []byte, name string, value any) ([]byte, error) {
	b = append(appendText(b, name), ':')
	switch v := value.(type) {
	case float64:
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("%w: the result %s is %v", funcs.ErrInternal, name, v)
		}
		return appendNumber(b, v), nil
	case int:
		return strconv.AppendInt(b, int64(v), 10), nil
	case string:
		return appendText(b, v), nil
	case bool:
		return strconv.AppendBool(b, v), nil
	}
	return nil, fmt.Errorf("%w: the result %s is a %T", funcs.ErrInternal, name, value)
}

// encodeOutcome writes an outcome; outcomeSchema describes it. What does not
// exist is absent.
func encodeOutcome(o *funcs.Outcome) (encoded, error) {
	b := append(make([]byte, 0, 2048), `{"function":`...)
	b = appendText(b, o.Function.Name)
	b = append(b, `,"status":`...)
	b = appendText(b, string(o.Status))
	b = append(b, `,"results":{`...)
	var err error
	for i, r := range o.Results() {
		if i > 0 {
			b = append(b, ',')
		}
		if b, err = appendResult(b, r.Name, r.Value); err != nil {
			return nil, err
		}
	}
	b = append(b, '}')
	if o.Function.Table != nil && o.Status != funcs.StatusRefused {
		if b, err = appendTable(b, o); err != nil {
			return nil, err
		}
	}
	b = append(b, `,"findings":[`...)
	for i, f := range o.Findings {
		if i > 0 {
			b = append(b, ',')
		}
		b = appendFinding(b, f)
	}
	return append(b, "]}"...), nil
}

func appendTable(b []byte, o *funcs.Outcome) ([]byte, error) {
	b = append(b, `,"table":[`...)
	for i, row := range o.Rows {
		if i > 0 {
			b = append(b, ',')
		}
		b = append(b, `{"values":{`...)
		first := true
		for _, column := range o.Function.Table {
			value, ok := row.Values[column.Name]
			if !ok {
				continue
			}
			if !first {
				b = append(b, ',')
			}
			first = false
			var err error
			if b, err = appendResult(b, column.Name, value); err != nil {
				return nil, err
			}
		}
		b = append(b, `},"status":`...)
		b = appendText(b, string(row.Status()))
		b = append(b, `,"note":`...)
		b = appendText(b, funcs.Note(row.Findings))
		b = append(b, '}')
	}
	return append(b, ']'), nil
}

func appendFinding(b []byte, f funcs.Finding) []byte {
	b = append(b, `{"code":`...)
	b = appendText(b, f.Code)
	b = append(b, `,"severity":`...)
	b = appendText(b, f.Severity.String())
	if f.Input != "" {
		b = append(b, `,"input":`...)
		b = appendText(b, f.Input)
	}
	b = append(b, `,"message":`...)
	b = appendText(b, f.Message)
	for i, cell := range f.Cells {
		if i == 0 {
			b = append(b, `,"cells":[`...)
		} else {
			b = append(b, ',')
		}
		b = appendText(b, cell)
	}
	if len(f.Cells) > 0 {
		b = append(b, ']')
	}
	return append(b, '}')
}
