package calculation

import (
	"fmt"
	"strings"

	"halfwidth/funcs"
)

// writtenGroups reads samples written out by name, such as
// North = 12.1; 11.8 | Quay = 10.2; 10.9. Nothing comes back for any other text.
func writtenGroups(in funcs.Input, text string) ([]funcs.Group, *fault) {
	if in.Kind != funcs.Samples {
		return nil, nil
	}
	parts := strings.Split(text, "|")
	if e, err := ParseExpression(text); len(parts) == 1 {
		if l, ok := e.(*List); err != nil || !ok || l.Items[0].Name == "" {
			return nil, nil
		}
	}
	var groups []funcs.Group
	for _, part := range parts {
		name, numbers, _ := strings.Cut(part, "=")
		name = plainText(name)
		e, err := ParseExpression(numbers)
		l, ok := e.(*List)
		if name == "" || err != nil || !ok {
			return nil, bad("bad-value", fmt.Sprintf("holds %s; write each group as NAME = NUMBERS with | between the groups, such as North = 12.1; 11.8 | Quay = 10.2; 10.9", quote(trim(part))))
		}
		g := funcs.Group{Name: name}
		for _, item := range l.Items {
			if item.Name != "" || item.Cell != nil {
				return nil, bad("bad-value", fmt.Sprintf("holds %s in the group %s; write numbers with ; between them", quote(item.Name+item.cellName()), name))
			}
			g.Values = append(g.Values, item.Number)
		}
		groups = append(groups, g)
	}
	return groups, nil
}

// cellName is the address of the cell that an item names, or "".
func (i Item) cellName() string {
	if i.Cell == nil {
		return ""
	}
	return i.Cell.String()
}
