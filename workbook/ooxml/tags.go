package ooxml

import (
	"bytes"
	"fmt"
)

// namespace is a namespace that the reader tells apart. The strict and the
// transitional form of one (ISO/IEC 29500 parts 1 and 4) are the same.
type namespace uint8

const (
	spaceOther         namespace = iota
	spaceMain                    // SpreadsheetML
	spaceRelationships           // r:id
	spacePackage                 // the relationship parts
	spaceContentTypes
	spaceCompatibility // mc:AlternateContent (ECMA-376 part 3)
)

const (
	mainTransitional  = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
	mainStrict        = "http://purl.oclc.org/ooxml/spreadsheetml/main"
	relTransitional   = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
	relStrict         = "http://purl.oclc.org/ooxml/officeDocument/relationships"
	packageRelations  = "http://schemas.openxmlformats.org/package/2006/relationships"
	packageTypes      = "http://schemas.openxmlformats.org/package/2006/content-types"
	compatibility     = "http://schemas.openxmlformats.org/markup-compatibility/2006"
	namespaceOfPrefix = "xmlns"
)

// Beyond these a tag costs more time than an honest file has reason for.
const (
	maxTagAttributes = 1024
	maxNamespaces    = 256
)

// fewTagAttributes is up to where comparing each with each is quicker than a map.
const fewTagAttributes = 24

func namespaceOf(uri string) namespace {
	switch uri {
	case mainTransitional, mainStrict:
		return spaceMain
	case relTransitional, relStrict:
		return spaceRelationships
	case packageRelations:
		return spacePackage
	case packageTypes:
		return spaceContentTypes
	case compatibility:
		return spaceCompatibility
	}
	return spaceOther
}

// binding is a prefix that an element binds to a namespace.
type binding struct {
	prefix string
	space  namespace
	depth  int
}

// attr is an attribute of the current start tag, as it is written.
type attr struct {
	name, value []byte
	from, to    int // where name starts and the closing quote ends, in the tag
}

func isXMLSpace(c byte) bool { return c == ' ' || c == '\n' || c == '\t' || c == '\r' }

// nameEnd gives the index of the first byte from i on that no name holds.
func nameEnd(b []byte, i int) int {
	for i < len(b) {
		switch b[i] {
		case ' ', '\t', '\r', '\n', '/', '>', '=', '<', '"', '\'', '&', 0:
			return i
		}
		i++
	}
	return i
}

func startsName(c byte) bool { return isLetter(c) || c == '_' || c == ':' || c >= 0x80 }

// tagEnd gives the distance from pos to the > that ends the start tag there.
func (x *lexer) tagEnd() (int, error) {
	i := 1
	for {
		if !x.have(i + 1) {
			return 0, x.early()
		}
		k := bytes.IndexAny(x.buf[x.pos+i:x.end], `>"'<`)
		if k < 0 {
			i = x.end - x.pos
			continue
		}
		i += k
		switch c := x.buf[x.pos+i]; c {
		case '>':
			return i, nil
		case '<':
			return 0, x.wrong("a tag holds another <")
		default:
			n, err := x.find(string(rune(c)), i+1)
			if err != nil {
				return 0, err
			}
			i = n + 1
		}
	}
}

func (x *lexer) startTag() error {
	n, err := x.tagEnd()
	if err != nil {
		return err
	}
	tag := x.buf[x.pos+1 : x.pos+n]
	single := len(tag) > 0 && tag[len(tag)-1] == '/'
	if single {
		tag = tag[:len(tag)-1]
	}
	i := nameEnd(tag, 0)
	if i == 0 || !startsName(tag[0]) {
		return x.wrong("a tag has no name")
	}
	switch {
	case len(x.opens) == 0 && x.rootSeen:
		return x.wrong("the XML has two root elements")
	case len(x.opens) >= x.limits.Depth:
		return beyond(fmt.Sprintf("XML elements are nested deeper than %d", x.limits.Depth), "Depth")
	}
	x.rootSeen = true
	name := tag[:i]
	x.open(name)
	if err := x.readAttributes(tag, i); err != nil {
		return err
	}
	x.kind, x.name, x.single = tokenStart, name, single
	x.pos += n + 1
	if !x.split() {
		return x.wrong("the prefix of <%.40s> is not declared", name)
	}
	return nil
}

// readAttributes reads the attributes that follow the name of a start tag.
func (x *lexer) readAttributes(tag []byte, i int) error {
	x.attrs = x.attrs[:0]
	for {
		from := i
		for i < len(tag) && isXMLSpace(tag[i]) {
			i++
		}
		if i == len(tag) {
			return x.unique()
		}
		nameFrom := i
		i = nameEnd(tag, i)
		a := attr{name: tag[nameFrom:i], from: nameFrom}
		if len(a.name) == 0 || from == nameFrom || !startsName(a.name[0]) {
			return x.wrong("the attributes of <%.40s> are not well formed", tag[:nameEnd(tag, 0)])
		}
		for i < len(tag) && isXMLSpace(tag[i]) {
			i++
		}
		if i < len(tag) && tag[i] == '=' {
			i++
			for i < len(tag) && isXMLSpace(tag[i]) {
				i++
			}
		} else {
			i = len(tag)
		}
		if i >= len(tag) || tag[i] != '"' && tag[i] != '\'' {
			return x.wrong("the attribute %.40s has no value in quotes", a.name)
		}
		k := bytes.IndexByte(tag[i+1:], tag[i])
		if k < 0 {
			return x.wrong("the value of the attribute %.40s has no end", a.name)
		}
		a.value = tag[i+1 : i+1+k]
		i += k + 2
		a.to = i
		if bytes.IndexByte(a.value, '<') >= 0 {
			return x.wrong("the value of the attribute %.40s holds a <", a.name)
		}
		if len(x.attrs) == maxTagAttributes {
			return x.wrong("a tag has more than %d attributes", maxTagAttributes)
		}
		x.attrs = append(x.attrs, a)
		if err := x.bind(a); err != nil {
			return err
		}
	}
}

