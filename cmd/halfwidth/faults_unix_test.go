//go:build unix

package main

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// told runs a process to its end and gives what it printed and its exit code;
// of one that a signal ended, 128 and the signal's number. What is to be done
// once it runs is done then.
func told(t *testing.T, c *exec.Cmd, started ...func()) (stdout, stderr string, code int) {
	t.Helper()
	var out, errs bytes.Buffer
	if c.Stdout == nil {
		c.Stdout = &out
	}
	c.Stderr = &errs
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	for _, f := range started {
		f()
	}
	late := time.AfterFunc(time.Minute, func() { _ = c.Process.Kill() })
	_ = c.Wait() // the exit code says it
	late.Stop()
	code = c.ProcessState.ExitCode()
	if status := c.ProcessState.Sys().(syscall.WaitStatus); status.Signaled() {
		code = 128 + int(status.Signal())
	}
	return out.String(), errs.String(), code
}

// failsPlainly fails unless a process ended with 2 and one line of advice.
func failsPlainly(t *testing.T, name string, c *exec.Cmd, want ...string) {
	t.Helper()
	_, stderr, code := told(t, c)
	if code != exitFailed || !strings.HasPrefix(stderr, "halfwidth: ") || strings.Count(stderr, "\n") != 1 {
		t.Errorf("%s: code %d, stderr %q", name, code, stderr)
	}
	for _, w := range want {
		if !strings.Contains(stderr, w) {
			t.Errorf("%s: stderr %q does not say %q", name, stderr, w)
		}
	}
}

// unchangedTree gives a check that a folder holds what it held.
func unchangedTree(t *testing.T, dir string) func(name string) {
	t.Helper()
	before := tree(t, dir)
	return func(name string) {
		t.Helper()
		after := tree(t, dir)
		for path, data := range before {
			if after[path] != data {
				t.Errorf("%s: %s changed", name, path)
			}
		}
		for path := range after {
			if _, was := before[path]; !was {
				t.Errorf("%s: %s was left", name, path)
			}
		}
	}
}

// with room for so many blocks of 512 bytes in each file, as on a disk that is
// almost full; the signal of the limit is ignored, so that writing fails.
func withRoom(blocks int, c *exec.Cmd) *exec.Cmd {
	limited := exec.Command("sh", append([]string{"-c", fmt.Sprintf(`trap "" XFSZ; ulimit -f %d; exec "$@"`, blocks), "sh", c.Path}, c.Args[1:]...)...)
	limited.Env = c.Env
	return limited
}

