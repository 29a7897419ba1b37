package main

import (
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// places are what the words in capitals of the README stand for when its
// commands are run.
var places = strings.NewReplacer(
	"verify BOOK.xlsx", "verify testdata/workbooks/larkmoor-filled.xlsx", // which the lines before have made
	"BOOK-filled.xlsx", "testdata/workbooks/larkmoor-filled.xlsx",
	"BOOK.xlsx", "testdata/workbooks/larkmoor.xlsx",
	"NEW.xlsx", "new.xlsx",
	"R.html", "r.html",
	"--for NAME,…", "--for mean-interval,difference-interval",
	"FUNCTION NAME=VALUE…", "standard-score value=12 mean=10 sd=2",
	"[NAME]", "mean-interval",
	"/data/", "data/",
	`"$SLURM_ARRAY_TASK_ID/16"`, "3/16",
	"$((JOB_COMPLETION_INDEX + 1))/16", "4/16",
	"…", "",
)

// command is a command line of a page.
type command struct {
	line    int
	text    string
	mayFail bool // the page says that 1 is no failure
}

var inCode = regexp.MustCompile("`(halfwidth [^`]*)`")

// commandsOf finds the command lines of a page: those that are set apart, which
// may have a remark after two spaces, and those in the text.
func commandsOf(t *testing.T, page string) []command {
	t.Helper()
	var list []command
	for i, line := range strings.Split(string(readFile(t, page)), "\n") {
		text := strings.TrimSpace(line)
		text = strings.Replace(text, "go run ./cmd/halfwidth ", "halfwidth ", 1)
		if !strings.HasPrefix(line, "    ") {
			text = strings.ReplaceAll(line, "go run ./cmd/halfwidth ", "halfwidth ")
			for _, found := range inCode.FindAllStringSubmatch(text, -1) {
				list = append(list, command{line: i + 1, text: found[1]})
			}
			continue
		}
		if _, inShell, ok := strings.Cut(text, "'halfwidth "); ok { // within the configuration of a job
			text = "halfwidth " + inShell
		}
		if _, source, ok := strings.Cut(text, "source <("); ok {
			text, _, _ = strings.Cut(source, ")")
		}
		if !strings.HasPrefix(text, "halfwidth ") {
			continue
		}
		c := command{line: i + 1}
		text, _, c.mayFail = strings.Cut(text, " || [ $? -eq 1 ]")
		text, _, _ = strings.Cut(text, "  ")
		text, _, _ = strings.Cut(text, " | ")
		c.text, _, _ = strings.Cut(text, " >")
		list = append(list, c)
	}
	return list
}

// shellWords splits a command line as a shell does, as far as the pages use it.
func shellWords(line string) (list []string) {
	var word strings.Builder
	quote, open := rune(0), false
	for _, r := range line + " " {
		switch {
		case quote != 0 && r == quote:
			quote = 0
		case quote == 0 && (r == '\'' || r == '"'):
			quote, open = r, true
		case quote == 0 && r == ' ':
			if open {
				list = append(list, word.String())
			}
			word.Reset()
			open = false
		default:
			word.WriteRune(r)
			open = true
		}
	}
	return list
}

// demoFolder is the folder of the demo data, wherever the test works.
func demoFolder(t *testing.T) fs.FS {
	t.Helper()
	dir, err := filepath.Abs("../../testdata/workbooks")
	if err != nil {
		t.Fatal(err)
	}
	return os.DirFS(dir)
}

// Every command of the guides does what it says, in a copy of the demo data.
func TestTheCommandsOfTheReadmeRun(t *testing.T) {
	commands := commandsOf(t, "../../README.md")
	copyOf := demoFolder(t)
	dir := t.TempDir()
	t.Chdir(dir)
	for _, folder := range []string{"testdata/workbooks", "books/2026-11", "data/books/2026-11"} {
		if err := os.CopyFS(folder, copyOf); err != nil {
			t.Fatal(err)
		}
	}
	for _, pattern := range []string{"*/*-filled*", "*/*/*-filled*", "*/*/*/*-filled*"} { // left in the copy by somebody's run
		left, err := filepath.Glob(pattern)
		if err != nil {
			t.Fatal(err)
		}
		for _, path := range left {
			if err := os.Remove(path); err != nil {
				t.Fatal(err)
			}
		}
	}
	verbs := map[string]bool{}
	for _, c := range commands {
		args := shellWords(places.Replace(c.text))[1:]
		verbs[args[0]] = true
		stdout, stderr, code := run(t, args...)
		if code != exitOK && !(c.mayFail && code == exitRefused) || stderr != "" {
			t.Errorf("README.md:%d: halfwidth %q: code %d\n%s%s", c.line, args, code, stdout, stderr)
		}
	}
	for _, path := range []string{"testdata/workbooks/larkmoor-filled.xlsx", "testdata/workbooks/handling-filled.calculations.csv", "larkmoor.html", "new.xlsx", "books/2026-11/larkmoor-filled.xlsx", "filled/2026-11/larkmoor-filled.xlsx"} {
		if !isFile(path) {
			t.Errorf("no command wrote %s", path)
		}
	}
	for _, verb := range verbNames() {
		if !verbs[verb] {
			t.Errorf("the README shows no halfwidth %s", verb)
		}
	}
	if len(commands) < 20 {
		t.Errorf("%d commands were found", len(commands))
	}
}

// The README says what the first command fills: some forty questions about 2,000
// trips, none refused.
func TestTheDemoIsWhatTheReadmeSays(t *testing.T) {
	dir := t.TempDir()
	copyTo(t, demo, dir, "larkmoor.xlsx")
	t.Chdir(dir)
	stdout, stderr, code := run(t, "fill", "larkmoor.xlsx")
	var ok, caution int
	lines := strings.Split(strings.TrimSpace(stdout), "\n")
	if _, err := fmt.Sscanf(lines[len(lines)-1], "Wrote larkmoor-filled.xlsx: %d rows ok, %d caution, 0 refused.", &ok, &caution); err != nil || code != exitOK || stderr != "" {
		t.Fatalf("code %d, %s: %s", code, lines[len(lines)-1], stderr)
	}
	if rows := ok + caution; rows < 35 || rows > 45 {
		t.Errorf("the demo has %d questions; the README says some forty", rows)
	}
	if stdout, _, _ = run(t, "answer", "sample-summary", "--book", "larkmoor.xlsx", `sample="delay (minutes)" in Trips`); !strings.Contains(stdout, "(n = 2000;") {
		t.Errorf("the README says 2,000 trips:\n%s", stdout)
	}
}

func verbNames() (names []string) {
	for _, verb := range verbs {
		names = append(names, verb().Name())
	}
	return names
}

// The calculation sheet that the README shows is worked out as it stands there.
func TestTheSheetOfTheReadmeIsFilled(t *testing.T) {
	var sheet [][]any
	for line := range strings.Lines(string(readFile(t, "../../README.md"))) {
		if strings.HasPrefix(line, "    ") && strings.Contains(line, "| ") && len(sheet) < 4 {
			var row []any
			for _, cell := range strings.Split(line, "|") {
				row = append(row, strings.TrimSpace(cell))
			}
			sheet = append(sheet, row)
		}
	}
	if len(sheet) != 4 {
		t.Fatalf("the README shows %d rows", len(sheet))
	}
	dir := t.TempDir()
	book := filepath.Join(dir, "book.xlsx")
	blank := []any{nil}
	makeBook(t, book, map[string][][]any{"Trips": someTrips, "Calculations": append([][]any{sheet[0], blank}, sheet[1:]...)})
	stdout, stderr, code := run(t, "fill", book, "--format", "csv")
	// The means of someTrips: (31.5 + 28 + 33)/3 and (35.5 + 30)/2.
	if code != exitOK || stderr != "" || !strings.Contains(stdout, fmt.Sprint(92.5/3)) || !strings.Contains(stdout, "32.75") {
		t.Errorf("code %d\n%s%s", code, stdout, stderr)
	}
}

// So are the examples in the help of each verb.
func TestTheExamplesOfTheHelpRun(t *testing.T) {
	dir := t.TempDir()
	copyOf := demoFolder(t)
	t.Chdir(dir)
	if err := os.CopyFS("testdata/workbooks", copyOf); err != nil {
		t.Fatal(err)
	}
	ran := 0
	for _, make := range verbs {
		verb := make()
		for line := range strings.Lines(verb.Example) {
			text, _, _ := strings.Cut(strings.TrimSpace(line), "  ")
			if !strings.HasPrefix(text, "halfwidth ") {
				continue
			}
			ran++
			args := shellWords(places.Replace(text))[1:]
			if stdout, stderr, code := run(t, args...); code != exitOK {
				t.Errorf("%s: halfwidth %q: code %d\n%s%s", verb.Name(), args, code, stdout, stderr)
			}
		}
	}
	if ran < len(verbs) {
		t.Errorf("%d examples were found", ran)
	}
}