// bind takes note of a namespace declaration.
func (x *lexer) bind(a attr) error {
	prefix, found := bytes.CutPrefix(a.name, []byte(namespaceOfPrefix))
	if !found || len(prefix) > 0 && prefix[0] != ':' {
		return nil
	}
	uri, err := x.value(a.value)
	if err != nil {
		return err
	}
	if len(prefix) > 0 {
		prefix = prefix[1:]
	}
	if len(x.spaces) == maxNamespaces {
		return x.wrong("more than %d namespaces are declared at once", maxNamespaces)
	}
	x.spaces = append(x.spaces, binding{string(prefix), namespaceOf(uri), len(x.opens)})
	return nil
}

// unique refuses an attribute that is given twice.
func (x *lexer) unique() error {
	if len(x.attrs) <= fewTagAttributes {
		for i := range x.attrs {
			for k := range i {
				if bytes.Equal(x.attrs[i].name, x.attrs[k].name) {
					return x.wrong("the attribute %.40s is given twice", x.attrs[i].name)
				}
			}
		}
		return nil
	}
	seen := make(map[string]bool, len(x.attrs))
	for _, a := range x.attrs {
		if seen[string(a.name)] {
			return x.wrong("the attribute %.40s is given twice", a.name)
		}
		seen[string(a.name)] = true
	}
	return nil
}

// split finds the namespace and the local part of the token's name. It is false
// where the name has a prefix that is not declared.
func (x *lexer) split() (declared bool) {
	var prefix []byte
	x.local = x.name
	if i := bytes.IndexByte(x.name, ':'); i >= 0 {
		prefix, x.local = x.name[:i], x.name[i+1:]
	}
	x.space, declared = x.resolve(prefix)
	return declared || len(prefix) == 0 || string(prefix) == "xml"
}

func (x *lexer) resolve(prefix []byte) (space namespace, declared bool) {
	for i := len(x.spaces) - 1; i >= 0; i-- {
		if x.spaces[i].prefix == string(prefix) {
			return x.spaces[i].space, true
		}
	}
	return spaceOther, false
}

// stray passes over an element that has no place where it stands. In the
// spreadsheet namespace it is refused, since values that a reader passes over are
// missing from a sample; and so are contents to choose from. What other
// namespaces add is not for this reader.
func (x *lexer) stray() error {
	switch {
	case x.space == spaceCompatibility:
		return x.wrong("<%.40s> stands among the values; open it in the program that wrote it, and save it as a plain workbook", x.name)
	case x.space == spaceMain && string(x.local) != "extLst":
		return x.wrong("<%.40s> stands where it has no place", x.name)
	}
	return x.skip()
}

// rawAttr gives the value, as it is written, of an attribute without a prefix.
func (x *lexer) rawAttr(name string) []byte {
	for i := range x.attrs {
		if string(x.attrs[i].name) == name {
			return x.attrs[i].value
		}
	}
	return nil
}

// attr gives the value of an attribute that is a number or one of a few words:
// without white space around it, so that an empty value is as good as none.
func (x *lexer) attr(name string) []byte {
	raw := trimSpace(x.rawAttr(name))
	if bytes.IndexByte(raw, '&') >= 0 {
		if b, err := x.appendText(nil, raw, false); err == nil {
			return trimSpace(b)
		}
	}
	return raw
}

// attrText gives the value of an attribute without a prefix.
func (x *lexer) attrText(name string) (string, error) { return x.value(x.rawAttr(name)) }

// flag gives the value of a yes-or-no attribute, false where there is none.
func (x *lexer) flag(name string) bool {
	switch string(x.attr(name)) {
	case "1", "true", "on":
		return true
	}
	return false
}

// attrIn gives the value of an attribute whose prefix is bound to the namespace.
func (x *lexer) attrIn(space namespace, local string) (string, error) {
	for _, a := range x.attrs {
		if i := bytes.IndexByte(a.name, ':'); i > 0 && string(a.name[i+1:]) == local {
			if bound, _ := x.resolve(a.name[:i]); bound == space {
				return x.value(a.value)
			}
		}
	}
	return "", nil
}

// value decodes an attribute's value. White space in it counts as spaces, unless
// it is written as references (XML 1.0, 3.3.3).
func (x *lexer) value(raw []byte) (string, error) {
	if !bytes.ContainsAny(raw, "&\r\n\t") {
		return string(raw), nil
	}
	raw = bytes.ReplaceAll(raw, []byte("\r\n"), []byte(" "))
	for i, c := range raw {
		if isXMLSpace(c) {
			raw[i] = ' '
		}
	}
	b, err := x.appendText(nil, raw, false)
	return string(b), err
}
