package rpc

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"syscall"

	"halfwidth/funcs"
	"halfwidth/workbook"
)

// workbookMethods fill workbooks, in folders that the person who started the
// server named.
func workbookMethods() []Method {
	return []Method{
		Strict(Method{Name: "workbooks/fill", Long: true, Result: filledSchema,
			Doc: "Works out the calculation sheets of a file and writes the results into it or into a file beside it."}, fillWorkbook),
	}
}

type fillParams struct {
	Path    string   `json:"path" doc:"the workbook or text calculation sheet, in a folder that the server may fill"`
	Output  *string  `json:"output,omitempty" doc:"the file or folder to write to; left out, NAME-filled beside it"`
	InPlace *bool    `json:"inPlace,omitempty" doc:"write into the file itself"`
	Replace *bool    `json:"replace,omitempty" doc:"write over an output that was changed since it was filled"`
	Sheets  []string `json:"sheets,omitempty" doc:"calculation sheets besides those that are ones by name or mark"`
	Data    []string `json:"data,omitempty" doc:"folders, besides the file's own, in which data files may lie"`
	Token   Value    `json:"workDoneToken,omitempty" doc:"under which progress is reported: a text or a whole number"`
}

// filled is the result of workbooks/fill.
type filled struct {
	Path     string         `json:"path"`
	Written  string         `json:"written"` // empty where every result stood there already
	Cells    int            `json:"cells"`
	Counts   map[string]int `json:"counts"`
	Refused  []publishedRow `json:"refused"`
	Findings []rowFinding   `json:"findings"`
	// Recalculate says that formulas elsewhere rest on changed cells, so that the
	// file asks to be recalculated when it is opened.
	Recalculate bool `json:"recalculate"`
}

func fillWorkbook(ctx context.Context, call *Call, p fillParams) (any, error) {
	may := allowed(call.Session.options.MayFill)
	if len(may) == 0 {
		return nil, &Error{Code: CodeRequestFailed, Message: "This server fills no files; start it with --may-fill DIR, the folder in which it may."}
	}
	options := workbook.Options{Sheets: p.Sheets, Workers: call.Session.sheetWorkers(), InPlace: isYes(p.InPlace), Replace: isYes(p.Replace)}
	path, err := may.file(p.Path, "path")
	if err != nil {
		return nil, err
	}
	for i, dir := range p.Data {
		in, err := may.folder(dir, fmt.Sprintf("data/%d", i))
		if err != nil {
			return nil, err
		}
		options.Data = append(options.Data, in)
	}
	switch {
	case options.InPlace && p.Output != nil:
		return nil, badParams("/output", "output", "is given with inPlace, which writes into the file itself", "leave one of them out")
	case p.Output != nil:
		options.Output, err = may.output(*p.Output, filepath.Base(workbook.OutputName(path)))
	case !options.InPlace:
		options.Output, err = may.output(workbook.OutputName(path), "")
		if info, statErr := os.Stat(options.Output); err == nil && statErr == nil && info.IsDir() {
			err = badParams("", "output", "is not given, and the file beside the book that it would be, "+quoted(filepath.Base(options.Output))+", is a folder", "give an output")
		}
	}
	if err != nil {
		return nil, err
	}
	progress := call.Progress("Filling " + filepath.Base(path))
	options.Progress = func(done, total int) { progress.Report(done, total, fmt.Sprintf("%d of %d rows", done, total)) }
	report, err := workbook.Fill(ctx, path, options)
	switch {
	case ctx.Err() != nil:
		return nil, ctx.Err()
	case err != nil:
		return nil, &Error{Code: CodeRequestFailed, Message: asMembers.Replace(oneLine(err.Error()))}
	}
	return filledOf(report), nil
}

func isYes(given *bool) bool { return given != nil && *given }

func filledOf(r *workbook.Report) filled {
	out := filled{Path: r.Book, Written: r.Saved.Path, Cells: r.Saved.Cells, Counts: map[string]int{}, Refused: []publishedRow{}, Findings: []rowFinding{}, Recalculate: r.Saved.Recalculate}
	counts := r.Counts()
	for _, status := range []funcs.Status{funcs.StatusOK, funcs.StatusCaution, funcs.StatusRefused} {
		out.Counts[string(status)] = counts[status]
	}
	for _, row := range r.Results.Rows {
		if row.Status == funcs.StatusRefused {
			out.Refused = append(out.Refused, rowOf(row))
		}
	}
	for _, d := range r.Plan.Diagnostics() {
		f := findingOf(d)
		f.Sheet = d.Sheet
		out.Findings = append(out.Findings, f)
	}
	return out
}

