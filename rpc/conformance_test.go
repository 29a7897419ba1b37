package rpc

import (
	"flag"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

var update = flag.Bool("update", false, "write the answers that came into testdata/rpc")

// TestConformance plays each file of testdata/rpc against a server; the README
// there tells how they are written.
func TestConformance(t *testing.T) {
	files, err := filepath.Glob("../testdata/rpc/*.txt")
	if err != nil || len(files) < 40 {
		t.Fatalf("%d files (%v)", len(files), err)
	}
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".txt"), func(t *testing.T) {
			text, err := os.ReadFile(file)
			if err != nil {
				t.Fatal(err)
			}
			lines := strings.Split(strings.TrimSuffix(strings.ReplaceAll(string(text), "\r\n", "\n"), "\n"), "\n")
			if !strings.HasPrefix(lines[0], "# ") {
				t.Fatal("the first line does not say why")
			}
			play(t, lines)
			if *update {
				if err := os.WriteFile(file, []byte(strings.Join(lines, "\n")+"\n"), 0o644); err != nil {
					t.Fatal(err)
				}
			}
		})
	}
}

// play runs a scenario, and under -update puts what came into its want lines.
func play(t *testing.T, lines []string) {
	var opts Options
	for _, line := range lines {
		switch word, rest, _ := strings.Cut(line, " "); word {
		case "max-message-bytes":
			opts.Limits.MessageBytes = number(t, rest)
		case "max-header-bytes":
			opts.Limits.HeaderBytes = number(t, rest)
		case "max-depth":
			opts.Limits.Depth = number(t, rest)
		case "max-sample-values":
			opts.Limits.SampleValues = number(t, rest)
		case "max-open-sheets":
			opts.Limits.OpenSheets = number(t, rest)
		case "max-open-cells":
			opts.Limits.OpenCells = number(t, rest)
		case "workers":
			opts.Limits.Workers = number(t, rest)
		case "max-queue":
			opts.Limits.Queue = number(t, rest)
		}
	}
	c := begin(t, opts)
	ended, code := false, 1
	for i, line := range lines {
		word, rest, _ := strings.Cut(line, " ")
		switch word {
		case "", "#", "max-message-bytes", "max-header-bytes", "max-depth", "max-sample-values", "max-open-sheets", "max-open-cells", "workers", "max-queue":
		case "open":
			c.initialize()
		case "open-with":
			c.initializeWith(rest)
		case "send":
			c.raw(frame(rest))
		case "raw":
			bytes, err := strconv.Unquote(rest)
			if err != nil {
				t.Fatalf("line %d: %v", i+1, err)
			}
			c.raw(bytes)
		case "want":
			got := c.next()
			if *update {
				lines[i] = "want " + got
			} else if got != rest {
				t.Errorf("line %d\n got %s\nwant %s", i+1, got, rest)
			}
		case "remark":
			for deadline := time.Now().Add(patience); !strings.Contains(c.remarks.String(), rest); time.Sleep(time.Millisecond) {
				if time.Now().After(deadline) {
					t.Fatalf("line %d: the error stream lacks %q:\n%s", i+1, rest, c.remarks)
				}
			}
		case "exit":
			ended, code = true, number(t, rest)
		default:
			t.Fatalf("line %d: what is %q?", i+1, word)
		}
	}
	if !ended {
		c.in.Close()
	}
	c.ends(code)
}

func number(t *testing.T, text string) int {
	t.Helper()
	n, err := strconv.Atoi(text)
	if err != nil {
		t.Fatal(err)
	}
	return n
}
