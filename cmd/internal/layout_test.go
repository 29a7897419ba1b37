// Package internal holds the tests of the tree as a whole: the arrows between
// packages, the libraries, the examples and the pages for people.
package internal

import (
	"os/exec"
	"path"
	"slices"
	"strings"
	"testing"
)

const module = "halfwidth/"

// arrows says which packages of this module a package may import. A trailing
// /... stands for the package and all below it.
var arrows = map[string][]string{
	"cmd/halfwidth":              {"cmd/internal/...", "workbook/page", "workbook", "workbook/calculation", "funcs"},
	"cmd/halfwidth-server":       {"cmd/internal/...", "rpc"},
	"cmd/internal/bench":         {"funcs"},
	"cmd/internal/buildinfo":     {},
	"cmd/internal/gendocs":       {"funcs", "rpc"},
	"cmd/internal/texttab":       {},
	"rpc":                        {"workbook", "workbook/calculation", "funcs"},
	"workbook/page":              {"workbook", "workbook/calculation", "funcs"},
	"workbook":                   {"workbook/calculation", "workbook/ooxml", "funcs"},
	"workbook/demo":              {},
	"workbook/ooxml":             {},
	"workbook/calculation":       {"funcs"},
	"funcs":                      {"funcs/internal/..."},
	"funcs/internal/accuracy":    {"funcs", "funcs/internal/dist"},
	"funcs/internal/calibration": {"funcs", "funcs/internal/num"},
	"funcs/internal/dist":        {"funcs/internal/num"},
	"funcs/internal/num":         {},
}

// doors says which packages alone import a library.
var doors = map[string][]string{
	"github.com/sourcegraph/jsonrpc2": {"rpc"},
	"github.com/xuri/excelize/v2":     {"workbook/demo", "cmd/internal/bench"}, // its start-up costs every run
	"gonum.org/v1/gonum":              {"funcs", "funcs/internal/dist", "funcs/internal/num"},
	"gonum.org/v1/plot":               {"workbook/page"},
	"github.com/spf13/cobra":          {"cmd/halfwidth"},
	"github.com/spf13/pflag":          {"cmd/halfwidth"},
	"golang.org/x/term":               {"cmd/halfwidth", "cmd/internal/texttab"},
	"github.com/klauspost/compress":   {"workbook/ooxml", "cmd/internal/bench"},
}

// imports gives the packages of the module and what each imports, tests left
// out.
func imports(t *testing.T) map[string][]string {
	t.Helper()
	out, err := exec.Command("go", "list", "-f", `{{.ImportPath}}{{range .Imports}} {{.}}{{end}}`, module+"...").Output()
	if err != nil {
		t.Fatal(err)
	}
	graph := map[string][]string{}
	for line := range strings.Lines(string(out)) {
		words := strings.Fields(line)
		graph[strings.TrimPrefix(words[0], module)] = words[1:]
	}
	return graph
}

func covers(pattern, name string) bool {
	if dir, ok := strings.CutSuffix(pattern, "/..."); ok {
		return name == dir || strings.HasPrefix(name, dir+"/")
	}
	return pattern == name
}

func TestPackagesImportOnlyAlongTheDrawnArrows(t *testing.T) {
	for name, list := range imports(t) {
		allowed, known := arrows[name]
		if !known && name != "cmd/internal" {
			t.Errorf("%s: a package that no arrow is drawn for", name)
		}
		for _, imported := range list {
			if own, ok := strings.CutPrefix(imported, module); ok {
				if !slices.ContainsFunc(allowed, func(p string) bool { return covers(p, own) }) {
					t.Errorf("%s imports %s, against the drawn arrows", name, own)
				}
				continue
			}
			for library, by := range doors {
				if covers(library+"/...", imported) && !slices.Contains(by, name) {
					t.Errorf("%s imports %s, whose only doors are %s", name, path.Base(library), strings.Join(by, ", "))
				}
			}
		}
	}
}

// The statistics must not see the clock, the environment or the file system.
func TestTheCatalogueKnowsNoClockAndNoFiles(t *testing.T) {
	for name, list := range imports(t) {
		if name != "funcs" && !strings.HasPrefix(name, "funcs/") || name == "funcs/internal/accuracy" || name == "funcs/internal/calibration" { // commands of their own
			continue
		}
		for _, banned := range []string{"os", "time", "net", "math/rand"} {
			if slices.Contains(list, banned) {
				t.Errorf("%s imports %s", name, banned)
			}
		}
	}
}

// What costs at start is paid by every fill of a small workbook: fonts parsed by
// init, and canvases and encodings that no verb uses.
func TestTheCommandLinksNothingThatIsSlowToStart(t *testing.T) {
	out, err := exec.Command("go", "list", "-deps", module+"cmd/halfwidth").Output()
	if err != nil {
		t.Fatal(err)
	}
	linked := strings.Fields(string(out))
	for _, slow := range []string{"gonum.org/v1/plot", "gonum.org/v1/plot/text", "gonum.org/v1/plot/vg/draw", "encoding/gob", "image/png", "image/jpeg"} {
		if slices.Contains(linked, slow) {
			t.Errorf("cmd/halfwidth links %s", slow)
		}
	}
	if !slices.Contains(linked, "gonum.org/v1/plot/vg") {
		t.Error("the list of linked packages lacks what pages draw with")
	}
}
