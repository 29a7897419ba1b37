package workbook

import (
	"bufio"
	"context"
	"encoding/json"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"halfwidth/funcs"
	"halfwidth/workbook/ooxml"
)

// What one hostile book may cost.
const (
	hostileSeconds = 2
	hostileMemory  = 256 << 20
)

// verdict is what became of a hostile book.
type verdict struct {
	Refused string // why, empty if it was read
	Kind    bool   // the refusal is an *ooxml.Error
	Status  funcs.Status
	Mean    any
	N       any
	Memory  int64 // the most that the process held at once
	Left    int   // files beside the book
}

// hostileBook names, in the environment, the book that a process is to fill; such
// a process is this test started anew, so that its memory can be measured.
const hostileBook = "HALFWIDTH_HOSTILE_BOOK"

// fillAlone fills the book that the environment names and writes the verdict.
func fillAlone(t *testing.T, path string) {
	var v verdict
	report, err := Fill(context.Background(), path, Options{Workers: 2})
	var refusal *ooxml.Error
	switch {
	case err != nil:
		v.Refused, v.Kind = err.Error(), errors.As(err, &refusal)
	case len(report.Results.Rows) == 0:
		t.Fatal("no row was worked out")
	default:
		row := report.Results.Rows[0]
		v.Status = row.Status
		if row.Outcome != nil {
			v.Mean, _ = row.Outcome.Get("mean")
			v.N, _ = row.Outcome.Get("n")
		}
		if v.Status == funcs.StatusRefused {
			v.Refused = row.Note()
		}
	}
	list, err := os.ReadDir(filepath.Dir(path))
	if err != nil {
		t.Fatal(err)
	}
	v.Left, v.Memory = len(list)-1, peakMemory()
	if err := json.NewEncoder(os.Stdout).Encode(v); err != nil {
		t.Fatal(err)
	}
}

// peakMemory is the most memory that this process held at once: what the system
// says where it says it (Linux), 0 elsewhere.
func peakMemory() int64 {
	f, err := os.Open("/proc/self/status")
	if err != nil {
		return 0
	}
	defer f.Close()
	for lines := bufio.NewScanner(f); lines.Scan(); {
		if size, ok := strings.CutPrefix(lines.Text(), "VmHWM:"); ok {
			kib, _ := strconv.ParseInt(strings.Fields(size)[0], 10, 64)
			return kib << 10
		}
	}
	return 0
}

// judge fills a book in a process of its own.
func judge(t *testing.T, name string, data []byte) verdict {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
	defer cancel()
	cmd := exec.CommandContext(ctx, os.Args[0], "-test.run=^TestHostileBooks$", "-test.count=1")
	// On one core, where no idle collector spins for work: its time is no cost of
	// the book's.
	cmd.Env = append(os.Environ(), hostileBook+"="+path, "GOMAXPROCS=1")
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("the process failed (%v):\n%s", err, out)
	}
	var v verdict
	if err := json.NewDecoder(strings.NewReader(string(out))).Decode(&v); err != nil {
		t.Fatalf("%v in\n%s", err, out)
	}
	// Processor time, which other programs of the machine do not lengthen.
	if used := cmd.ProcessState.UserTime() + cmd.ProcessState.SystemTime(); used > hostileSeconds*time.Second {
		t.Errorf("it took %v, the most is %d s", used, hostileSeconds)
	} else {
		t.Logf("%v, %d MiB: %.200s", used.Round(time.Millisecond), v.Memory>>20, v.Refused)
	}
	if v.Memory > hostileMemory {
		t.Errorf("it held %d MiB, the most is %d", v.Memory>>20, hostileMemory>>20)
	}
	return v
}

// TestHostileBooks fills books made to do harm. Each is either refused, with a
// reason that holds the words given, and nothing written; or it is read rightly:
// the mean of its six trips.
func TestHostileBooks(t *testing.T) {
	if path := os.Getenv(hostileBook); path != "" {
		fillAlone(t, path)
		return
	}
	if testing.Short() {
		t.Skip("each book takes a process of its own")
	}
	for _, list := range [][]hostile{hostileZips(t), hostileParts(), hostileSheets()} {
		for _, c := range list {
			t.Run(c.name, func(t *testing.T) {
				data := c.data
				if data == nil {
					data = c.parts.zip(t, "")
				}
				v := judge(t, "book.xlsx", data)
				switch {
				case c.refused == "" && (v.Refused != "" || v.Mean != 194.0/6 || v.N != 6.0):
					t.Errorf("got %+v, want the mean of six trips", v)
				case c.refused != "" && !strings.Contains(v.Refused, c.refused):
					t.Errorf("got %+v, want a refusal with %q", v, c.refused)
				case c.refused != "" && v.Status == "" && (v.Left > 0 || !v.Kind):
					t.Errorf("%d files were written, or the refusal has no kind: %+v", v.Left, v)
				}
			})
		}
	}
}

// hostile is a book made to do harm.
type hostile struct {
	name    string
	parts   parts
	data    []byte // the file, where it is not the parts
	refused string // words of the refusal; empty if the book is to be read
}