// allowed are the folders that may be filled, links resolved.
type allowed []string

// ResolveFolders resolves the links of folders that are to be filled, once, at
// the start: what they lead to later does not count.
func ResolveFolders(dirs []string) ([]string, error) {
	var out []string
	for _, dir := range dirs {
		real, err := filepath.EvalSymlinks(dir)
		if err == nil {
			real, err = filepath.Abs(real)
		}
		if err != nil {
			return nil, fmt.Errorf("the folder %q cannot be found", dir)
		}
		if info, err := os.Stat(real); err != nil || !info.IsDir() {
			return nil, fmt.Errorf("%q is no folder", dir)
		}
		out = append(out, real)
	}
	return out, nil
}

// holds reports that a path, links resolved, lies in one of the folders.
func (a allowed) holds(real string) bool {
	for _, dir := range a {
		if inside, err := filepath.Rel(dir, real); err == nil && filepath.IsLocal(inside) {
			return true
		}
	}
	return false
}

// real resolves a path: that of what is there, else that of the folder it would
// lie in. Of what lies outside it does not tell whether it is there.
func (a allowed) real(path, pointer string) (real string, exists bool, err error) {
	argument := firstOf("/" + pointer)
	if path == "" || strings.ContainsRune(path, 0) {
		return "", false, badParams("/"+pointer, argument, "is empty or no path", "give the path of a file")
	}
	if len(path) > 5 && strings.EqualFold(path[:5], "file:") {
		return "", false, badParams("/"+pointer, argument, "is "+quoted(path)+", a URI", "give the path that it stands for")
	}
	outside := badParams("/"+pointer, argument, "is "+quoted(path)+", which does not lie in a folder that this server may fill, once links and .. are resolved",
		"start the server with --may-fill and its folder")
	full, err := filepath.Abs(path)
	if err != nil {
		return "", false, outside
	}
	real, err = filepath.EvalSymlinks(full)
	if err == nil {
		if !a.holds(real) {
			return "", false, outside
		}
		return real, true, nil
	}
	// A link that leads nowhere is not there, but must not be written through.
	if _, lstat := os.Lstat(full); lstat == nil {
		return "", false, outside
	}
	parent, parentErr := filepath.EvalSymlinks(filepath.Dir(full))
	if parentErr != nil || !a.holds(parent) {
		return "", false, outside
	}
	if errors.Is(err, syscall.ENAMETOOLONG) {
		return "", false, badParams("/"+pointer, argument, "is "+quoted(path)+", a name too long for a file", "give it a shorter name")
	}
	if !errors.Is(err, os.ErrNotExist) {
		return "", false, outside
	}
	return filepath.Join(parent, filepath.Base(full)), false, nil
}

// file resolves the path of a file that is there.
func (a allowed) file(path, pointer string) (string, error) {
	real, exists, err := a.real(path, pointer)
	if err != nil {
		return "", err
	}
	info, statErr := os.Stat(real)
	switch {
	case !exists:
		return "", badParams("/"+pointer, pointer, "is "+quoted(path)+", which is not there", "give the path of a workbook or a text calculation sheet")
	case statErr != nil || !info.Mode().IsRegular():
		return "", badParams("/"+pointer, pointer, "is "+quoted(path)+", which is no file", "give the path of a workbook or a text calculation sheet")
	}
	return real, nil
}

// folder resolves the path of a folder that is there.
func (a allowed) folder(path, pointer string) (string, error) {
	real, exists, err := a.real(path, pointer)
	if err != nil {
		return "", err
	}
	if info, statErr := os.Stat(real); !exists || statErr != nil || !info.IsDir() {
		return "", badParams("/"+pointer, firstOf("/"+pointer), "names "+quoted(path)+", which is no folder that is there", "give the path of a folder")
	}
	return real, nil
}

// output resolves the path of a file to write, and of the file of that name in
// a folder.
func (a allowed) output(path, name string) (string, error) {
	real, exists, err := a.real(path, "output")
	if err != nil || !exists {
		return real, err
	}
	if info, statErr := os.Stat(real); statErr == nil && info.IsDir() && name != "" {
		real, _, err = a.real(filepath.Join(real, name), "output")
	}
	return real, err
}

// asMembers puts the names of a command's options in an error into those of the
// params.
var asMembers = strings.NewReplacer("--in-place", "inPlace", "--output", "output", "--replace", "replace", "--data", "data", "--sheet", "sheets")

func filledSchema() object { return typeSchema(reflect.TypeFor[filled]()) }
