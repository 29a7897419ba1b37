package page

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"

	"halfwidth/workbook"
)

// generator marks a page as one of ours, which may be written anew.
const generator = `<meta name="generator" content="halfwidth page">`

// ErrTaken is a target that holds something else than a page.
var ErrTaken = errors.New("is there already and is no page that halfwidth wrote")

// WriteFile writes the page of a workbook to a file, whole or not at all. A file
// that is there and is no page is written over only with replace.
func WriteFile(ctx context.Context, path string, r *workbook.Report, replace bool) error {
	old, err := os.ReadFile(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
	case err != nil:
		return err
	case !replace && !bytes.Contains(old[:min(len(old), 2000)], []byte(generator)):
		return fmt.Errorf("%s %w", path, ErrTaken)
	}
	var page bytes.Buffer
	if err := Write(ctx, &page, r); err != nil {
		return err
	}
	if bytes.Equal(page.Bytes(), old) {
		return nil
	}
	return workbook.WriteFile(path, page.Bytes())
}
