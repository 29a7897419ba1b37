package internal

import (
	"go/ast"
	"go/doc"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

const root = "../.."

// goFiles gives every Go file of the module, by its path below the root.
func goFiles(t *testing.T) (list []string) {
	t.Helper()
	err := filepath.WalkDir(root, func(name string, entry fs.DirEntry, err error) error {
		switch {
		case err != nil:
			return err
		case entry.IsDir() && (entry.Name() == "node_modules" || entry.Name() == ".git"):
			return filepath.SkipDir
		case strings.HasSuffix(name, ".go"):
			below, err := filepath.Rel(root, name)
			list = append(list, filepath.ToSlash(below))
			return err
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return list
}

func read(t *testing.T, name string) []byte {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(root, name))
	if err != nil {
		t.Fatal(err)
	}
	return text
}

func parsed(t *testing.T, name string) *ast.File {
	t.Helper()
	file, err := parser.ParseFile(token.NewFileSet(), filepath.Join(root, name), nil, parser.ParseComments|parser.SkipObjectResolution)
	if err != nil {
		t.Fatal(err)
	}
	return file
}

// An example without the comment "Output:", alone at its end, is compiled and
// never run.
func TestEveryExampleIsRun(t *testing.T) {
	found := 0
	for _, name := range goFiles(t) {
		if !strings.HasSuffix(name, "_test.go") {
			continue
		}
		for _, example := range doc.Examples(parsed(t, name)) {
			found++
			if example.Output == "" {
				t.Errorf("%s: Example%s has no output, so it is not run", name, example.Name)
			}
		}
	}
	if found < 5 {
		t.Errorf("%d examples were found", found)
	}
}

// Every package says once what it holds.
func TestEveryPackageIsDescribedOnce(t *testing.T) {
	said := map[string]int{}
	for _, name := range goFiles(t) {
		folder := path.Dir(name)
		said[folder] += 0
		if file := parsed(t, name); file.Doc != nil {
			said[folder]++
			if !regexp.MustCompile(`^(Package ` + file.Name.Name + `|Command ` + path.Base(folder) + `) `).MatchString(file.Doc.Text()) {
				t.Errorf("%s begins its description with %.40q", name, file.Doc.Text())
			}
		}
	}
	for folder, times := range said {
		if times != 1 {
			t.Errorf("%s is described in %d files", folder, times)
		}
	}
}

// fileNames are the Go files, pages and scripts that a text names, by path or by
// name alone.
var fileNames = regexp.MustCompile(`[\w./-]*\w\.(go|md|json|lua|mjs|js|py|css|html)\b`)

// goCommand is a go command over packages of the module, as pages write it.
var goCommand = regexp.MustCompile(`\bgo (?:run|build|install|test)((?: \./[\w/-]+)+)`)

// goTest is a go command over one package that picks tests by their name.
var goTest = regexp.MustCompile(`go test \./([\w/-]+)[^\n` + "`" + `]*? -(run|fuzz|bench) '?\^?([A-Z]\w*)`)

// A page that leads people through the tree names what is there.
func TestThePagesNameFilesThatAreThere(t *testing.T) {
	files := goFiles(t)
	byName := map[string]bool{}
	for _, name := range files {
		byName[path.Base(name)] = true
	}
	made := map[string]bool{"larkmoor.html": true, "R.html": true, "demo.html": true, "pictures.html": true} // by a command beside them
	commands := 0
	check := func(page, text string) {
		for _, command := range goTest.FindAllStringSubmatch(text, -1) {
			kind := map[string]string{"run": "Test", "fuzz": "Fuzz", "bench": "Benchmark"}[command[2]]
			wanted := regexp.MustCompile(`(?m)^func ` + kind + `\w*` + strings.TrimPrefix(command[3], kind))
			if !slices.ContainsFunc(files, func(name string) bool {
				return path.Dir(name) == command[1] && strings.HasSuffix(name, "_test.go") && wanted.Match(read(t, name))
			}) {
				t.Errorf("%s says %q, but there is no such test", page, command[0])
			}
			commands++
		}
		for _, command := range goCommand.FindAllStringSubmatch(text, -1) {
			for folder := range strings.FieldsSeq(command[1]) {
				commands++
				if found, err := filepath.Glob(filepath.Join(root, folder, "*.go")); err != nil || len(found) == 0 {
					t.Errorf("%s says %q, but %s holds no package", page, command[0], folder)
				}
			}
		}
		for _, name := range fileNames.FindAllString(text, -1) {
			if strings.HasPrefix(name, "//") || made[path.Base(name)] || byName[name] { // part of an address; a Go file by its name alone
				continue
			}
			if _, err := os.Stat(filepath.Join(root, name)); err == nil {
				continue
			}
			if _, err := os.Stat(filepath.Join(root, path.Dir(page), name)); err != nil {
				t.Errorf("%s names %s, which is not there", page, name)
			}
		}
	}
	pages := []string{"README.md", "DEVELOPERS.md", "rpc/PROTOCOL.md"}
	more, err := filepath.Glob(filepath.Join(root, "testdata", "*", "README.md"))
	if err != nil || len(more) < 4 {
		t.Fatalf("%d pages below testdata (%v)", len(more), err)
	}
	for _, name := range more {
		below, err := filepath.Rel(root, name)
		if err != nil {
			t.Fatal(err)
		}
		pages = append(pages, filepath.ToSlash(below))
	}
	for _, page := range pages {
		check(page, string(read(t, page)))
	}
	for _, name := range files {
		if file := parsed(t, name); file.Doc != nil {
			check(name, file.Doc.Text())
		}
	}
	if commands < 15 {
		t.Errorf("%d packages and tests stand in go commands", commands)
	}
}

// The layers of DEVELOPERS.md name every package of the module.
func TestTheTableOfPackagesIsWhole(t *testing.T) {
	var named []string
	for line := range strings.Lines(string(read(t, "DEVELOPERS.md"))) {
		if cells := strings.Split(line, "|"); len(cells) == 4 {
			for name := range strings.SplitSeq(cells[1], ",") {
				named = append(named, strings.TrimSpace(name))
			}
		}
	}
	isNamed := func(folder string) bool {
		for _, name := range named {
			if folder == name || name == "cmd/internal" && strings.HasPrefix(folder, name+"/") {
				return true
			}
		}
		return false
	}
	for _, name := range goFiles(t) {
		if !isNamed(path.Dir(name)) {
			t.Errorf("DEVELOPERS.md says nothing of the package %s", path.Dir(name))
		}
	}
}
