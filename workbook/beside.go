package workbook

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"time"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// Beside opens the data files that the expressions of a text calculation sheet
// name, for a caller that holds the sheet's text itself, as a server of editors
// does. It reads nothing but files beside the sheet and below its folder, and
// these only where that folder lies in one of those that the caller allows. It
// is used from one goroutine and closed after use.
type Beside struct {
	folders folders
	refused error
}

// DataFile is a data file as it was found. It compares as unequal once the file
// has been changed, replaced or removed.
type DataFile struct {
	Path     string
	Size     int64
	Modified time.Time
}

// OpenBeside gives the data files of the sheet at path, which need not have been
// saved. Links are followed before the folders are compared.
func OpenBeside(path string, allowed []string) *Beside {
	b := &Beside{folders: newFolders(path, nil, ooxml.Limits{})}
	b.folders.owner, b.folders.advice = "sheet", "beside the sheet, or below its folder"
	dir, err := filepath.EvalSymlinks(filepath.Dir(path))
	if err != nil || !filepath.IsAbs(path) {
		b.refused = errors.New("cannot be looked for: save the sheet in a folder first")
		return b
	}
	for _, root := range allowed {
		root, err := filepath.EvalSymlinks(root)
		if err != nil {
			continue
		}
		if inside, err := filepath.Rel(root, dir); err == nil && filepath.IsLocal(inside) {
			return b
		}
	}
	b.refused = fmt.Errorf("is not read, since the sheet lies in no folder that is open in the editor; open %s there", filepath.Dir(path))
	return b
}

// Find finds a file by the name in an expression. The error is worded as that
// of calculation.Source.Beside.
func (b *Beside) Find(file string) (DataFile, error) {
	if b.refused != nil {
		return DataFile{}, b.refused
	}
	path, err := b.folders.find(file)
	if err != nil {
		return DataFile{}, err
	}
	info, err := os.Stat(path)
	if err != nil {
		return DataFile{}, fmt.Errorf("cannot be read: %w", err)
	}
	return DataFile{path, info.Size(), info.ModTime()}, nil
}

// Open opens a file by the name in an expression, once.
func (b *Beside) Open(file string, options calculation.FileOptions) (calculation.Source, error) {
	if b.refused != nil {
		return nil, b.refused
	}
	return b.folders.open(file, options)
}

// Close closes the files that were opened.
func (b *Beside) Close() { b.folders.close() }

// The bounds of Files, against folders that hold a whole disk.
const (
	mostFiles   = 200
	mostEntries = 20_000
	mostDepth   = 4
)

// Files lists the data files beside the sheet and below its folder, with the
// names that expressions give them. Text calculation sheets, hidden files and
// those of a great folder past a bound are left out.
func (b *Beside) Files() []string {
	if b.refused != nil {
		return nil
	}
	root := b.folders.dirs[0]
	var files []string
	entries := 0
	_ = filepath.WalkDir(root, func(path string, entry fs.DirEntry, err error) error { // what cannot be read is left out
		name, relErr := filepath.Rel(root, path)
		entries++
		switch {
		case len(files) >= mostFiles || entries > mostEntries:
			return fs.SkipAll
		case err != nil || relErr != nil || name == ".":
			return nil
		case entry.IsDir() && (strings.HasPrefix(entry.Name(), ".") || strings.Count(name, string(filepath.Separator)) >= mostDepth-1):
			return fs.SkipDir
		case entry.IsDir() || !isDataFile(entry.Name()):
			return nil
		}
		if _, err := b.folders.find(name); err == nil {
			files = append(files, filepath.ToSlash(name))
		}
		return nil
	})
	return files
}

// isDataFile reports whether a file is one that expressions may name, by its
// name. Lock files of spreadsheet programs begin with ~$ or .~.
func isDataFile(name string) bool {
	lower := strings.ToLower(name)
	if strings.HasPrefix(name, ".") || strings.HasPrefix(name, "~$") || strings.HasSuffix(lower, ".calculations.csv") || strings.HasSuffix(lower, ".calculations.tsv") {
		return false
	}
	switch filepath.Ext(lower) {
	case ".csv", ".tsv", ".xlsx", ".xlsm":
		return true
	}
	return false
}
