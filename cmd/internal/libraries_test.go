package internal

import (
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"strings"
	"testing"
	"time"
)

// requirement is a module that go.mod requires and the code imports, or a tool.
type requirement struct {
	Path    string
	Version string
	Time    *time.Time // nil where this machine does not know it
}

func requirements(t *testing.T) map[string]requirement {
	t.Helper()
	out, err := exec.Command("go", "mod", "edit", "-json", "../../go.mod").Output()
	if err != nil {
		t.Fatal(err)
	}
	var mod struct {
		Require []struct {
			Path     string
			Indirect bool
		}
		Tool []struct{ Path string }
	}
	if err := json.Unmarshal(out, &mod); err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, r := range mod.Require {
		direct := !r.Indirect
		for _, tool := range mod.Tool {
			direct = direct || strings.HasPrefix(tool.Path, r.Path+"/")
		}
		if direct {
			names = append(names, r.Path)
		}
	}
	if out, err = exec.Command("go", append([]string{"list", "-m", "-json"}, names...)...).Output(); err != nil {
		t.Fatal(err)
	}
	list := map[string]requirement{}
	for d := json.NewDecoder(strings.NewReader(string(out))); ; {
		var r requirement
		if err := d.Decode(&r); errors.Is(err, io.EOF) {
			return list
		} else if err != nil {
			t.Fatal(err)
		}
		list[r.Path] = r
	}
}

func TestTheTableOfLibrariesIsThatOfGoMod(t *testing.T) {
	text, err := os.ReadFile("../../DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	want := requirements(t)
	_, section, found := strings.Cut(string(text), "\n## Libraries\n")
	if !found {
		t.Fatal("DEVELOPERS.md has no section on libraries")
	}
	said := map[string]bool{}
	for line := range strings.Lines(section) {
		cells := strings.Split(strings.Trim(strings.TrimSpace(line), "|"), "|")
		if len(cells) != 6 {
			continue
		}
		for i := range cells {
			cells[i] = strings.TrimSpace(cells[i])
			if cells[i] == "" {
				t.Errorf("an empty cell: %s", line)
			}
		}
		name, version, released := cells[0], cells[4], cells[5]
		r, required := want[name]
		switch {
		case name == "library" || strings.HasPrefix(name, "---"):
		case !required:
			t.Errorf("%s is in the table and not required", name)
		case version != r.Version || r.Time != nil && released != r.Time.Format(time.DateOnly):
			t.Errorf("%s is %s of %v; the table says %s of %s", name, r.Version, r.Time, version, released)
		}
		said[name] = true
	}
	for name := range want {
		if !said[name] {
			t.Errorf("%s is required and not in the table", name)
		}
	}
}

// Every requirement that is not only another's is imported, by the code, its
// tests or as a tool.
func TestEveryLibraryIsUsed(t *testing.T) {
	out, err := exec.Command("go", "list", "-f", `{{range .Imports}}{{println .}}{{end}}{{range .TestImports}}{{println .}}{{end}}{{range .XTestImports}}{{println .}}{{end}}`, module+"...").Output()
	if err != nil {
		t.Fatal(err)
	}
	tools, err := exec.Command("go", "list", "-f", "{{.ImportPath}}", "tool").Output()
	if err != nil {
		t.Fatal(err)
	}
	for name := range requirements(t) {
		if !strings.Contains("\n"+string(out)+string(tools), "\n"+name) {
			t.Errorf("%s is required and imported nowhere; run: go mod tidy", name)
		}
	}
}
