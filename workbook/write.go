package workbook

import (
	"io"

	"halfwidth/workbook/ooxml"
)

// WriteFile writes a file that is no workbook, such as a page, by the way that
// workbooks are written: whole or not at all, with a temporary file that the next
// save removes if the process is killed.
func WriteFile(path string, content []byte) error {
	return (*ooxml.File)(nil).SaveAs(path, func(w io.Writer) error {
		_, err := w.Write(content)
		return err
	})
}
