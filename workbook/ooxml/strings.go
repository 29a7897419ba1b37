package ooxml

// SharedString gives the text of a shared string: rich text as plain text,
// phonetic text left out.
func (b *Book) SharedString(index int) (string, error) { return "", damaged("not read yet") }

// SharedStrings counts the shared strings.
func (b *Book) SharedStrings() (int, error) { return 0, damaged("not read yet") }

// CellText gives the text of a cell of a text type or of an error, and an
// empty text for other types. The cell must come from a scan of this book.
func (b *Book) CellText(c *Cell) (string, error) { return "", damaged("not read yet") }
