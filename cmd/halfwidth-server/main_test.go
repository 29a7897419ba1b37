package main

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"runtime"
	"strings"
	"testing"
	"time"

	"halfwidth/cmd/internal/buildinfo"
)

// TestMain lets the test's own binary be the server, so that it is tested as a
// process of its own.
func TestMain(m *testing.M) {
	if busy := os.Getenv(clientEnv); busy != "" && os.Getenv("HALFWIDTH_SERVER_UNDER_TEST") == "" {
		beClient(busy == "true")
		return
	}
	if os.Getenv("HALFWIDTH_SERVER_UNDER_TEST") != "" {
		main()
		return
	}
	os.Exit(m.Run())
}

func server(t *testing.T, args ...string) *exec.Cmd {
	t.Helper()
	c := exec.Command(os.Args[0], args...)
	c.Env = append(os.Environ(), "HALFWIDTH_SERVER_UNDER_TEST=1")
	return c
}

func frame(body string) string { return fmt.Sprintf("Content-Length: %d\r\n\r\n%s", len(body), body) }

const (
	initialize = `{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":null,"capabilities":{}}}`
	shutdown   = `{"jsonrpc":"2.0","id":2,"method":"shutdown"}`
	done       = `{"jsonrpc":"2.0","id":2,"result":null}`
	exit       = `{"jsonrpc":"2.0","method":"exit"}`
)

// wait ends the process if it does not end by itself, and gives its exit code.
func wait(t *testing.T, c *exec.Cmd) int {
	t.Helper()
	timer := time.AfterFunc(20*time.Second, func() { c.Process.Kill() })
	defer timer.Stop()
	err := c.Wait()
	var status *exec.ExitError
	if err != nil && !errors.As(err, &status) {
		t.Fatal(err)
	}
	return c.ProcessState.ExitCode()
}

func TestOptions(t *testing.T) {
	for _, test := range []struct {
		args        []string
		code        int
		out, errors string
	}{
		{[]string{"--version"}, 0, "halfwidth-server " + buildinfo.Version() + "\n", ""},
		{[]string{"--help"}, 0, "Usage: halfwidth-server [options]\n", ""},
		{[]string{"-h"}, 0, "Usage: halfwidth-server [options]\n", ""},
		{[]string{"--max-depth", "0"}, 2, "", "write a whole number from 1"},
		{[]string{"--max-message-bytes=64MB"}, 2, "", "write a whole number from 1"},
		{[]string{"--max-queue=1e3"}, 2, "", "write a whole number from 1"},
		{[]string{"--may-fill", "no/such/folder"}, 2, "", `the folder "no/such/folder" cannot be found`},
		{[]string{"--may-fill", "main.go"}, 2, "", `"main.go" is no folder`},
		{[]string{"--no-such"}, 2, "", "-no-such"},
		{[]string{"book.xlsx"}, 2, "", `"book.xlsx" is no option`},
		{[]string{"--wrokers", "2"}, 2, "", "there is no option --wrokers\n"},
		{[]string{"--workers"}, 2, "", "--workers needs a value\n"},
		{[]string{"--workers", "0"}, 2, "", `--workers is "0": write a whole number from 1`},
	} {
		var out, errs bytes.Buffer
		code := run(test.args, strings.NewReader(""), &out, &errs)
		if code != test.code || !strings.HasPrefix(out.String(), test.out) || (test.out == "") != (out.Len() == 0) ||
			!strings.Contains(errs.String(), test.errors) || (test.errors == "") != (errs.Len() == 0) {
			t.Errorf("%v: exit code %d, output %q, errors %q", test.args, code, out.String(), errs.String())
		}
	}
}

func TestLimitsReachTheServer(t *testing.T) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(0))
	var out, errs bytes.Buffer
	in := frame(initialize) + frame(`{"jsonrpc":"2.0","id":3,"method":"x","params":{"text":"`+strings.Repeat("x", 500)+`"}}`) + frame(shutdown) + frame(exit)
	if code := run([]string{"--max-message-bytes", "400", "--max-depth=9", "--max-sample-values", "6", "--max-queue=7", "--workers", "3", "--max-open-sheets=5", "--max-open-cells", "900", "--may-fill", ".", "--may-fill=.."}, strings.NewReader(in), &out, &errs); code != 0 {
		t.Errorf("exit code %d, errors %q", code, errs.String())
	}
	for _, part := range []string{`"messageBytes":400`, `"depth":9`, `"sampleValues":6`, `"queue":7`, `"openSheets":5`, `"openCells":900`, `"workers":3`, `"version":"` + buildinfo.Version() + `"`, "at most 400 are taken", done} {
		if !strings.Contains(out.String(), part) {
			t.Errorf("the output lacks %s: %s", part, out.String())
		}
	}
}

