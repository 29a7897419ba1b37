package main

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"
)

// client is one server process and its pipes.
type client struct {
	t       *testing.T
	process *exec.Cmd
	in      io.WriteCloser
	out     *bufio.Reader
	name    string
}

func startClient(t *testing.T, name string, args ...string) *client {
	t.Helper()
	c := server(t, args...)
	in, err := c.StdinPipe()
	if err != nil {
		t.Fatal(err)
	}
	out, err := c.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	timer := time.AfterFunc(2*time.Minute, func() { c.Process.Kill() })
	t.Cleanup(func() { timer.Stop() })
	return &client{t, c, in, bufio.NewReader(out), name}
}

func (c *client) send(format string, a ...any) {
	if _, err := io.WriteString(c.in, frame(fmt.Sprintf(format, a...))); err != nil {
		c.t.Errorf("%s: %v", c.name, err)
	}
}

// next gives the body of the next message, "" at the end.
func (c *client) next() string {
	var length int
	if _, err := fmt.Fscanf(c.out, "Content-Length: %d\r\n\r\n", &length); err != nil {
		return ""
	}
	body := make([]byte, length)
	if _, err := io.ReadFull(c.out, body); err != nil {
		return ""
	}
	return string(body)
}

// Twenty-four clients at once, each with a process of its own and a book of the
// same name: none sees the values of another.
func TestClientsDoNotMeet(t *testing.T) {
	const clients = 24
	var group sync.WaitGroup
	for id := range clients {
		c := startClient(t, fmt.Sprintf("client %d", id), "--workers", "1")
		group.Go(func() {
			c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":%d,"capabilities":{}}}`, os.Getpid())
			if got := c.next(); !strings.Contains(got, `"id":1,"result"`) {
				t.Errorf("%s: %s", c.name, got)
			}
			c.send(`{"jsonrpc":"2.0","method":"sheets/didOpen","params":{"book":"larkmoor","sheet":"Trips","version":1,"cells":[{"at":"A1","column":["minutes",%d,%d]}]}}`, id, id+2)
			for round := range 20 {
				at := id + 1 + round
				c.send(`{"jsonrpc":"2.0","method":"sheets/didChange","params":{"book":"larkmoor","sheet":"Trips","baseVersion":%d,"version":%d,"cells":[{"at":"A2","column":[%d,%d]}]}}`, round+1, round+2, at-1, at+1)
				c.send(`{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":"minutes in Trips"},"book":"larkmoor"}}`, 100+round)
				if got := c.next(); !strings.Contains(got, fmt.Sprintf(`"id":%d,`, 100+round)) || !strings.Contains(got, fmt.Sprintf(`"mean":%d,`, at)) {
					t.Errorf("%s, round %d: %s", c.name, round, got)
				}
			}
			c.send(`{"jsonrpc":"2.0","id":2,"method":"shutdown"}`)
			if got := c.next(); got != done {
				t.Errorf("%s: %s", c.name, got)
			}
			c.send(exit)
			if got := c.next(); got != "" {
				t.Errorf("%s: one message too many: %s", c.name, got)
			}
			if code := wait(t, c.process); code != 0 {
				t.Errorf("%s: exit code %d", c.name, code)
			}
		})
	}
	group.Wait()
}

// A client that is killed leaves its server without a reader and a writer; one
// that leaves in the middle of a frame, or only closes its pipe, the same.
func TestAClientThatGoesLeavesNoServer(t *testing.T) {
	for _, last := range []string{"", frame(initialize), frame(initialize) + "Content-Length: 90\r\n\r\n{\"half", frame(initialize) + "Content-Le"} {
		c := startClient(t, "a client that closes its pipe")
		if _, err := io.WriteString(c.in, last); err != nil {
			t.Fatal(err)
		}
		c.in.Close()
		if _, err := io.Copy(io.Discard, c.out); err != nil {
			t.Error(err)
		}
		if code := wait(t, c.process); code != 1 {
			t.Errorf("after %q the exit code is %d", last, code)
		}
	}
}

// The end of a killed client's server is seen at the error stream, which both
// have from the test and nobody else.
func TestAKilledClientLeavesNoServer(t *testing.T) {
	for _, waits := range []bool{false, true} { // whether a long call is under way
		c := exec.Command(os.Args[0])
		c.Env = append(os.Environ(), clientEnv+"="+strconv.FormatBool(waits))
		out, err := c.StdoutPipe()
		if err != nil {
			t.Fatal(err)
		}
		alive, held, err := os.Pipe()
		if err != nil {
			t.Fatal(err)
		}
		c.Stderr = held
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		held.Close()
		line, err := bufio.NewReader(out).ReadString('\n')
		if err != nil || line != "served\n" {
			t.Fatalf("the client says %q (%v)", line, err)
		}
		if err := c.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		_ = c.Wait() // killed
		ended := make(chan string, 1)
		go func() {
			text, _ := io.ReadAll(alive)
			ended <- string(text)
		}()
		select {
		case <-ended:
		case <-time.After(20 * time.Second):
			t.Errorf("the server of a killed client lives on (a call under way: %v)", waits)
		}
		alive.Close()
	}
}

const clientEnv = "HALFWIDTH_CLIENT_UNDER_TEST"

// beClient starts a server, is answered once, and waits to be killed.
func beClient(busy bool) {
	c := exec.Command(os.Args[0])
	c.Env = append(os.Environ(), "HALFWIDTH_SERVER_UNDER_TEST=1")
	c.Stderr = os.Stderr
	in, err := c.StdinPipe()
	if err != nil {
		panic(err)
	}
	out, err := c.StdoutPipe()
	if err != nil {
		panic(err)
	}
	if err := c.Start(); err != nil {
		panic(err)
	}
	_, _ = io.WriteString(in, frame(initialize))
	if busy {
		_, _ = io.WriteString(in, frame(`{"jsonrpc":"2.0","id":7,"method":"functions/answerMany","params":{"calls":[`+
			strings.Repeat(`{"name":"bootstrap-interval","arguments":{"sample":[3,1,4,1,5,9,2,6],"of":"median","resamples":100000}},`, 500)+
			`{"name":"standard-score","arguments":{"value":1,"mean":0,"sd":1}}]}}`))
	}
	if _, err := out.Read(make([]byte, 1)); err != nil {
		panic(err)
	}
	fmt.Println("served")
	select {}
}
