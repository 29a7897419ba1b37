package main

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"halfwidth/funcs"
)

// words splits a command line as a shell does, as far as examples use it: single
// quotes keep what is between them.
func words(line string) []string {
	var list []string
	quoted, inWord := false, false
	for _, r := range strings.TrimSpace(line) {
		switch {
		case r == '\'':
			quoted = !quoted
		case r == ' ' && !quoted:
			inWord = false
			continue
		}
		if !inWord {
			list, inWord = append(list, ""), true
		}
		if r != '\'' {
			list[len(list)-1] += string(r)
		}
	}
	return list
}

func TestTheExampleOfEveryVerbRunsAsPrinted(t *testing.T) {
	dir := t.TempDir()
	if err := os.MkdirAll(filepath.Join(dir, "testdata", "workbooks"), 0o700); err != nil {
		t.Fatal(err)
	}
	copyTo(t, demo, dir, filepath.Join("testdata", "workbooks", "larkmoor.xlsx"))
	t.Chdir(dir)
	for _, verb := range verbs {
		c := verb()
		if c.Example == "" {
			t.Errorf("%s has no example", c.Name())
		}
		help, _, code := run(t, c.Name(), "--help")
		if code != exitOK || !strings.Contains(help, c.Example) {
			t.Errorf("%s --help does not show its example", c.Name())
		}
		for line := range strings.Lines(c.Example) {
			args := words(line)
			if args[0] != "halfwidth" || args[1] != c.Name() {
				t.Errorf("%s: its example is %q", c.Name(), line)
				continue
			}
			if stdout, stderr, code := run(t, args[1:]...); code > exitRefused || stderr != "" || stdout == "" {
				t.Errorf("%s: code %d, %s", line, code, stderr)
			}
		}
	}
}

func TestTheExampleOfEveryReferencePageRunsAsPrinted(t *testing.T) {
	for _, f := range funcs.All() {
		line := exampleCommand(f)
		if _, stderr, code := run(t, words(line)[1:]...); code > exitRefused || stderr != "" {
			t.Errorf("%s: code %d, %s", line, code, stderr)
		}
	}
}

func TestTheCommandsUnderStartAWorkbookRunAsTheReadmePrintsThem(t *testing.T) {
	readme := string(readFile(t, "../../README.md"))
	_, section, found := strings.Cut(readme, "\n## Start a workbook\n")
	section, _, _ = strings.Cut(section, "\n## ")
	t.Chdir(t.TempDir())
	ran := 0
	for line := range strings.Lines(section) {
		if command, ok := strings.CutPrefix(line, "    halfwidth "); ok {
			ran++
			if _, stderr, code := run(t, words(command)...); code != exitOK || stderr != "" {
				t.Errorf("%s: code %d, %s", command, code, stderr)
			}
		}
	}
	if !found || ran != 2 {
		t.Errorf("%d commands stand in the section", ran)
	}
}

func TestVerbsStandInTheHelpAsListed(t *testing.T) {
	stdout, _, code := run(t, "--help")
	at := 0
	for _, verb := range verbs {
		next := strings.Index(stdout[at:], "\n  "+verb().Name()+" ")
		if code != exitOK || next < 0 {
			t.Fatalf("%s is missing or out of order in\n%s", verb().Name(), stdout)
		}
		at += next
	}
}

// The word for a flag's value is ours, in capitals, and not the name of a type.
func TestEveryFlagNamesItsValue(t *testing.T) {
	for _, verb := range verbs {
		verb().Flags().VisitAll(func(f *pflag.Flag) {
			if value, text := pflag.UnquoteUsage(f); value != strings.ToUpper(value) || f.Value.Type() != "bool" && value == "" || text == "" {
				t.Errorf("%s --%s %s: %q", verb().Name(), f.Name, value, text)
			}
		})
	}
	for _, shell := range []string{"bash", "zsh", "fish", "powershell"} {
		if help, _, code := run(t, "completion", shell, "--help"); code != exitOK || !strings.Contains(help, intoShell[shell][len(intoShell[shell])-20:]) {
			t.Errorf("code %d, help on %s:\n%s", code, shell, help)
		}
		if script, _, code := run(t, "completion", shell); code != exitOK || !strings.Contains(script, cobra.ShellCompRequestCmd) {
			t.Errorf("code %d, %d bytes of a script for %s", code, len(script), shell)
		}
	}
}

