package ooxml

import (
	"bytes"
	"fmt"
	"slices"
)

// rewriteCell gives the cell that was read with another value: its attributes
// are kept, but for the type and the pointers to metadata of the old value (cm
// and vm, ECMA-376 part 1, 18.3.1.4), and so is whatever stands in it beside
// the value.
func rewriteCell(s *scanner, v Value) ([]byte, error) {
	raw := s.buf[s.keep:s.pos]
	x := dataLexer(raw, s.limits)
	x.spaces = slices.Clone(s.spaces)
	for i := range x.spaces {
		x.spaces[i].depth = 0
	}
	if err := x.next(); err != nil {
		return nil, err
	}
	name := string(x.name)
	out := append([]byte{'<'}, name...)
	at, kind := 1+len(name), v.cellType()
	for _, a := range x.attrs {
		switch string(a.name) {
		case "t":
			if kind != "" {
				out = fmt.Appendf(out, ` t="%s"`, kind)
				kind = ""
			}
		case "cm", "vm":
		default:
			out = append(out, raw[at:1+a.to]...)
		}
		at = 1 + a.to
	}
	if kind != "" {
		out = fmt.Appendf(out, ` t="%s"`, kind)
	}
	out = append(out, bytes.TrimRight(raw[at:x.pos], "/>")...)
	prefix := name[:len(name)-len(x.local)]
	value, end := v.appendContent(nil, prefix), "</"+name+">"
	single, from := x.single, x.pos
	var content []byte
	for depth := x.depth(); ; {
		if err := x.next(); err != nil {
			return nil, err
		}
		if x.kind == tokenEnd && x.depth() < depth {
			break
		}
		if x.kind != tokenStart || x.depth() != depth+1 {
			continue
		}
		here := x.start
		old := x.is("v") || x.is("is")
		if err := x.skip(); err != nil {
			return nil, err
		}
		if old {
			content = append(content, raw[from:here]...)
			content = append(content, value...)
			value, from = nil, x.pos
		}
	}
	if !single {
		content = append(content, raw[from:x.start]...)
		end = string(raw[x.start:])
	}
	if value != nil {
		content = append(value, content...)
	}
	if len(content) == 0 {
		return append(out, "/>"...), nil
	}
	return append(append(append(out, '>'), content...), end...), nil
}
