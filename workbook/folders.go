package workbook

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// folders are where the files that expressions name may lie: the folder of the
// workbook and those below it, and folders that the person running the command
// named.
type folders struct {
	dirs   []string
	limits ooxml.Limits
	opened map[string]calculation.Source
	writes *Writes  // of the run; nil where it writes no other file
	sheets []string // calculation sheets that the user named
	owner  string   // how messages name what the files lie beside
	advice string   // what to do about a file that lies elsewhere
}

// newFolders gives the folders for a workbook.
func newFolders(book string, named []string, limits ooxml.Limits) folders {
	return folders{dirs: append([]string{filepath.Dir(book)}, named...), limits: limits, opened: map[string]calculation.Source{},
		owner: "workbook", advice: "beside the workbook, or name its folder with --data"}
}

// find resolves a file name. Symbolic links are followed before the check, so
// that none leads out of the folders.
func (f folders) find(file string) (string, error) {
	local := filepath.FromSlash(strings.ReplaceAll(file, `\`, "/"))
	if !filepath.IsLocal(local) {
		return "", fmt.Errorf("leads out of the %s's folder; put the file %s", f.owner, f.advice)
	}
	for _, dir := range f.dirs {
		root, err := filepath.EvalSymlinks(dir)
		if err != nil {
			continue
		}
		if f.writes.output(filepath.Join(root, local)) {
			return "", errSameRun
		}
		path, err := filepath.EvalSymlinks(filepath.Join(root, local))
		if err != nil {
			continue
		}
		if inside, err := filepath.Rel(root, path); err != nil || !filepath.IsLocal(inside) {
			return "", fmt.Errorf("is a link that leads out of the %s's folder; put the file itself %s", f.owner, f.advice)
		}
		if info, err := os.Stat(path); err == nil && info.Mode().IsRegular() {
			return path, nil
		}
	}
	return "", fmt.Errorf("is not there; looked in %s", strings.Join(f.dirs, ", "))
}

// open opens a file named in an expression, once.
func (f folders) open(file string, options calculation.FileOptions) (calculation.Source, error) {
	path, err := f.find(file)
	if err != nil {
		return nil, err
	}
	key := fmt.Sprint(path, options)
	if s, ok := f.opened[key]; ok {
		return f.writes.guard(path, s, f.sheets)
	}
	var s calculation.Source
	switch ext := strings.ToLower(filepath.Ext(path)); ext {
	case ".csv", ".tsv":
		s = calculation.NewTextFile(filepath.Base(path), func() (io.ReadCloser, error) { return ooxml.OpenToRead(path) }, options)
	case ".xlsx", ".xlsm":
		s, err = openBook(path, f.limits, newFolders(path, f.dirs[1:], f.limits))
	default:
		return nil, fmt.Errorf("ends in %q; name a .csv, .tsv, .xlsx or .xlsm file", ext)
	}
	if err != nil {
		return nil, err
	}
	f.opened[key] = s
	return f.writes.guard(path, s, f.sheets)
}

// close closes the workbooks that were opened.
func (f folders) close() {
	for _, s := range f.opened {
		if b, ok := s.(*Book); ok {
			b.Close()
		}
	}
}
