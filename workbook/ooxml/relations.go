package ooxml

import (
	"fmt"
	"path"
	"strings"
)

// relation is one relationship of a part: what it is to which other part.
type relation struct {
	id       string
	kind     string // the last step of its type, such as worksheet
	target   string // the other part's name; empty if that lies outside the file
	isOffice bool   // a relationship of the office document namespaces
}

// slashes gives a name with slashes where careless writers put backslashes.
func slashes(name string) string { return strings.ReplaceAll(name, `\`, "/") }

// relationsPart is the name of the part with the relationships of another, or of
// the package where that is "" (ECMA-376 part 2, 6.5.2.3).
func relationsPart(part string) string {
	dir, base := path.Split(slashes(part))
	return dir + "_rels/" + base + ".rels"
}

// resolve gives the part that a relationship of the part leads to. A target may
// be absolute or relative, with slashes of either kind.
func resolve(part, target string) string {
	target, _, _ = strings.Cut(target, "#")
	target = slashes(target)
	if !strings.HasPrefix(target, "/") {
		target = path.Join("/", path.Dir(slashes(part)), target)
	}
	return path.Clean(target)[1:]
}

// relations reads the relationships of a part, of the package where it is "".
// A part without any has none.
func (c *container) relations(part string) ([]relation, error) {
	entry := c.find(relationsPart(part))
	if entry < 0 {
		return nil, nil
	}
	var list []relation
	ids := make(map[string]bool)
	err := c.walk(entry, func(x *lexer) error {
		if x.space != spacePackage || string(x.local) != "Relationship" {
			return nil
		}
		id, err := x.attrText("Id")
		if err != nil {
			return err
		}
		kind, err := x.attrText("Type")
		if err != nil {
			return err
		}
		target, err := x.attrText("Target")
		if err != nil {
			return err
		}
		if id != "" && ids[id] {
			return x.wrong("two relationships have the id %.40q", id)
		}
		if len(list) == x.limits.Relations {
			return beyond(fmt.Sprintf("a part has more than %d relationships", x.limits.Relations), "Relations")
		}
		ids[id] = true
		r := relation{id: id, kind: kind[strings.LastIndexByte(kind, '/')+1:]}
		r.isOffice = strings.HasPrefix(kind, relTransitional+"/") || strings.HasPrefix(kind, relStrict+"/")
		if string(x.attr("TargetMode")) != "External" && target != "" {
			r.target = resolve(part, target)
		}
		list = append(list, r)
		return nil
	})
	return list, err
}

// document gives an entry's XML as UTF-8 in memory, and its byte order if it
// is in UTF-16.
func (c *container) document(entry int) ([]byte, byteOrder, error) {
	data, err := c.load(entry)
	if err != nil {
		return nil, nil, err
	}
	data, order, err := xmlBytes(data)
	return data, order, place(err, "", c.name(entry), "")
}

// walk calls visit at each start tag of an entry's XML. visit may read on to the
// element's end; it is not called for elements that it read.
func (c *container) walk(entry int, visit func(x *lexer) error) error {
	data, _, err := c.document(entry)
	if err != nil {
		return err
	}
	return place(walk(ownLexer(data, c.limits), visit), "", c.name(entry), "")
}

func walk(x *lexer, visit func(x *lexer) error) error {
	for {
		if err := x.next(); err != nil {
			return err
		}
		switch x.kind {
		case tokenEOF:
			return nil
		case tokenStart:
			if err := visit(x); err != nil {
				return err
			}
		}
	}
}

// content reads on to the end of the current element and gives the texts
// directly in it.
func (x *lexer) content() (string, error) {
	depth := x.depth()
	var text []byte
	for {
		err := x.next()
		if err != nil {
			return "", err
		}
		switch {
		case x.kind == tokenEnd && x.depth() < depth:
			return string(text), nil
		case x.kind == tokenText && x.depth() == depth:
			if text, err = x.appendText(text, x.text, x.literal); err != nil {
				return "", err
			}
		}
	}
}

// number reads an attribute that holds a whole number of at least 0.
func (x *lexer) number(name string, absent int) (int, error) {
	raw := x.attr(name)
	if len(raw) == 0 {
		return absent, nil
	}
	n := 0
	for _, c := range raw {
		if c < '0' || c > '9' || n > 1<<28 {
			return 0, x.wrong("the attribute %s is %.40q, not a whole number", name, raw)
		}
		n = n*10 + int(c-'0')
	}
	return n, nil
}

// missing is the error for a relationship that leads nowhere.
func missing(what, target string) *Error {
	if target == "" {
		target = "nothing"
	}
	return damaged(fmt.Sprintf("the file has no part for %s (its relationship leads to %s)", what, target))
}
