package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// makeBooks writes n books of a few kinds below a folder, in subfolders of a
// hundred; every tenth has a refused row.
func makeBooks(t *testing.T, dir string, n int) {
	t.Helper()
	const kinds = 10
	var made [kinds][]byte
	for i := range made {
		rows := [][]any{{"depot", "minutes"}}
		for k := range 40 {
			rows = append(rows, []any{[]string{"North", "Quay", "Mill"}[k%3], float64((k*7+i*5)%60) / 4})
		}
		depot := "North"
		if i == kinds-1 {
			depot = "Fell" // no trip started there
		}
		path := filepath.Join(t.TempDir(), "book.xlsx")
		makeBook(t, path, map[string][][]any{"Trips": rows, "Calculations": {
			{"work out", "sample", "> mean", "> lower", "> upper", "> status", "> note"},
			{"mean-interval", "minutes in Trips"},
			{"mean-interval", "minutes in Trips where depot = " + depot},
			{"median-interval", "minutes in Trips"},
			{},
			{"work out", "sample", "resamples", "> coverage"}, // a simulation, whose digits must not rest on --jobs
			{"coverage-check", "minutes in Trips", 200.0},
		}})
		made[i] = readFile(t, path)
	}
	for i := range n {
		writeFile(t, filepath.Join(dir, fmt.Sprintf("week-%d", i/100), fmt.Sprintf("book-%03d.xlsx", i)), made[i%kinds])
	}
}

func writeFile(t *testing.T, path string, data []byte) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
}

// breakBooks puts three broken files among the books of a folder.
func breakBooks(t *testing.T, dir string) {
	t.Helper()
	whole := readFile(t, demo)
	writeFile(t, filepath.Join(dir, "week-0", "cut.xlsx"), whole[:len(whole)/2])
	writeFile(t, filepath.Join(dir, "week-1", "text.xlsx"), []byte("depot;minutes\n"))
	f, err := excelize.OpenFile(demo)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := f.SaveAs(filepath.Join(dir, "week-2", "locked.xlsx"), excelize.Options{Password: "parcel"}); err != nil {
		t.Fatal(err)
	}
}