func TestAMisspeltWordIsAnsweredWithTheClosest(t *testing.T) {
	for line, want := range map[string]string{
		"verfy":                  "did you mean verify?",
		"fill --in-plaec x.xlsx": "did you mean --in-place?",
		"functions --frmat csv":  "did you mean --format?",
		"completion bsh":         "did you mean bash?",
		"functions a b":          "2 names",
	} {
		if _, stderr, code := run(t, strings.Fields(line)...); code != exitFailed || !strings.Contains(stderr, want) {
			t.Errorf("%s: code %d, %q does not say %q", line, code, stderr, want)
		}
	}
}

// completions are what a shell is given for the last word.
func completions(t *testing.T, line ...string) []string {
	t.Helper()
	stdout, _, code := run(t, append([]string{cobra.ShellCompRequestCmd}, line...)...)
	if code != exitOK {
		t.Fatalf("code %d for %q", code, line)
	}
	var list []string
	for line := range strings.Lines(stdout) {
		word, _, _ := strings.Cut(strings.TrimSpace(line), "\t")
		list = append(list, word)
	}
	return list
}

func TestShellsComplete(t *testing.T) {
	for _, c := range []struct {
		line []string
		want []string
		not  string
	}{
		{[]string{"fi"}, []string{"fill"}, "verify"},
		{[]string{"functions", ""}, funcs.Names(), ""},
		{[]string{"answer", "mean-interval", "confidence=99%", ""}, []string{"sample=", "direction="}, "confidence="},
		{[]string{"answer", "mean-interval", "direction="}, []string{"direction=either", "direction=above", "direction=below"}, "sample="},
		{[]string{"answer", "mean-interval", "checks="}, []string{"checks=yes", "checks=no"}, ""},
		{[]string{"answer", "--format", ""}, []string{"text", "json", "csv"}, ""},
		{[]string{"starter", "new.xlsx", "--for", ""}, []string{"all", "spread", "mean-interval"}, ""},
		{[]string{"starter", "new.xlsx", "--for", "spread,"}, []string{"spread,mean-interval"}, ""},
		{[]string{"fill", ""}, []string{"xlsx", "csv", ":8"}, ""},
		{[]string{"page", ""}, []string{"xlsx", ":8"}, ""},
		{[]string{"fill", "--data", ""}, []string{":16"}, ""},
	} {
		got := completions(t, c.line...)
		for _, want := range c.want {
			if !slices.Contains(got, want) {
				t.Errorf("%q: %q is not offered", c.line, want)
			}
		}
		if c.not != "" && slices.Contains(got, c.not) {
			t.Errorf("%q: %q is offered", c.line, c.not)
		}
	}
}

func TestAStarterIsWrittenOnceAndFills(t *testing.T) {
	book := filepath.Join(t.TempDir(), "new.xlsx")
	if stdout, stderr, code := run(t, "starter", book, "--for", "mean-interval, spread"); code != exitOK || !strings.Contains(stdout, "5 functions") {
		t.Fatalf("code %d, %s%s", code, stdout, stderr)
	}
	if _, stderr, code := run(t, "starter", book, "--for", "spread"); code != exitFailed || !strings.Contains(stderr, "--replace") {
		t.Errorf("code %d, %s", code, stderr)
	}
	if _, stderr, code := run(t, "starter", book, "--for", "spread", "--replace"); code != exitOK {
		t.Errorf("code %d, %s", code, stderr)
	}
	if stdout, stderr, code := run(t, "fill", book); code != exitOK || !strings.Contains(stdout, "0 refused") {
		t.Errorf("code %d, %s%s", code, stdout, stderr)
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"starter"}, "questions.xlsx"},
		{[]string{"starter", "a.xlsx"}, "--for"},
		{[]string{"starter", "a.xlsx", "--for", "mean-intervall"}, `"mean-interval"`},
		{[]string{"starter", "a.txt", "--for", "spread"}, "a.xlsx"},
	} {
		if _, stderr, code := run(t, c.args...); code != exitFailed || !strings.Contains(stderr, c.want) {
			t.Errorf("%q: code %d, %q does not say %q", c.args, code, stderr, c.want)
		}
	}
}

func TestAnAnswerBeginsWithItsSentence(t *testing.T) {
	stdout, _, _ := run(t, "answer", "mean-interval", "sample=12.1; 11.8; 12.6; 12.0; 99")
	sentence, rest, _ := strings.Cut(stdout, "\ncaution: ")
	if !strings.HasPrefix(sentence, "The mean is") || !strings.Contains(rest, "\nlower ") {
		t.Errorf("it printed\n%s", stdout)
	}
	stdout, _, code := run(t, "answer", "mean-interval", "sample=2; 2; 2")
	if code != exitRefused || !strings.HasPrefix(stdout, "refused: ") {
		t.Errorf("it printed\n%s", stdout)
	}
}
