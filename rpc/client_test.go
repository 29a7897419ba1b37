package rpc

import (
	"bufio"
	"bytes"
	"context"
	"fmt"
	"io"
	"strings"
	"sync"
	"testing"
	"time"
)

// testClient is the other end of a Serve over in-memory pipes. It parses frames
// by itself, more strictly than the server does.
type testClient struct {
	t        testing.TB
	in       *io.PipeWriter
	out      *io.PipeReader
	messages chan string
	broken   error // what came that was no frame; set before messages is closed
	remarks  *lockedBuffer
	code     chan int
	stop     context.CancelFunc
}

type lockedBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *lockedBuffer) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lockedBuffer) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

const patience = 20 * time.Second

// begin starts a server with the standard methods and those of testMethods.
func begin(t testing.TB, opts Options) *testClient {
	t.Helper()
	return beginWith(t, opts, true)
}

// beginWith lets a test leave the replies unread.
func beginWith(t testing.TB, opts Options, reading bool) *testClient {
	t.Helper()
	if opts.Methods == nil {
		opts.Methods = append(Methods(), testMethods()...)
	}
	if opts.Version == "" {
		opts.Version = "0.0-test"
	}
	serverIn, in := io.Pipe()
	out, serverOut := io.Pipe()
	ctx, stop := context.WithCancel(context.Background())
	c := &testClient{t: t, in: in, out: out, messages: make(chan string, 100_000), remarks: &lockedBuffer{}, code: make(chan int, 1), stop: stop}
	go func() {
		code := Serve(ctx, serverIn, serverOut, c.remarks, opts)
		serverOut.Close()
		serverIn.Close()
		c.code <- code
	}()
	if reading {
		go c.read()
	}
	t.Cleanup(func() {
		stop()
		in.Close()
		out.Close()
	})
	return c
}

func (c *testClient) read() {
	defer close(c.messages)
	r := bufio.NewReader(c.out)
	for {
		header, err := r.ReadString('\n')
		if err == io.EOF && header == "" {
			return
		}
		var length int
		if n, scanErr := fmt.Sscanf(header, "Content-Length: %d\r\n", &length); err != nil || n != 1 || scanErr != nil {
			c.broken = fmt.Errorf("header line %q (%v)", header, err)
			return
		}
		if blank, err := r.ReadString('\n'); err != nil || blank != "\r\n" {
			c.broken = fmt.Errorf("line %q after the header", blank)
			return
		}
		body := make([]byte, length)
		if _, err := io.ReadFull(r, body); err != nil {
			c.broken = err
			return
		}
		c.messages <- string(body)
	}
}

func frame(body string) string { return fmt.Sprintf("Content-Length: %d\r\n\r\n%s", len(body), body) }

func (c *testClient) raw(text string) {
	c.t.Helper()
	if _, err := io.WriteString(c.in, text); err != nil {
		c.t.Fatalf("the server stopped reading: %v", err)
	}
}

func (c *testClient) send(format string, values ...any) {
	c.t.Helper()
	body := format
	if len(values) > 0 {
		body = fmt.Sprintf(format, values...)
	}
	c.raw(frame(body))
}

// next gives the next message, or fails.
func (c *testClient) next() string {
	c.t.Helper()
	select {
	case m, ok := <-c.messages:
		if !ok {
			c.t.Fatalf("the server closed its output (%v); it remarked:\n%s", c.broken, c.remarks)
		}
		return m
	case <-time.After(patience):
		c.t.Fatalf("no message came; the server remarked:\n%s", c.remarks)
	}
	return ""
}

func (c *testClient) want(message string) {
	c.t.Helper()
	if got := c.next(); got != message {
		c.t.Fatalf("got  %s\nwant %s", got, message)
	}
}

// wantPart reads the next message, which holds each of the parts.
func (c *testClient) wantPart(parts ...string) string {
	c.t.Helper()
	got := c.next()
	for _, part := range parts {
		if !strings.Contains(got, part) {
			c.t.Fatalf("got %s\nwhich lacks %s", got, part)
		}
	}
	return got
}

// initialize opens the session.
func (c *testClient) initialize() {
	c.t.Helper()
	c.initializeWith(`{"processId":null,"capabilities":{}}`)
}

// initializeWith opens the session with params of the initialize request.
func (c *testClient) initializeWith(params string) {
	c.t.Helper()
	c.send(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":%s}`, params)
	c.wantPart(`"id":"start"`, `"serverInfo":{"name":"halfwidth-server","version":"0.0-test"}`)
	c.send(`{"jsonrpc":"2.0","method":"initialized","params":{}}`)
}

// ends waits for the server, checks its exit code and that nothing else came.
func (c *testClient) ends(code int) {
	c.t.Helper()
	select {
	case got := <-c.code:
		if got != code {
			c.t.Errorf("exit code %d, want %d; the server remarked:\n%s", got, code, c.remarks)
		}
	case <-time.After(patience):
		c.t.Fatalf("the server did not end; it remarked:\n%s", c.remarks)
	}
	for m := range c.messages {
		c.t.Errorf("one message too many: %s", m)
	}
	if c.broken != nil {
		c.t.Errorf("the output held something else than frames: %v", c.broken)
	}
}

// leave shuts the server down and ends it.
func (c *testClient) leave() {
	c.t.Helper()
	c.send(`{"jsonrpc":"2.0","id":"bye","method":"shutdown"}`)
	c.want(`{"jsonrpc":"2.0","id":"bye","result":null}`)
	c.send(`{"jsonrpc":"2.0","method":"exit"}`)
	c.ends(0)
}

// testMethods are rows that only tests add, made anew for each session.
func testMethods() []Method {
	value := 0.0
	return []Method{
		{Name: "test/echo", Doc: "Gives its params back.", Handler: func(_ context.Context, call *Call) (any, error) {
			return call.Params, nil
		}},
		Strict(Method{Name: "test/numbers", Doc: "Gives its list back."},
			func(_ context.Context, _ *Call, p struct {
				Values []float64 `json:"values"`
			}) (any, error) {
				return Series(p.Values), nil
			}),
		Strict(Method{Name: "test/set", Notification: true, Doc: "Sets the value."},
			func(_ context.Context, _ *Call, p struct {
				Value float64 `json:"value"`
			}) (any, error) {
				value = p.Value
				return nil, nil
			}),
		{Name: "test/get", Doc: "Gives the value, as it was when the question came, from a worker.",
			Handler: func(context.Context, *Call) (any, error) {
				seen := value
				return Later(func(context.Context) (any, error) { return seen, nil })
			}},
		{Name: "test/wait", Long: true, Doc: "Waits until it is given up.", Handler: func(ctx context.Context, _ *Call) (any, error) {
			<-ctx.Done()
			return nil, ctx.Err()
		}},
		{Name: "test/long", Long: true, Doc: "Gives its params back, from a worker.", Handler: func(_ context.Context, call *Call) (any, error) {
			return call.Params, nil
		}},
		{Name: "test/panic", Doc: "Fails in turn.", Handler: func(context.Context, *Call) (any, error) {
			panic("secret detail")
		}},
		{Name: "test/panicLong", Long: true, Doc: "Fails on a worker.", Handler: func(context.Context, *Call) (any, error) {
			var none []int
			return none[3], nil
		}},
		{Name: "test/panicNotice", Notification: true, Doc: "Fails unanswered.", Handler: func(context.Context, *Call) (any, error) {
			panic("secret detail")
		}},
		{Name: "test/big", Doc: "Gives a text of 100000 letters.", Handler: func(context.Context, *Call) (any, error) {
			return strings.Repeat("x", 100_000), nil
		}},
	}
}