// tree gives the files below a folder with their bytes.
func tree(t *testing.T, dir string) map[string]string {
	t.Helper()
	files := map[string]string{}
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		name, err := filepath.Rel(dir, path)
		files[filepath.ToSlash(name)] = string(readFile(t, path))
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func TestAFolderOfBooksIsFilledAndTheBrokenOnesAreNamed(t *testing.T) {
	dir := t.TempDir()
	books := filepath.Join(dir, "books")
	makeBooks(t, books, 297)
	breakBooks(t, books)
	before := tree(t, books)
	var outputs []map[string]string
	var printed []string
	for _, jobs := range []string{"1", "8"} {
		out := filepath.Join(dir, "out"+jobs)
		stdout, stderr, code := run(t, "fill", books, "--output", out, "--jobs", jobs)
		if code != exitRefused || stderr != "halfwidth: 3 of 300 workbooks failed; the table says why\n" {
			t.Errorf("code %d, stderr %q", code, stderr)
		}
		if line := lastLine(stdout); !strings.HasPrefix(line, "Filled 297 of 300 workbooks: ") || !strings.HasSuffix(line, " 29 refused; 3 failed.") {
			t.Errorf("it ends\n%s", line)
		}
		outputs = append(outputs, tree(t, out))
		printed = append(printed, strings.ReplaceAll(stdout, out, "out"))
	}
	if printed[0] != printed[1] {
		t.Error("what is printed rests on --jobs")
	}
	for _, want := range []string{"cut.xlsx: the file is cut short", "text.xlsx: the file is not a zip file", "locked.xlsx: the file is encrypted"} {
		if !strings.Contains(strings.Join(strings.Fields(printed[0]), " "), want) {
			t.Errorf("it does not say %q", want)
		}
	}
	if len(outputs[0]) != 297 || outputs[0]["week-1/book-123-filled.xlsx"] == "" {
		t.Errorf("%d files were written", len(outputs[0]))
	}
	for name, data := range outputs[0] {
		if outputs[1][name] != data {
			t.Errorf("%s rests on --jobs", name)
		}
	}
	if after := tree(t, books); !mapsEqual(before, after) {
		t.Error("the books themselves were changed")
	}
}

func mapsEqual(a, b map[string]string) bool {
	for name, data := range a {
		if b[name] != data {
			return false
		}
	}
	return len(a) == len(b)
}

func TestABatchEndsByWhatBecameOfItsBooks(t *testing.T) {
	dir := t.TempDir()
	book := func(name string, lines ...[]any) string {
		path := filepath.Join(dir, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
			t.Fatal(err)
		}
		sheets := map[string][][]any{"Trips": someTrips}
		if lines != nil {
			sheets["Calculations"] = lines
		}
		makeBook(t, path, sheets)
		return path
	}
	header := []any{"work out", "sample", "> mean", "> status"}
	good := book("good/a.xlsx", header, []any{"mean-interval", "minutes in Trips"})
	book("refused/a.xlsx", header, []any{"mean-interval", "weight in Trips"})
	plain := book("mixed/plain.xlsx")
	book("mixed/a.xlsx", header, []any{"mean-interval", "minutes in Trips"})
	book("plain/b.xlsx")
	bad := filepath.Join(dir, "bad", "a.xlsx")
	writeFile(t, bad, []byte("x"))
	writeFile(t, filepath.Join(dir, "none", "a.txt"), nil)
	in := func(name string) string { return filepath.Join(dir, name) }
	for _, c := range []struct {
		name   string
		words  []string
		code   int
		stdout []string
		stderr string
	}{
		{"all rows ok", []string{in("good")}, exitOK, []string{"wrote ", "Filled 1 of 1 workbook: 1 row ok"}, ""},
		{"a refused row", []string{in("refused")}, exitRefused, []string{"Calculations, row 2: B2 (sample): No row from 1 to 6 of Trips holds a column", "1 refused"}, ""},
		{"no calculation sheet in a folder", []string{in("mixed")}, exitOK, []string{"no calculation sheet", "Filled 1 of 2 workbooks", "1 without a calculation sheet"}, ""},
		{"no calculation sheet in a book named itself", []string{good, plain}, exitRefused, []string{"failed", "plain.xlsx: no calculation sheet"}, "1 of 2 workbooks failed"},
		{"some failed", []string{in("good"), in("bad")}, exitRefused, []string{"a.xlsx: the file is not a zip file"}, "1 of 2 workbooks failed"},
		{"all failed", []string{in("bad")}, exitFailed, []string{"Filled 0 of 1 workbook"}, "1 of 1 workbook failed, and none"},
		{"no calculation sheet at all", []string{in("plain")}, exitFailed, []string{"Filled 0 of 1 workbook"}, "nothing was worked out"},
		{"no book at all", []string{in("none")}, exitFailed, []string{"Filled 0 of 0 workbooks"}, "nothing was worked out"},
		{"nothing there", []string{in("gone"), good}, exitRefused, []string{"gone", "no such file"}, "1 of 2 workbooks failed"},
		{"no match", []string{in("*.xlsm")}, exitFailed, []string{"nothing has a name like this"}, "1 of 1 workbook failed"},
		{"no match among others", []string{in("*.xlsm"), in("good")}, exitRefused, []string{"nothing has a name like this"}, "1 of 2 workbooks failed"},
		{"an unreadable book named alone", []string{bad}, exitFailed, nil, "a.xlsx: the file is not a zip file"},
	} {
		t.Run(c.name, func(t *testing.T) {
			stdout, stderr, code := run(t, append([]string{"fill", "--replace"}, c.words...)...)
			if code != c.code || !strings.Contains(stderr, c.stderr) || c.stderr == "" && stderr != "" {
				t.Errorf("code %d, stderr %q", code, stderr)
			}
			line := strings.Join(strings.Fields(stdout), " ")
			for _, want := range c.stdout {
				if want == "no such file" && os.PathSeparator == '\\' {
					continue // said in other words there
				}
				if !strings.Contains(line, want) {
					t.Errorf("it does not say %q:\n%s", want, stdout)
				}
			}
		})
	}
}

func TestABatchAsJSONTellsOfEveryFile(t *testing.T) {
	dir := t.TempDir()
	makeBooks(t, dir, 3)
	writeFile(t, filepath.Join(dir, "week-0", "text.xlsx"), []byte("x"))
	makeBook(t, filepath.Join(dir, "week-0", "plain.xlsx"), map[string][][]any{"Trips": someTrips})
	for _, leftOut := range []int{0, 3} { // in the second run the outputs of the first
		stdout, _, code := run(t, "fill", dir, "--format", "json")
		if code != exitRefused {
			t.Fatalf("code %d", code)
		}
		var rows []struct {
			Book, Status string
			Notes        []string
		}
		if err := json.Unmarshal([]byte(stdout), &rows); err != nil {
			t.Fatal(err)
		}
		count := map[string]int{}
		for _, r := range rows {
			count[r.Status]++
			if (r.Status == "failed" || r.Status == "no calculation sheet" || r.Status == "left out") && (len(r.Notes) != 1 || r.Book == "") {
				t.Errorf("%+v", r)
			}
		}
		if count["ok"] == 0 || count["failed"] != 1 || count["no calculation sheet"] != 1 || count["left out"] != leftOut {
			t.Errorf("statuses %v", count)
		}
	}
}

func TestOutputsKeepTheFoldersOfTheirBooks(t *testing.T) {
	dir := t.TempDir()
	header := []any{"work out", "sample", "> mean"}
	for _, name := range []string{"a/trips.xlsx", "b/trips.xlsx"} {
		path := filepath.Join(dir, "books", filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
			t.Fatal(err)
		}
		makeBook(t, path, ask(header, []any{"mean-interval", "minutes in Trips"}))
	}
	out := filepath.Join(dir, "out")
	stdout, stderr, code := run(t, "fill", filepath.Join(dir, "books"), "--output", out)
	if code != exitOK {
		t.Fatal(stdout, stderr)
	}
	if got := tree(t, out); len(got) != 2 || got["a/trips-filled.xlsx"] == "" || got["b/trips-filled.xlsx"] == "" {
		t.Errorf("%d files", len(got))
	}
	// Named themselves, the books have no folder in common.
	for _, words := range [][]string{
		{filepath.Join(dir, "books", "a", "trips.xlsx"), filepath.Join(dir, "books", "b", "trips.xlsx")},
		{filepath.Join(dir, "books", "a"), filepath.Join(dir, "books", "b")},
		{filepath.Join(dir, "books", "*", "trips.xlsx"), "--shard", "1/2"},
	} {
		stdout, stderr, code := run(t, append([]string{"fill", "--replace", "--output", filepath.Join(dir, "other")}, words...)...)
		if code != exitFailed || stdout != "" || !strings.Contains(stderr, "would both be written to") {
			t.Errorf("code %d, %q, %q", code, stdout, stderr)
		}
	}
	if isFolder(filepath.Join(dir, "other")) {
		t.Error("something was written")
	}
	_, stderr, code = run(t, "fill", filepath.Join(dir, "books"), "--output", filepath.Join(dir, "one.xlsx"))
	if code != exitFailed || !strings.Contains(stderr, "name a folder") {
		t.Errorf("code %d, %q", code, stderr)
	}
}

func TestEachBookIsInOneShard(t *testing.T) {
	dir := t.TempDir()
	makeBooks(t, dir, 40)
	writeFile(t, filepath.Join(dir, "~$book.xlsx"), nil)
	const shards = 3
	in := map[string]int{}
	lines := func(k int) (books []string) {
		stdout, stderr, code := run(t, "preview", dir, "--shard", fmt.Sprintf("%d/%d", k, shards))
		if code == exitFailed {
			t.Fatal(stdout, stderr)
		}
		for line := range strings.Lines(stdout) {
			if strings.Contains(line, "week-0") || strings.Contains(line, "~$") {
				books = append(books, strings.Fields(line)[0])
			}
		}
		return books
	}
	var first []string
	for k := 1; k <= shards; k++ {
		books := lines(k)
		if k == 1 {
			first = books
		}
		if len(books) < 5 {
			t.Errorf("shard %d has %d books", k, len(books))
		}
		for _, b := range books {
			in[b]++
		}
	}
	for b, n := range in {
		if n != 1 {
			t.Errorf("%s is in %d shards", b, n)
		}
	}
	if len(in) != 41 {
		t.Errorf("%d of 41 files are in a shard", len(in))
	}
	// Files elsewhere move none that is there.
	makeBooks(t, filepath.Join(dir, "more"), 20)
	if again := slices.DeleteFunc(lines(1), func(b string) bool { return strings.Contains(b, "more") }); !slices.Equal(first, again) {
		t.Errorf("shard 1 was %q, is %q", first, again)
	}
	// A shard may have nothing to do.
	empty := t.TempDir()
	if _, stderr, code := run(t, "preview", empty, "--shard", "2/9"); code != exitOK {
		t.Errorf("code %d, %s", code, stderr)
	}
}

// Anyone can foretell the shard of a path: the first 16 hex digits that sha256sum
// gives for it, as a number, modulo the number of shards, and 1. The values are
// from sha256sum.
func TestAShardIsForetoldByTheHashOfThePath(t *testing.T) {
	for key, number := range map[string]int{"week-0/book-001.xlsx": 4, "week-0/book-002.xlsx": 5, "Québec/trips.xlsx": 2} {
		for k := 1; k <= 5; k++ {
			if got := (shard{k, 5}).holds(key); got != (k == number) {
				t.Errorf("%s in shard %d: %v", key, k, got)
			}
		}
	}
}

func TestFaultyFlagsOfABatchAreRefusedWithAdvice(t *testing.T) {
	for _, c := range []struct{ flag, want string }{
		{"--shard=0/3", "numbered from 1/3 to 3/3"},
		{"--shard=4/3", "numbered from 1/3 to 3/3"},
		{"--shard=-1/3", "numbered from 1/3 to 3/3"},
		{"--shard=2", "such as 1/3"},
		{"--shard=1/0", "such as 1/3"},
		{"--shard=a/b", "such as 1/3"},
		{"--jobs=-1", "write 1 or more"},
		{"--in-place", "leave out --output"},
	} {
		stdout, stderr, code := run(t, "fill", t.TempDir(), "--output=filled", c.flag)
		if code != exitFailed || stdout != "" || !strings.Contains(stderr, c.want) {
			t.Errorf("%s: code %d, %q, %q", c.flag, code, stdout, stderr)
		}
	}
}

// What another book of the batch reads must not rest on which is filled first.
func TestABookDoesNotReadWhatTheSameBatchWrites(t *testing.T) {
	header := []any{"work out", "sample", "> mean", "> status"}
	for _, c := range []struct {
		name, sample string
		flags        []string
		want         string // empty where it may be read
	}{
		{"a sheet that stays, in place", "minutes in a.xlsx/Trips", []string{"--in-place"}, ""},
		{"a sheet that is filled, in place", `"> mean" in a.xlsx/Calculations`, []string{"--in-place"}, "same run"},
		{"a sheet that stays", `"> mean" in a.xlsx/Calculations`, nil, "holds no number"},
		{"an output", `"> mean" in a-filled.xlsx/Calculations`, nil, "same run"},
		{"a sheet of an output", "minutes in a-filled.xlsx/Trips", nil, "same run"},
	} {
		t.Run(c.name, func(t *testing.T) {
			var printed []string
			for _, jobs := range []string{"1", "8"} {
				dir := t.TempDir()
				t.Chdir(dir)
				for _, name := range []string{"a.xlsx", "b.xlsx", "d.xlsx"} {
					sample := "minutes in Trips"
					if name == "b.xlsx" {
						sample = c.sample
					}
					makeBook(t, name, ask(header, []any{"mean-interval", sample}))
				}
				stdout, stderr, code := run(t, append([]string{"fill", ".", "--jobs", jobs}, c.flags...)...)
				if refused := c.want != ""; stderr != "" || (code == exitRefused) != refused || !strings.Contains(strings.Join(strings.Fields(stdout), " "), c.want) {
					t.Errorf("code %d, stderr %q\n%s", code, stderr, stdout)
				}
				printed = append(printed, stdout)
			}
			if printed[0] != printed[1] {
				t.Error("it rests on --jobs")
			}
		})
	}
}

func TestOneFileOfTheBatchGivesTheBytesThatItGivesAlone(t *testing.T) {
	dir := t.TempDir()
	makeBooks(t, dir, 20)
	if stdout, stderr, code := run(t, "fill", dir); code != exitRefused { // two of the twenty have a refused row
		t.Fatal(stdout, stderr)
	}
	alone := filepath.Join(t.TempDir(), "alone.xlsx")
	run(t, "fill", filepath.Join(dir, "week-0", "book-013.xlsx"), "--output", alone)
	if !bytes.Equal(readFile(t, alone), readFile(t, filepath.Join(dir, "week-0", "book-013-filled.xlsx"))) {
		t.Error("the bytes differ")
	}
}