func TestAProcessAnswersAndEnds(t *testing.T) {
	c := server(t)
	in, _ := c.StdinPipe()
	out, _ := c.StdoutPipe()
	var errs bytes.Buffer
	c.Stderr = &errs
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	// One by one: each answer has to leave before the next message comes.
	replies := bufio.NewReader(out)
	for range 100 {
		if _, err := io.WriteString(in, frame(`{"jsonrpc":"2.0","id":"x","method":"shutdown"}`)); err != nil {
			t.Fatal(err)
		}
		var length int
		if _, err := fmt.Fscanf(replies, "Content-Length: %d\r\n\r\n", &length); err != nil {
			t.Fatal(err)
		}
		body := make([]byte, length)
		if _, err := io.ReadFull(replies, body); err != nil || !strings.Contains(string(body), `-32002`) {
			t.Fatalf("%s, %v", body, err)
		}
	}
	if _, err := io.WriteString(in, frame(initialize)+frame(shutdown)+frame(exit)); err != nil {
		t.Fatal(err)
	}
	rest, err := io.ReadAll(replies)
	if err != nil || !strings.HasSuffix(string(rest), done) {
		t.Errorf("%s, %v", rest, err)
	}
	if code := wait(t, c); code != 0 || errs.Len() > 0 {
		t.Errorf("exit code %d, errors %q", code, errs.String())
	}
}

func TestAFileOfMessagesIsAnsweredInFull(t *testing.T) {
	var in strings.Builder
	in.WriteString(frame(initialize))
	for i := range 5000 {
		in.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":"n%d","method":"no/such"}`, i)))
	}
	c := server(t)
	c.Stdin = strings.NewReader(in.String())
	out, err := c.Output()
	var status *exec.ExitError
	if !errors.As(err, &status) || status.ExitCode() != 1 || len(status.Stderr) > 0 {
		t.Errorf("%v", err)
	}
	answers := map[string]int{}
	for _, reply := range strings.Split(string(out), "Content-Length: ") {
		_, id, _ := strings.Cut(reply, `"id":`)
		id, _, _ = strings.Cut(id, ",")
		answers[id]++
	}
	for i := range 5000 {
		if n := answers[fmt.Sprintf(`"n%d"`, i)]; n != 1 {
			t.Fatalf("request %d was answered %d times", i, n)
		}
	}
}

func TestAClosedOutputEndsTheProcess(t *testing.T) {
	c := server(t)
	in, _ := c.StdinPipe()
	out, _ := c.StdoutPipe()
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	out.Close()
	go func() {
		for {
			if _, err := io.WriteString(in, frame(initialize)); err != nil {
				return
			}
			time.Sleep(time.Millisecond)
		}
	}()
	if code := wait(t, c); code != 1 {
		t.Errorf("exit code %d, which a signal gives as -1", code)
	}
}

func TestTheProcessEndsWithTheOneNamed(t *testing.T) {
	client := exec.Command(os.Args[0], "-test.run=^$")
	if err := client.Run(); err != nil {
		t.Fatal(err)
	}
	c := server(t)
	in, _ := c.StdinPipe() // stays open, as another process may hold it
	defer in.Close()
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	start := time.Now()
	if _, err := io.WriteString(in, frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":%d}}`, client.Process.Pid))); err != nil {
		t.Fatal(err)
	}
	if code := wait(t, c); code != 1 || time.Since(start) > 10*time.Second {
		t.Errorf("exit code %d after %v", code, time.Since(start))
	}
}

func TestThreadsForReaderAndWriter(t *testing.T) {
	before := runtime.GOMAXPROCS(0)
	defer runtime.GOMAXPROCS(before)
	var out, errs bytes.Buffer
	run([]string{}, strings.NewReader(""), &out, &errs)
	if got := runtime.GOMAXPROCS(0); got != before+2 {
		t.Errorf("%d threads for %d cores", got, before)
	}
}

// TestRequestsBeforeAnyReplyIsRead writes more than the pipes between two
// processes hold, in both directions, before it reads.
func TestRequestsBeforeAnyReplyIsRead(t *testing.T) {
	c := server(t)
	in, _ := c.StdinPipe()
	out, _ := c.StdoutPipe()
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	timer := time.AfterFunc(20*time.Second, func() { c.Process.Kill() })
	defer timer.Stop()
	var messages strings.Builder
	messages.WriteString(frame(initialize))
	for range 10_000 {
		messages.WriteString(frame(`{"jsonrpc":"2.0","id":7,"method":"no/such"}`))
	}
	messages.WriteString(frame(shutdown) + frame(exit))
	if _, err := io.WriteString(in, messages.String()); err != nil {
		t.Fatal(err)
	}
	got, err := io.ReadAll(out)
	if n := strings.Count(string(got), `"id":7,`); err != nil || n != 10_000 || !strings.HasSuffix(string(got), done) {
		t.Errorf("%d answers, %v", n, err)
	}
	if code := wait(t, c); code != 0 {
		t.Errorf("exit code %d", code)
	}
}
