package main

import (
	"archive/zip"
	"bytes"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// asCommand makes the test's own binary the command, so that it can be killed.
const asCommand = "HALFWIDTH_TEST_AS_COMMAND"

func TestMain(m *testing.M) {
	if os.Getenv(asCommand) != "" {
		main()
	}
	os.Exit(m.Run())
}

// process is the command as a process of its own, not yet started.
func process(args ...string) *exec.Cmd {
	c := exec.Command(os.Args[0], args...)
	c.Env = append(os.Environ(), asCommand+"=yes")
	return c
}

// wholeProcesses leaves a test of many processes out of short runs: what the race
// detector could see in it, it sees in the tests within one process.
func wholeProcesses(t *testing.T) {
	t.Helper()
	if testing.Short() {
		t.Skip("runs many processes")
	}
}

// addPart adds a part that deflates to nothing less, so that a save takes long
// enough to be killed within.
func addPart(t *testing.T, path string, size int) {
	t.Helper()
	in, err := zip.OpenReader(path)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	for _, f := range in.File {
		if err := w.Copy(f); err != nil {
			t.Fatal(err)
		}
	}
	part, err := w.CreateHeader(&zip.FileHeader{Name: "xl/media/image1.png", Method: zip.Store})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := io.CopyN(part, rand.NewChaCha8([32]byte{1}), int64(size)); err != nil {
		t.Fatal(err)
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, out.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
}

// A process that is killed has no say: whatever it was doing, the target must be
// the old file or the new one, and what it left over goes with the next fill.
func TestAKilledFillLeavesTheOldFileOrTheNew(t *testing.T) {
	wholeProcesses(t)
	dir := t.TempDir()
	book := filepath.Join(dir, "book.xlsx")
	makeBook(t, book, ask([]any{"work out", "sample", "> mean", "> status"}, []any{"mean-interval", "minutes in Trips"}))
	addPart(t, book, 4<<20)
	before := readFile(t, book)
	fill := func() *exec.Cmd { return process("fill", "--in-place", book) }
	start := time.Now()
	if out, err := fill().CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	whole := time.Since(start)
	after := readFile(t, book)
	if bytes.Equal(before, after) {
		t.Fatal("the fill changed nothing")
	}
	restore := func() {
		if err := os.WriteFile(book, before, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	const kills = 200
	rng := rand.New(rand.NewPCG(1, 1))
	var old, filled, halfway int
	restore()
	for range kills {
		c := fill()
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		time.Sleep(time.Duration(rng.Int64N(int64(whole))))
		_ = c.Process.Kill() // it may have ended
		_ = c.Wait()
		left, err := filepath.Glob(filepath.Join(dir, ".saving-*"))
		if err != nil || len(left) > 1 {
			t.Fatalf("left over: %v, %v", left, err)
		}
		halfway += len(left)
		switch got := readFile(t, book); {
		case bytes.Equal(got, before):
			old++
		case bytes.Equal(got, after):
			filled++
			restore()
		default:
			t.Fatalf("the target has %d bytes; before it had %d, filled it has %d", len(got), len(before), len(after))
		}
	}
	if out, err := fill().CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	entries, err := os.ReadDir(dir)
	if err != nil || len(entries) != 1 {
		t.Errorf("the folder holds %v, %v", entries, err)
	}
	if !bytes.Equal(readFile(t, book), after) {
		t.Error("the last fill gave other bytes")
	}
	t.Logf("a fill takes %v; of %d kills %d left the old file, %d the new one; %d came while it was written", whole, kills, old, filled, halfway)
	if old == 0 || halfway == 0 {
		t.Error("no kill came before the end of a save")
	}
}

func TestAnInterruptedBatchStopsCleanlyAndTellsHowFarItCame(t *testing.T) {
	if os.PathSeparator == '\\' {
		return // a process cannot be sent an interrupt there
	}
	for _, c := range []struct {
		signal os.Signal
		code   int
	}{{os.Interrupt, exitInterrupted}, {syscall.SIGTERM, exitTerminated}} {
		dir := t.TempDir()
		makeBooks(t, dir, 400)
		cmd := process("fill", dir, "--jobs", "2")
		var stdout, stderr strings.Builder
		cmd.Stdout, cmd.Stderr = &stdout, &stderr
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		first := filepath.Join(dir, "week-0", "book-005-filled.xlsx")
		for waited := time.Now(); !isFile(first) && time.Since(waited) < time.Minute; {
			time.Sleep(time.Millisecond)
		}
		if err := cmd.Process.Signal(c.signal); err != nil {
			t.Fatal(err)
		}
		_ = cmd.Wait()
		if code := cmd.ProcessState.ExitCode(); code != c.code || !strings.Contains(stderr.String(), "interrupted when") {
			t.Errorf("%v: code %d, %s", c.signal, code, stderr.String())
		}
		if last := lastLine(stdout.String()); !strings.Contains(last, "not done when interrupted") {
			t.Errorf("%v: it ends %s", c.signal, last)
		}
		// What is there is whole: the very bytes of a run that nothing ended.
		cut := tree(t, dir)
		if stdout, _, code := run(t, "fill", dir); code != exitRefused {
			t.Fatal(stdout)
		}
		whole := tree(t, dir)
		if len(cut) >= len(whole) {
			t.Errorf("%v: the batch was done before the signal came", c.signal)
		}
		for name, data := range cut {
			if whole[name] != data {
				t.Errorf("%v: %s was not whole", c.signal, name)
			}
		}
	}
}