func TestADiskWithoutRoomLeavesTheOldFiles(t *testing.T) {
	wholeProcesses(t)
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "larkmoor.xlsx")
	text := filepath.Join(dir, "some.calculations.csv")
	if err := os.WriteFile(text, []byte(strings.Repeat("a line of text,,,,,,,,,,\n", 2000)+"\nwork out,sample,> mean\nmean-interval,1; 2; 4,\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, old := range []string{"larkmoor-filled.xlsx", "some-filled.calculations.csv", "page.html", "new.xlsx"} {
		if err := os.WriteFile(filepath.Join(dir, old), []byte("the old file"), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	same := unchangedTree(t, dir)
	for _, args := range [][]string{
		{"fill", "--replace", book},
		{"fill", "--in-place", book},
		{"fill", "--replace", text},
		{"fill", "--in-place", text},
		{"page", "--replace", book, "-o", filepath.Join(dir, "page.html")},
		{"starter", "--replace", filepath.Join(dir, "new.xlsx"), "--for", "all"},
	} {
		for _, blocks := range []int{0, 1, 7, 8, 9, 16, 40, 64, 80} {
			name := fmt.Sprintf("%s with room for %d blocks", strings.Join(args[:2], " "), blocks)
			failsPlainly(t, name, withRoom(blocks, process(args...)), "too large", "room")
			same(name)
		}
	}
	// A book that fails in a batch is told in the table, and the exit says that all did.
	stdout, _, code := told(t, withRoom(16, process("fill", dir, "--replace")))
	if code != exitFailed || strings.Count(stdout, "check that the disk has room") != 2 {
		t.Errorf("a batch: code %d\n%s", code, stdout)
	}
	same("a batch")
}

// nobody gives a command to a user without rights to what the tests make, if the
// tests run as one who has all rights; it needs its program and its folders to be
// in that user's reach.
func nobody(t *testing.T, dir string, args ...string) *exec.Cmd {
	t.Helper()
	c := process(args...)
	if os.Geteuid() != 0 {
		return c
	}
	const id = 65534
	if err := os.Chmod(filepath.Dir(dir), 0o755); err != nil { // made by TempDir for one user
		t.Fatal(err)
	}
	program := filepath.Join(filepath.Dir(dir), "program")
	if _, err := os.Stat(program); err != nil {
		data, err := os.ReadFile(os.Args[0])
		if err == nil {
			err = os.WriteFile(program, data, 0o755)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	c.Path = program
	c.SysProcAttr = &syscall.SysProcAttr{Credential: &syscall.Credential{Uid: id, Gid: id}}
	return c
}

func TestWhatMayNotBeReadOrWrittenIsToldPlainly(t *testing.T) {
	chmod := func(path string, mode os.FileMode) {
		t.Helper()
		if err := os.Chmod(path, mode); err != nil {
			t.Fatal(err)
		}
	}
	dir := t.TempDir()
	chmod(dir, 0o777)
	book := copyTo(t, demo, dir, "book.xlsx")
	chmod(book, 0o644)
	asking := filepath.Join(dir, "asking.calculations.csv")
	data := filepath.Join(dir, "data.csv")
	for path, text := range map[string]string{asking: "work out,sample,> mean,> status,> note\nmean-interval,minutes in data.csv,,,\n", data: "minutes\n1\n2\n"} {
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	names := func() string {
		t.Helper()
		entries, err := os.ReadDir(dir)
		if err != nil {
			t.Fatal(err)
		}
		return fmt.Sprint(entries)
	}
	before := tree(t, dir)
	fails := func(name string, args []string, want ...string) {
		t.Helper()
		was := names()
		failsPlainly(t, name, nobody(t, dir, args...), want...)
		if is := names(); is != was {
			t.Errorf("%s: the folder holds %s, before it held %s", name, is, was)
		}
	}

	chmod(book, 0)
	for _, verb := range []string{"fill", "preview", "verify", "page"} {
		fails(verb+" of a book that may not be read", []string{verb, book}, book, "permission denied")
	}
	chmod(book, 0o444)
	if stdout, stderr, code := told(t, nobody(t, dir, "fill", book)); code != exitOK {
		t.Errorf("a copy of a read-only book: code %d, %s%s", code, stdout, stderr)
	}
	filled := filepath.Join(dir, "book-filled.xlsx")
	if info, err := os.Stat(filled); err != nil || info.Mode().Perm() != 0o644 {
		t.Errorf("the copy's permissions are %v (%v)", info.Mode(), err)
	}
	fails("a read-only book in place", []string{"fill", "--in-place", book}, book+": the file is read-only; make it writable, or write to another file")
	chmod(filled, 0)
	fails("an output that may not be read", []string{"fill", book}, filled+" is there and cannot be read", "permission denied", "--output")
	if err := os.Remove(filled); err != nil {
		t.Fatal(err)
	}
	chmod(book, 0o666)
	chmod(dir, 0o555)
	none := "no file can be made in its folder: permission denied; check the folder, and that you may write there"
	fails("a read-only folder", []string{"fill", book}, filled+": "+none)
	fails("a read-only folder, in place", []string{"fill", "--in-place", book}, book+": "+none)
	fails("a read-only folder, text", []string{"fill", asking}, "asking-filled.calculations.csv: "+none)
	fails("a page in a read-only folder", []string{"page", book}, "book.html", "permission denied")
	fails("a starter in a read-only folder", []string{"starter", filepath.Join(dir, "new.xlsx"), "--for", "mean-interval"}, "new.xlsx", "permission denied")
	chmod(dir, 0o777)
	for path, content := range before {
		if got := string(readFile(t, filepath.Join(dir, path))); got != content {
			t.Errorf("%s changed", path)
		}
	}

	// The row that reads a file without leave is refused, and its note says why.
	chmod(data, 0)
	stdout, _, code := told(t, nobody(t, dir, "fill", asking, "--format", "csv"))
	if code != exitRefused || !strings.Contains(stdout, "data.csv") || !strings.Contains(stdout, "permission denied") {
		t.Errorf("a data file that may not be read: code %d\n%s", code, stdout)
	}
	// A folder that may not be read fails by itself in a batch.
	closed := filepath.Join(dir, "closed")
	if err := os.Mkdir(closed, 0); err != nil {
		t.Fatal(err)
	}
	defer os.Chmod(closed, 0o700)
	stdout, stderr, code := told(t, nobody(t, dir, "preview", dir, "--format", "csv"))
	if code != exitRefused || !strings.Contains(stdout, "closed") || !strings.Contains(stdout, "permission denied") {
		t.Errorf("a folder that may not be read: code %d\n%s%s", code, stdout, stderr)
	}
}

func TestWhatCannotBePrintedEndsWithAMessage(t *testing.T) {
	if _, err := os.Stat("/dev/full"); err != nil {
		return // this system has no device that is always full
	}
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "larkmoor.xlsx")
	for _, args := range [][]string{{"--help"}, {"--version"}, {"functions"}, {"functions", "mean-interval"}, {"functions", "--format", "json"}, {"fill", "--help"},
		{"answer", "mean-interval", "sample=1; 2; 4"}, {"answer", "mean-interval", "sample=2; 2; 2"}, {"answer", "mean-interval", "sample=1; 2; 4", "--format", "csv"},
		{"fill", book}, {"preview", book}, {"verify", filepath.Join(dir, "larkmoor-filled.xlsx")}, {"page", book}, {"fill", dir}, {"fill", dir, "--format", "json"},
		{"starter", filepath.Join(dir, "new.xlsx"), "--for", "mean-interval"}} {
		full, err := os.OpenFile("/dev/full", os.O_WRONLY, 0)
		if err != nil {
			t.Fatal(err)
		}
		c := process(args...)
		c.Stdout = full
		failsPlainly(t, strings.Join(args, " "), c, "the results cannot be printed: no space left on device")
		full.Close()
	}
	if !isFile(filepath.Join(dir, "larkmoor-filled.xlsx")) || !isFile(filepath.Join(dir, "larkmoor.html")) {
		t.Error("what a command writes besides printing is not there")
	}
}

// What is printed to a pipe that nobody reads ends quietly, also for a batch,
// which leaves no temporary file.
func TestAReaderThatGoesEndsTheCommandQuietly(t *testing.T) {
	dir := t.TempDir()
	makeBooks(t, dir, 60)
	for _, args := range [][]string{{"--help"}, {"functions"}, {"answer", "mean-interval", "sample=1; 2; 4"}, {"preview", demo}, {"fill", dir}, {"fill", dir, "--format", "csv", "--replace"}} {
		for _, lines := range []int{0, 1} {
			r, w, err := os.Pipe()
			if err != nil {
				t.Fatal(err)
			}
			if lines == 0 {
				r.Close()
			}
			c := process(args...)
			c.Stdout = w
			go func() { // as head does
				_, _ = io.ReadFull(r, make([]byte, 10))
				r.Close()
			}()
			_, stderr, code := told(t, c)
			w.Close()
			if stderr != "" || code != exitBrokenPipe && (lines == 0 || code != exitOK && code != exitRefused) {
				t.Errorf("%s: code %d, stderr %q", strings.Join(args, " "), code, stderr)
			}
		}
	}
	for path := range tree(t, dir) {
		if strings.Contains(path, ".saving") {
			t.Errorf("%s was left", path)
		}
	}
	// Without any standard output there is nobody to miss it.
	c := exec.Command("sh", "-c", `exec "$0" functions >&-`, os.Args[0])
	c.Env = append(os.Environ(), asCommand+"=yes")
	if _, stderr, code := told(t, c); code != exitOK || stderr != "" {
		t.Errorf("closed output: code %d, %s", code, stderr)
	}
}

func TestASignalEndsAFillCleanly(t *testing.T) {
	wholeProcesses(t)
	dir := t.TempDir()
	book := filepath.Join(dir, "slow.calculations.csv")
	row := "bootstrap-interval,1; 2; 4; 8; 16; 3; 9; 27,1000000,\n"
	if err := os.WriteFile(book, []byte("work out,sample,resamples,> lower\n"+strings.Repeat(row, 200)), 0o600); err != nil {
		t.Fatal(err)
	}
	same := unchangedTree(t, dir)
	for signal, want := range map[os.Signal]int{os.Interrupt: exitInterrupted, syscall.SIGTERM: exitTerminated} {
		for _, args := range [][]string{{"fill", book}, {"fill", "--in-place", book}, {"page", book}} {
			c := process(args...)
			start := time.Now()
			_, stderr, code := told(t, c, func() {
				// The signal comes once the process surely listens.
				time.AfterFunc(700*time.Millisecond, func() { _ = c.Process.Signal(signal) })
			})
			if code != want || stderr != "halfwidth: interrupted\n" || time.Since(start) > 20*time.Second {
				t.Errorf("%v, %s: code %d after %v, stderr %q", signal, args[0], code, time.Since(start), stderr)
			}
			same(fmt.Sprint(signal, args[:2]))
		}
	}
}

func TestTwoProcessesThatFillOneFileGiveOneWholeOutput(t *testing.T) {
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "larkmoor.xlsx")
	if _, stderr, code := run(t, "fill", book); code != exitOK {
		t.Fatal(stderr)
	}
	filled := filepath.Join(dir, "larkmoor-filled.xlsx")
	want := readFile(t, filled)
	for range 5 {
		if err := os.Remove(filled); err != nil {
			t.Fatal(err)
		}
		var all []*exec.Cmd
		for range 3 {
			c := process("fill", book)
			if err := c.Start(); err != nil {
				t.Fatal(err)
			}
			all = append(all, c)
		}
		for _, c := range all {
			if err := c.Wait(); err != nil {
				t.Errorf("one of them: %v", err)
			}
		}
		if !bytes.Equal(readFile(t, filled), want) {
			t.Error("the output has other bytes")
		}
	}
	if got := tree(t, dir); len(got) != 2 {
		t.Errorf("the folder holds %d files", len(got))
	}
}

// A path may be longer than the system takes in one piece, where it is reached
// from a folder below.
func TestABookInADeepFolderIsFilledFromThere(t *testing.T) {
	home, err := os.Open(".")
	if err != nil {
		t.Fatal(err)
	}
	defer home.Close()
	defer home.Chdir()
	content := readFile(t, demo)
	if err := os.Chdir(t.TempDir()); err != nil {
		t.Fatal(err)
	}
	level := strings.Repeat("folder ", 30)
	for range 25 {
		if err := os.Mkdir(level, 0o700); err != nil {
			t.Fatal(err)
		}
		if err := os.Chdir(level); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.WriteFile("book.xlsx", content, 0o600); err != nil {
		t.Fatal(err)
	}
	for _, args := range [][]string{{"fill", "book.xlsx"}, {"verify", "book-filled.xlsx"}, {"page", "book.xlsx"}, {"fill", "--in-place", "book.xlsx"}} {
		if stdout, stderr, code := run(t, args...); code != exitOK {
			t.Errorf("%s: code %d\n%s%s", args[0], code, stdout, stderr)
		}
	}
	entries, err := os.ReadDir(".")
	if err != nil || len(entries) != 3 {
		t.Errorf("the folder holds %v (%v)", entries, err)
	}
	// A path that is too long is refused in one line.
	far := filepath.Join(strings.Repeat("x/", 3000), "book.xlsx")
	if _, stderr, code := run(t, "fill", far); code != exitFailed || !strings.HasSuffix(stderr, "file name too long; check its name and that you may read it\n") {
		t.Errorf("code %d, %s", code, stderr)
	}
}
