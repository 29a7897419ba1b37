package rpc

import (
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

const someCalculations = "work out,sample,> mean,> status\nmean-interval,minutes in trips.csv,,\nmean-interval,3; 5; 7; 9; 11,,\nmean-interval,mintes in trips.csv,,\n"

// fillFolder makes a folder that may be filled, with a text calculation sheet
// and its data, and one beside it that may not. Both paths are resolved.
func fillFolder(t *testing.T) (inside, outside string) {
	t.Helper()
	root, err := filepath.EvalSymlinks(t.TempDir())
	if err != nil {
		t.Fatal(err)
	}
	inside, outside = filepath.Join(root, "in"), filepath.Join(root, "out")
	for _, dir := range []string{inside, outside} {
		for name, text := range map[string]string{"handling.calculations.csv": someCalculations, "trips.csv": "minutes\n10\n12\n14\n16\n18\n"} {
			write(t, filepath.Join(dir, name), text)
		}
	}
	return inside, outside
}

func write(t *testing.T, path, text string) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

func (c *testClient) fill(params string) reply {
	c.t.Helper()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"workbooks/fill","params":%s}`, params)
	return c.reply()
}

func TestAFileIsFilled(t *testing.T) {
	inside, _ := fillFolder(t)
	c := begin(t, Options{MayFill: []string{inside}})
	c.initialize()
	r := c.fill(fmt.Sprintf(`{"path":%q}`, filepath.Join(inside, "handling.calculations.csv")))
	if r.Error != nil {
		t.Fatal(r.Error.Message)
	}
	var got filled
	if err := json.Unmarshal(r.Result, &got); err != nil {
		t.Fatal(err)
	}
	if got.Counts["ok"] != 2 || got.Counts["refused"] != 1 || len(got.Refused) != 1 || got.Refused[0].Row != 4 || !strings.Contains(got.Refused[0].Findings[0].Message, `"minutes"`) {
		t.Errorf("%s", r.Result)
	}
	text, err := os.ReadFile(got.Written)
	// (10 + 12 + 14 + 16 + 18)/5 = 14 and (3 + 5 + 7 + 9 + 11)/5 = 7.
	if err != nil || filepath.Dir(got.Written) != inside || !strings.Contains(string(text), "trips.csv,14,ok\n") || !strings.Contains(string(text), "11,7,ok\n") {
		t.Errorf("%v: %s", err, text)
	}
	// Into the file itself, and once more without anything to write.
	for _, cells := range []int{5, 0} {
		r = c.fill(fmt.Sprintf(`{"path":%q,"inPlace":true}`, filepath.Join(inside, "handling.calculations.csv")))
		if err := json.Unmarshal(r.Result, &got); err != nil || got.Cells != cells {
			t.Errorf("%v, want %d cells: %+v %s", err, cells, r.Error, r.Result)
		}
	}
	compile(t, mustEncode(t, filledSchema()))
	c.leave()
}

func mustEncode(t *testing.T, value any) []byte {
	t.Helper()
	text, err := json.Marshal(value)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

func TestOnlyFilesInTheFoldersNamedAreFilled(t *testing.T) {
	inside, outside := fillFolder(t)
	link := func(to, name string) string {
		t.Helper()
		at := filepath.Join(inside, name)
		if err := os.Symlink(to, at); err != nil {
			t.Fatalf("this machine makes no links: %v", err)
		}
		return at
	}
	book := filepath.Join(inside, "handling.calculations.csv")
	write(t, filepath.Join(inside, "below", "x.csv"), "x\n1\n")
	linkedFile := link(filepath.Join(outside, "handling.calculations.csv"), "linked.calculations.csv")
	linkedDir := link(outside, "linked")
	insideLink := link(book, "same.calculations.csv")
	dangling := link(filepath.Join(outside, "new.calculations.csv"), "dangling.calculations.csv")
	write(t, filepath.Join(inside, "trap.calculations.csv"), someCalculations)
	link(filepath.Join(outside, "handling.calculations.csv"), "trap-filled.calculations.csv")
	write(t, filepath.Join(inside, "far.calculations.csv"), strings.ReplaceAll(someCalculations, "trips.csv", "away.csv"))
	link(filepath.Join(outside, "trips.csv"), "away.csv")
	before := read(t, filepath.Join(outside, "handling.calculations.csv"))

	none := begin(t, Options{})
	none.initialize()
	if r := none.fill(fmt.Sprintf(`{"path":%q}`, book)); r.Error == nil || r.Error.Code != CodeRequestFailed || !strings.Contains(r.Error.Message, "--may-fill") {
		t.Errorf("a server without folders: %+v", r)
	}
	none.leave()

	c := begin(t, Options{MayFill: []string{inside}})
	c.initialize()
	for name, params := range map[string]string{
		"a file outside":                   fmt.Sprintf(`{"path":%q}`, filepath.Join(outside, "handling.calculations.csv")),
		"a file outside that is not there": fmt.Sprintf(`{"path":%q}`, filepath.Join(outside, "none.csv")),
		"a way out by ..":                  fmt.Sprintf(`{"path":%q}`, inside+"/../out/handling.calculations.csv"),
		"a link to a file outside":         fmt.Sprintf(`{"path":%q}`, linkedFile),
		"a link to a folder outside":       fmt.Sprintf(`{"path":%q}`, filepath.Join(linkedDir, "handling.calculations.csv")),
		".. behind a link":                 fmt.Sprintf(`{"path":%q}`, inside+"/linked/../in/../out/handling.calculations.csv"),
		"an output outside":                fmt.Sprintf(`{"path":%q,"output":%q}`, book, filepath.Join(outside, "new.csv")),
		"an output folder outside":         fmt.Sprintf(`{"path":%q,"output":%q}`, book, outside),
		"an output by a linked folder":     fmt.Sprintf(`{"path":%q,"output":%q}`, book, filepath.Join(linkedDir, "new.calculations.csv")),
		"an output by a link to nowhere":   fmt.Sprintf(`{"path":%q,"output":%q}`, book, dangling),
		"an output that is a link out":     fmt.Sprintf(`{"path":%q,"replace":true}`, filepath.Join(inside, "trap.calculations.csv")),
		"the same in a folder":             fmt.Sprintf(`{"path":%q,"output":%q,"replace":true}`, filepath.Join(inside, "trap.calculations.csv"), inside),
		"a data folder outside":            fmt.Sprintf(`{"path":%q,"data":[%q]}`, book, outside),
		"a data folder by a link":          fmt.Sprintf(`{"path":%q,"data":[%q]}`, book, linkedDir),
		"the folder above":                 fmt.Sprintf(`{"path":%q}`, filepath.Dir(inside)),
		"a folder of a like name":          fmt.Sprintf(`{"path":%q}`, inside+"side/handling.calculations.csv"),
		"a URI":                            fmt.Sprintf(`{"path":%q}`, uriOf(book)),
		"nothing":                          `{"path":""}`,
	} {
		r := c.fill(params)
		if r.Error == nil || r.Error.Code != CodeInvalidParams || r.Error.Data.Pointer == "" {
			t.Errorf("%s: %+v %s", name, r.Error, r.Result)
			continue
		}
		if name == "a URI" && !strings.Contains(r.Error.Message, "give the path that it stands for") {
			t.Errorf("%s: %s", name, r.Error.Message)
		}
		if name != "nothing" && name != "a URI" && !strings.Contains(r.Error.Message, "does not lie in a folder that this server may fill") {
			t.Errorf("%s: %s", name, r.Error.Message)
		}
	}
	// A data file that is a link out refuses its rows.
	r := c.fill(fmt.Sprintf(`{"path":%q}`, filepath.Join(inside, "far.calculations.csv")))
	if r.Error != nil || !strings.Contains(string(r.Result), `"refused":2`) || !strings.Contains(string(r.Result), "leads out of the workbook's folder") {
		t.Errorf("data through a link: %+v %s", r.Error, r.Result)
	}
	// Links and .. that stay inside are followed.
	for _, path := range []string{insideLink, inside + "/below/../handling.calculations.csv"} {
		if r := c.fill(fmt.Sprintf(`{"path":%q,"output":%q,"replace":true}`, path, filepath.Join(inside, "below", "out.calculations.csv"))); r.Error != nil {
			t.Errorf("%s: %s", path, r.Error.Message)
		}
	}
	for name, part := range map[string]string{"none.calculations.csv": "is not there", "below": "is no file"} {
		if r := c.fill(fmt.Sprintf(`{"path":%q}`, filepath.Join(inside, name))); r.Error == nil || !strings.Contains(r.Error.Message, part) {
			t.Errorf("%s: %+v", name, r)
		}
	}
	c.leave()
	if after := read(t, filepath.Join(outside, "handling.calculations.csv")); after != before {
		t.Error("a file outside was written")
	}
	if names, _ := filepath.Glob(filepath.Join(outside, "*")); len(names) != 2 {
		t.Errorf("files appeared outside: %v", names)
	}
}

func read(t *testing.T, path string) string {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

func TestAFillTellsItsProgressAndIsCancelled(t *testing.T) {
	inside, _ := fillFolder(t)
	book := filepath.Join(inside, "long.calculations.csv")
	write(t, book, "work out,sample,of,resamples,> estimate\n"+strings.Repeat("bootstrap-interval,3; 1; 4; 1; 5; 9; 2; 6,median,100000,\n", 2000))
	c := begin(t, Options{MayFill: []string{inside}})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"workbooks/fill","params":{"path":%q,"workDoneToken":"t"}}`, book)
	c.wantPart(`"method":"$/progress"`, `"token":"t"`, `"kind":"begin"`, `"title":"Filling long.calculations.csv"`)
	c.wantPart(`"kind":"report"`, " of 2000 rows")
	start := time.Now()
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":1}}`)
	for !strings.Contains(c.wantPart(`"kind":`), `"kind":"end"`) {
	}
	c.wantPart(`"id":1`, "-32800")
	if d := time.Since(start); d > patience/2 {
		t.Errorf("the cancel took %v", d)
	}
	c.leave()
	if names, _ := filepath.Glob(filepath.Join(inside, "*filled*")); len(names) > 0 {
		t.Errorf("a cancelled fill left %v", names)
	}
}

func TestFoldersToFillAreResolvedAtTheStart(t *testing.T) {
	inside, outside := fillFolder(t)
	link := filepath.Join(filepath.Dir(inside), "link")
	if err := os.Symlink(inside, link); err != nil {
		t.Fatal(err)
	}
	dirs, err := ResolveFolders([]string{link})
	if err != nil || len(dirs) != 1 || dirs[0] != inside {
		t.Errorf("%v, %v", dirs, err)
	}
	for _, bad := range []string{filepath.Join(outside, "none"), filepath.Join(outside, "trips.csv")} {
		if dirs, err := ResolveFolders([]string{bad}); err == nil {
			t.Errorf("%s gives %v", bad, dirs)
		}
	}
}
