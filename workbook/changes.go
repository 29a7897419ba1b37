package workbook

import (
	"bytes"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"os"
	"regexp"
	"strings"
	"unicode/utf8"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// tableMark is the defined name, local to a sheet, that marks a table sheet as
// one that a fill made.
const tableMark = "halfwidth_table"

// isOurTable reports whether a sheet is a table sheet that an earlier fill made.
func (b *Book) isOurTable(sheet string) bool {
	at := b.SheetIndex(sheet)
	for _, n := range b.DefinedNames() {
		if at >= 0 && n.Sheet == at && strings.EqualFold(n.Name, tableMark) {
			return true
		}
	}
	return false
}

// changes turns results into what is to be changed in the file.
func (b *Book) changes(results *calculation.Results) (ooxml.Changes, error) {
	c := ooxml.Changes{Edits: map[int][]ooxml.Edit{}}
	for _, row := range results.Rows {
		sheet := b.SheetIndex(row.Row.Sheet())
		for _, e := range row.Edits {
			c.Edits[sheet] = append(c.Edits[sheet], ooxml.Edit{Row: e.Cell.Row, Col: e.Cell.Col, Value: value(e.Value)})
		}
	}
	for _, t := range results.Tables {
		if err := b.addTable(&c, t); err != nil {
			return c, err
		}
	}
	for sheet, edits := range c.Edits {
		changed, err := b.Changes(sheet, edits)
		if err != nil {
			return c, err
		}
		c.Edits[sheet] = changed
	}
	rest, err := b.restOn(c.Edits)
	c.Recalculate = rest
	return c, err
}

// addTable adds a table sheet, or replaces the cells of one that a fill made.
func (b *Book) addTable(c *ooxml.Changes, t calculation.TableSheet) error {
	rows := [][]ooxml.Value{make([]ooxml.Value, len(t.Header))}
	for i, name := range t.Header {
		rows[0][i] = ooxml.TextValue(name)
	}
	for _, row := range t.Rows {
		line := make([]ooxml.Value, len(row))
		for i, v := range row {
			line[i] = value(v)
		}
		rows = append(rows, line)
	}
	at := b.SheetIndex(t.Name)
	if at < 0 {
		if t.Refused != "" {
			return nil
		}
		mark := ooxml.DefinedName{Name: tableMark, Ref: "'" + strings.ReplaceAll(t.Name, "'", "''") + "'!$A$1", Hidden: true}
		c.Sheets = append(c.Sheets, ooxml.NewSheet{Name: t.Name, Rows: rows, Names: []ooxml.DefinedName{mark}})
		return nil
	}
	if t.Refused != "" {
		rows = nil
	}
	written := map[[2]int]bool{}
	for i, row := range rows {
		for j, v := range row {
			c.Edits[at] = append(c.Edits[at], ooxml.Edit{Row: i + 1, Col: j + 1, Value: v})
			written[[2]int{i + 1, j + 1}] = true
		}
	}
	_, err := b.Scan(at, ooxml.ScanOptions{}, func(row *ooxml.Row) error {
		for _, cell := range row.Cells {
			if at2 := [2]int{row.Number, int(cell.Col)}; !written[at2] {
				c.Edits[at] = append(c.Edits[at], ooxml.Edit{Row: at2[0], Col: at2[1]})
			}
		}
		return nil
	})
	return err
}

// value is a result as a cell holds it.
func value(v any) ooxml.Value {
	switch v := v.(type) {
	case float64:
		return ooxml.NumberValue(v)
	case int:
		return ooxml.NumberValue(float64(v))
	case bool:
		return ooxml.BoolValue(v)
	case string:
		return ooxml.TextValue(cut(v))
	}
	return ooxml.EmptyValue()
}

// longestText is how many characters of text a cell may hold, counted here in
// bytes to stay on the safe side.
const longestText = 32_000

func cut(text string) string {
	if len(text) <= longestText {
		return text
	}
	end := longestText
	for !utf8.RuneStart(text[end]) {
		end--
	}
	return text[:end] + " …"
}

// restOn reports whether a formula of the book may rest on a changed cell, so
// that it must be worked out again. Where that cannot be told cheaply (names,
// functions that build addresses) the answer is yes.
func (b *Book) restOn(edits map[int][]ooxml.Edit) (bool, error) {
	changed := map[int]bool{}
	for sheet, list := range edits {
		if len(list) > 0 {
			changed[sheet] = true
		}
	}
	if len(changed) == 0 {
		return false, nil
	}
	sheets := b.Sheets()
	rest := false
	for at, s := range sheets {
		if s.Kind != ooxml.Worksheet || rest || b.noFormulas[at] {
			continue
		}
		_, err := b.Scan(at, ooxml.ScanOptions{Columns: &ooxml.Columns{}, Formula: func(row, col int, text []byte) {
			rest = rest || b.formulaRests(string(text), at, edits)
		}}, func(*ooxml.Row) error { return nil })
		if err != nil {
			return false, err
		}
	}
	return rest, nil
}

var (
	quotedSheet = regexp.MustCompile(`'((?:[^']|'')+)'!`)
	plainSheet  = regexp.MustCompile(`([\p{L}\p{N}_.]+)!`)
	cellRef     = regexp.MustCompile(`(?i)\$?[A-Z]{1,3}\$?[0-9]{1,7}(?::\$?[A-Z]{1,3}\$?[0-9]{1,7})?`)
	anyAddress  = regexp.MustCompile(`(?i)\b(indirect|offset|index)\s*\(|\$?[A-Z]{1,3}:\$?[A-Z]{1,3}|\[`)
)

// formulaRests reports whether a formula on a sheet may rest on an edit.
func (b *Book) formulaRests(text string, on int, edits map[int][]ooxml.Edit) bool {
	if text == "" { // a follower of a shared formula, whose cells are not worked out here
		return len(edits[on]) > 0
	}
	for _, m := range quotedSheet.FindAllStringSubmatch(text, -1) {
		if at := b.SheetIndex(strings.ReplaceAll(m[1], "''", "'")); len(edits[at]) > 0 {
			return true
		}
	}
	for _, m := range plainSheet.FindAllStringSubmatch(text, -1) {
		if at := b.SheetIndex(m[1]); len(edits[at]) > 0 {
			return true
		}
	}
	for _, n := range b.DefinedNames() {
		sheet, _, ok := reference(n.Ref)
		if touches := !ok || len(edits[b.SheetIndex(sheet)]) > 0; touches && strings.Contains(strings.ToLower(text), strings.ToLower(n.Name)) {
			return true
		}
	}
	if len(edits[on]) == 0 {
		return false
	}
	if anyAddress.MatchString(text) {
		return true
	}
	for _, m := range cellRef.FindAllStringIndex(text, -1) {
		if m[0] > 0 && partOfName(text[m[0]-1]) || m[1] < len(text) && (partOfName(text[m[1]]) || text[m[1]] == '(') {
			continue
		}
		area, ok := ooxml.ParseRange(text[m[0]:m[1]])
		for _, e := range edits[on] {
			if ok && area.Contains(e.Row, e.Col) {
				return true
			}
		}
	}
	return false
}

// partOfName reports whether a byte continues a name or belongs to another
// sheet's reference, so that what stands beside it is no cell of this sheet.
func partOfName(b byte) bool {
	return b >= utf8.RuneSelf || b == '_' || b == '.' || b == '!' || b >= '0' && b <= '9' || b >= 'A' && b <= 'Z' || b >= 'a' && b <= 'z'
}

// mayReplace refuses to write over an output that was changed since it was
// filled. It is as it was where its seal holds, or where it holds what would be
// written now.
func (b *Book) mayReplace(target string, changes ooxml.Changes) error {
	there, err := os.Open(target)
	if errors.Is(err, os.ErrNotExist) {
		return nil
	}
	if err != nil {
		return err
	}
	defer there.Close()
	if sealed, err := ooxml.Sealed(target); sealed || err != nil {
		return err
	}
	old, now := sha256.New(), sha256.New()
	if _, err := io.Copy(old, there); err != nil {
		return err
	}
	if _, err := b.Write(now, changes); err != nil {
		return err
	}
	if !bytes.Equal(old.Sum(nil), now.Sum(nil)) {
		return fmt.Errorf("%s is there and was changed since it was filled, or was not made by a fill; use --replace to write over it, or --output to write elsewhere", target)
	}
	return nil
}
