package rpc

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"os/exec"
	"strings"
	"testing"
	"testing/synctest"
	"time"
)

func TestASessionFromInitializeToExit(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/echo","params":{"a": [1 , 2]}}`)
	c.want(`{"jsonrpc":"2.0","id":1,"result":{"a":[1,2]}}`)
	c.leave()
	if c.remarks.String() != "" {
		t.Errorf("a session without fault left remarks: %s", c.remarks)
	}
}

func TestInitializeSaysWhatTheServerCanDo(t *testing.T) {
	announced := Method{Name: "test/hover", Standard: true, Handler: nothing, Announce: func(client *Client, capabilities map[string]any) {
		capabilities["hoverProvider"] = client.Can("textDocument", "hover", "dynamicRegistration")
	}}
	for _, test := range []struct{ name, capabilities, encoding string }{
		{"utf-16 is the standard's default", `{}`, "utf-16"},
		{"utf-8 where offered", `{"general":{"positionEncodings":["utf-16","utf-8"]}}`, "utf-8"},
		{"utf-32 is not ours", `{"general":{"positionEncodings":["utf-32"]}}`, "utf-16"},
		{"a faulty offer is none", `{"general":{"positionEncodings":"utf-8"}}`, "utf-16"},
	} {
		t.Run(test.name, func(t *testing.T) {
			var session *Session
			c := begin(t, Options{Methods: append(append(Methods(), testMethods()...), announced), began: func(s *Session) { session = s }})
			c.send(`{"jsonrpc":"2.0","id":0,"method":"initialize","params":{"clientInfo":{"name":"sheet","version":"7"},"locale":"en",
				"initializationOptions":{"x":1},"unknown":true,"capabilities":%s}}`, test.capabilities)
			c.wantPart(`"positionEncoding":"`+test.encoding+`"`, `"protocolVersion":1`, `"depth":128`, `"messageBytes":67108864`,
				`"methods":["functions/answer","functions/answerMany","functions/describe","functions/list","rpc.discover",`, `"hoverProvider":false`)
			if session.PositionEncoding() != test.encoding {
				t.Errorf("the session counts in %s", session.PositionEncoding())
			}
			client := session.Client()
			if client.Name != "sheet" || client.Version != "7" || client.Locale != "en" || string(client.Options) != `{"x":1}` {
				t.Errorf("the client was taken to be %+v", client)
			}
			c.leave()
		})
	}
}

func TestRequestsAreRefusedOutsideTheirPhase(t *testing.T) {
	c := begin(t, Options{})
	for _, method := range []string{"test/echo", "shutdown", "no/such", "$/no/such"} {
		c.send(`{"jsonrpc":"2.0","id":1,"method":"%s"}`, method)
		c.want(fmt.Sprintf(`{"jsonrpc":"2.0","id":1,"error":{"code":-32002,"message":"Send initialize before %s."}}`, method))
	}
	c.send(`{"jsonrpc":"2.0","method":"test/set","params":{"value":1}}`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"initialize","params":{"processId":"17"}}`)
	c.wantPart(`"id":2`, `-32602`, `"pointer":"/processId"`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"initialize","params":[]}`)
	c.wantPart(`"id":2`, `-32602`, `as an object`)
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":3,"method":"initialize","params":{}}`)
	c.want(`{"jsonrpc":"2.0","id":3,"error":{"code":-32600,"message":"initialize has been answered already; it is sent once."}}`)
	c.send(`{"jsonrpc":"2.0","id":4,"method":"test/get"}`)
	c.want(`{"jsonrpc":"2.0","id":4,"result":0}`)
	c.send(`{"jsonrpc":"2.0","id":5,"method":"shutdown"}`)
	c.want(`{"jsonrpc":"2.0","id":5,"result":null}`)
	for _, method := range []string{"test/echo", "shutdown", "initialize", "no/such"} {
		c.send(`{"jsonrpc":"2.0","id":6,"method":"%s"}`, method)
		c.want(`{"jsonrpc":"2.0","id":6,"error":{"code":-32600,"message":"The server has been shut down; only the notification exit is taken now."}}`)
	}
	c.send(`{"jsonrpc":"2.0","method":"exit"}`)
	c.ends(0)
}

func TestTheExitCodeTellsOfShutdown(t *testing.T) {
	t.Run("exit alone", func(t *testing.T) {
		c := begin(t, Options{})
		c.send(`{"jsonrpc":"2.0","method":"exit"}`)
		c.ends(1)
	})
	t.Run("end of input", func(t *testing.T) {
		c := begin(t, Options{})
		c.initialize()
		c.in.Close()
		c.ends(1)
	})
	t.Run("end of input after shutdown", func(t *testing.T) {
		c := begin(t, Options{})
		c.initialize()
		c.send(`{"jsonrpc":"2.0","id":5,"method":"shutdown"}`)
		c.in.Close()
		c.want(`{"jsonrpc":"2.0","id":5,"result":null}`)
		c.ends(0)
	})
	t.Run("context", func(t *testing.T) {
		c := begin(t, Options{})
		c.initialize()
		c.stop()
		c.ends(1)
	})
}

func TestUnknownMethods(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/ecoh"}`)
	c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32601,"message":"There is no method \"test/ecoh\"; did you mean \"test/echo\"?","data":{"suggestion":"test/echo"}}}`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"$/unknown"}`)
	c.wantPart(`"id":2`, `-32601`)
	c.send(`{"jsonrpc":"2.0","id":3,"method":"exit"}`)
	c.wantPart(`"id":3`, `-32600`, `is a notification`)
	c.send(`{"jsonrpc":"2.0","method":"$/unknown"}`)
	c.send(`{"jsonrpc":"2.0","method":"test/sett"}`)
	c.send(`{"jsonrpc":"2.0","method":"test/echo"}`)
	c.leave()
	remarks := c.remarks.String()
	if strings.Contains(remarks, "$/unknown") || !strings.Contains(remarks, `"test/sett" is unknown`) || !strings.Contains(remarks, "test/echo came without an id") {
		t.Errorf("remarks were: %s", remarks)
	}
}

func TestParamsByPositionAreRefused(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/numbers","params":[[1,2]]}`)
	c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32602,"message":"params came as a list; test/numbers takes them by name, as an object.",` +
		`"data":{"argument":"params","reason":"came as a list","suggestion":"test/numbers takes them by name, as an object"}}}`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"shutdown","params":[]}`)
	c.want(`{"jsonrpc":"2.0","id":2,"result":null}`)
	c.send(`{"jsonrpc":"2.0","method":"exit","params":null}`)
	c.ends(0)
}

func TestAPanicStopsItsCallAlone(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	for i, method := range []string{"test/panic", "test/panicLong"} {
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"%s"}`, i, method)
		c.want(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"error":{"code":-32603,"message":"%s"}}`, i, internalFault))
	}
	c.send(`{"jsonrpc":"2.0","method":"test/panicNotice"}`)
	c.want(`{"jsonrpc":"2.0","method":"window/logMessage","params":{"message":"test/panicNotice was not done: ` + internalFault + `","type":1}}`)
	c.leave()
	if n := strings.Count(c.remarks.String(), "fault in test/panic"); n != 3 {
		t.Errorf("%d faults were told to the error stream, want 3:\n%s", n, c.remarks)
	}
}

func TestResultsThatJSONCannotHoldAreOurFault(t *testing.T) {
	results := map[string]any{"test/nan": math.NaN(), "test/infinite": Series{math.Inf(1)}, "test/channel": make(chan int)}
	methods := Methods()
	for name, result := range results {
		methods = append(methods, Method{Name: name, Handler: func(context.Context, *Call) (any, error) { return result, nil }})
	}
	c := begin(t, Options{Methods: methods})
	c.initialize()
	for name := range results {
		c.send(`{"jsonrpc":"2.0","id":1,"method":"%s"}`, name)
		c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32603,"message":"` + internalFault + `"}}`)
	}
	c.leave()
}

func TestOrderIsKeptBetweenChangesAndQuestions(t *testing.T) {
	c := begin(t, Options{Limits: Limits{Queue: 2000}}) // room for all, however slow the workers
	c.initialize()
	go func() {
		var b strings.Builder
		for i := range 2000 {
			b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","method":"test/set","params":{"value":%d}}`, i)))
			b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"method":"test/get"}`, i)))
		}
		c.raw(b.String())
	}()
	seen := map[string]bool{}
	for range 2000 {
		var id, value int
		m := c.next()
		if n, err := fmt.Sscanf(m, `{"jsonrpc":"2.0","id":%d,"result":%d}`, &id, &value); n != 2 || err != nil || id != value || seen[m] {
			t.Fatalf("a question was answered from another change, or twice: %s", m)
		}
		seen[m] = true
	}
	c.leave()
}

func TestTenThousandRequestsBeforeAReplyIsRead(t *testing.T) {
	for _, ready := range []func() bool{nil, func() bool { return true }, func() bool { return false }} {
		c := beginWith(t, Options{ready: ready}, false)
		var b strings.Builder
		b.WriteString(frame(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{}}`))
		for i := range 10_000 {
			b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"method":"test/echo","params":{"i":%d}}`, i, i)))
		}
		if ready != nil && ready() {
			// An output that says it takes bytes and does not, as a pipe never
			// would, may hold the server up: reading has to go on beside it.
			go c.raw(b.String())
		} else {
			c.raw(b.String())
		}
		go c.read()
		c.wantPart(`"id":"start"`)
		for i := range 10_000 {
			c.want(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"result":{"i":%d}}`, i, i))
		}
		c.leave()
	}
}

func TestAClientThatNeverReadsIsHeldBack(t *testing.T) {
	c := beginWith(t, Options{Limits: Limits{UnsentBytes: 1 << 20, Patience: 10 * time.Millisecond}}, false)
	c.send(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{}}`)
	stuck := make(chan int)
	go func() {
		for i := range 1000 {
			if _, err := c.in.Write([]byte(frame(`{"jsonrpc":"2.0","id":1,"method":"test/big"}`))); err != nil {
				stuck <- i
				return
			}
		}
		stuck <- 1000
	}()
	select {
	case n := <-stuck:
		t.Fatalf("%d requests of 100000 bytes each were taken with no reply read", n)
	case <-time.After(300 * time.Millisecond):
	}
	c.stop()
	if code := <-c.code; code != 1 {
		t.Errorf("exit code %d", code)
	}
	if n := <-stuck; n > 100 {
		t.Errorf("%d requests were taken with 1 MiB of replies allowed unread", n)
	}
}

func TestEndOfInputLetsCallsComeToTheirEnd(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		start := time.Now()
		methods := append(Methods(), Method{Name: "test/sleep", Long: true, Handler: func(ctx context.Context, call *Call) (any, error) {
			d, err := time.ParseDuration(strings.Trim(string(memberOf(call.Params, "for")), `"`))
			if err != nil {
				return nil, err
			}
			select {
			case <-time.After(d):
				return time.Since(start).Milliseconds(), nil
			case <-ctx.Done():
				return nil, ctx.Err()
			}
		}})
		c := begin(t, Options{Methods: methods, Limits: Limits{Workers: 1}})
		c.initialize()
		for i, d := range []string{"100ms", "300ms", "200ms", "1ms"} {
			c.send(`{"jsonrpc":"2.0","id":%d,"method":"test/sleep","params":{"for":"%s"}}`, i, d)
		}
		c.in.Close()
		c.want(`{"jsonrpc":"2.0","id":0,"result":100}`)
		c.want(`{"jsonrpc":"2.0","id":1,"result":400}`)
		left := c.next() + c.next()
		for _, id := range []string{"2", "3"} {
			if !strings.Contains(left, `"id":`+id+`,"error":{"code":-32802,`) {
				t.Errorf("call %s was not given up: %s", id, left)
			}
		}
		c.ends(1)
		if d := time.Since(start); d < 500*time.Millisecond || d > 600*time.Millisecond {
			t.Errorf("the server took %v to end", d)
		}
	})
}

func TestEndOfInputWaitsForBackgroundWork(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		methods := append(Methods(), Method{Name: "test/publish", Notification: true, Handler: func(_ context.Context, call *Call) (any, error) {
			call.Session.Go("publish", func(context.Context) {
				time.Sleep(50 * time.Millisecond)
				call.Session.Notify("sheets/publishResults", map[string]int{"version": 3})
			})
			call.Session.Go("fault", func(context.Context) { panic("secret detail") })
			return nil, nil
		}})
		c := begin(t, Options{Methods: methods})
		c.initialize()
		c.send(`{"jsonrpc":"2.0","method":"test/publish"}`)
		c.in.Close()
		c.want(`{"jsonrpc":"2.0","method":"sheets/publishResults","params":{"version":3}}`)
		c.ends(1)
		if !strings.Contains(c.remarks.String(), "fault in fault: secret detail") {
			t.Errorf("remarks were: %s", c.remarks)
		}
	})
}

func TestPipedRequestsAreAllAnswered(t *testing.T) {
	for _, last := range []string{"", frame(`{"jsonrpc":"2.0","method":"exit"}`)} {
		for range 50 {
			c := begin(t, Options{})
			var b strings.Builder
			b.WriteString(frame(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{}}`))
			for i := range 40 {
				method := "test/echo"
				if i%2 == 1 {
					method = "test/long"
				}
				b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"method":"%s","params":{}}`, i, method)))
			}
			c.raw(b.String() + last)
			c.in.Close()
			c.wantPart(`"id":"start"`)
			answered := map[int]bool{}
			for range 40 {
				var id int
				m := c.next()
				if _, err := fmt.Sscanf(m, `{"jsonrpc":"2.0","id":%d,`, &id); err != nil || answered[id] {
					t.Fatalf("answered again, or nothing known: %s", m)
				}
				answered[id] = true
				given := strings.HasSuffix(m, `"result":{}}`)
				if stopped := strings.Contains(m, `"error":{"code":-32802,`); !given && (last == "" || !stopped) {
					t.Fatalf("got %s", m)
				}
			}
			c.ends(1)
		}
	}
}

func TestTheServerEndsWithItsClientsProcess(t *testing.T) {
	if alive(os.Getpid()) != true {
		t.Error("this process is said to be dead")
	}
	gone := exec.Command(os.Args[0], "-test.run=^$")
	if err := gone.Run(); err != nil {
		t.Fatal(err)
	}
	c := begin(t, Options{lookEvery: time.Millisecond})
	c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":%d}}`, os.Getpid())
	c.wantPart(`"id":1`)
	time.Sleep(20 * time.Millisecond)
	c.leave()

	c = begin(t, Options{lookEvery: time.Millisecond})
	c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":%d}}`, gone.Process.Pid)
	c.wantPart(`"id":1`)
	c.ends(1)
	if !strings.Contains(c.remarks.String(), "has ended") {
		t.Errorf("remarks were: %s", c.remarks)
	}
}

func TestABrokenOutputEndsTheServer(t *testing.T) {
	c := beginWith(t, Options{}, false)
	c.out.Close()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize"}`)
	select {
	case code := <-c.code:
		if code != 1 {
			t.Errorf("exit code %d", code)
		}
	case <-time.After(patience):
		t.Fatal("the server went on")
	}
	if !strings.Contains(c.remarks.String(), "takes no more output") {
		t.Errorf("remarks were: %s", c.remarks)
	}
}

func TestHalfAFrameAtTheEnd(t *testing.T) {
	for _, half := range []string{"Content-Len", "Content-Length: 50\r\n\r\n", "Content-Length: 50\r\n\r\n" + `{"jsonrpc"`} {
		c := begin(t, Options{})
		c.initialize()
		c.raw(half)
		c.in.Close()
		c.ends(1)
		if !strings.Contains(c.remarks.String(), "ended inside a message") {
			t.Errorf("after %q the remarks were: %s", half, c.remarks)
		}
	}
}

func TestTraceTellsOfEachReply(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","method":"$/setTrace","params":{"value":"loud"}}`)
	c.wantPart(`"method":"window/logMessage"`, `"type":2`, `$/setTrace was not done: value is \"loud\"; write \"off\", \"messages\" or \"verbose\"`)
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/echo"}`)
	c.want(`{"jsonrpc":"2.0","id":1,"result":null}`)
	c.send(`{"jsonrpc":"2.0","method":"$/setTrace","params":{"value":"messages"}}`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"test/echo"}`)
	c.want(`{"jsonrpc":"2.0","id":2,"result":null}`)
	c.wantPart(`"method":"$/logTrace"`, `test/echo (id 2) answered after`)
	c.send(`{"jsonrpc":"2.0","method":"$/setTrace","params":{"value":"verbose"}}`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"test/echo"}`)
	c.want(`{"jsonrpc":"2.0","id":2,"result":null}`)
	c.wantPart(`"method":"$/logTrace"`, `"verbose":"0 bytes of params, 38 bytes of reply"`)
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample","> mean"],["mean-interval","3; 5"],["mean-interval","5; 7"]]}]`)
	c.publication()
	c.wantPart(`"method":"$/logTrace"`, `sheets/publishResults of \"b\" published after`, `"verbose":"2 of 2 rows worked out anew"`)
	c.changeSheet("b", "Calculations", 0, `[{"at":"B3","rows":[["5; 8"]]}]`)
	c.publication()
	c.wantPart(`"verbose":"1 of 2 rows worked out anew"`)
	c.send(`{"jsonrpc":"2.0","method":"$/setTrace","params":{"value":"off"}}`)
	c.leave()
}

// LSP 3.17, initialize: until the reply to it has gone, no notification but a few
// named there may be sent, and $/logTrace is none of them.
func TestNothingIsTracedBeforeTheReplyToInitialize(t *testing.T) {
	c := begin(t, Options{})
	c.send(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"capabilities":{},"trace":"verbose"}}`)
	c.wantPart(`"id":1,"result"`)
	c.wantPart(`"method":"$/logTrace"`, `initialize (id 1) answered after`)
	c.leave()
}

func TestASessionSplitAnywhereIsTheSame(t *testing.T) {
	stream := frame(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{"capabilities":{}}}`) +
		frame(`{"jsonrpc":"2.0","id":"é","method":"test/numbers","params":{"values":[1.5,null]}}`) + "{bare}\n" +
		frame(`{"jsonrpc":"2.0","id":2,"method":"shutdown"}`) + frame(`{"jsonrpc":"2.0","method":"exit"}`)
	for at := range len(stream) {
		c := begin(t, Options{})
		c.raw(stream[:at])
		if at > 0 {
			time.Sleep(time.Microsecond) // lets the server come to the end of the piece
		}
		c.raw(stream[at:])
		c.wantPart(`"id":"start"`)
		c.want(`{"jsonrpc":"2.0","id":"é","result":[1.5,null]}`)
		c.wantPart(`"id":null`, `-32700`)
		c.want(`{"jsonrpc":"2.0","id":2,"result":null}`)
		c.ends(0)
	}
}

// FuzzServe sends anything: the server ends with its input, and its output
// holds nothing but frames with valid messages.
func FuzzServe(f *testing.F) {
	open := frame(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{}}`)
	for _, s := range []string{"", open, open + frame(`{"jsonrpc":"2.0","id":2,"method":"test/long","params":{"workDoneToken":1}}`) + frame(`{"jsonrpc":"2.0","method":"exit"}`),
		open + frame(`{"jsonrpc":"2.0","id":3,"method":"test/numbers","params":{"values":[1,null]}}`) + "x" + frame(`[]`), frame(`{"jsonrpc":"2.0","id":0,"result":{}}`)} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, stream []byte) {
		var out, errs lockedBuffer
		opts := Options{Methods: append(Methods(), testMethods()...), Limits: Limits{Drain: time.Millisecond, MessageBytes: 1 << 16}, lookEvery: time.Hour}
		if code := Serve(context.Background(), bytes.NewReader(stream), &out, &errs, opts); code != 0 && code != 1 {
			t.Fatalf("exit code %d", code)
		}
		got := framesOf(strings.NewReader(out.String()), Limits{})
		if last := got[len(got)-1]; last != "EOF" {
			t.Fatalf("the output ends with %s", last)
		}
		for _, body := range got[:len(got)-1] {
			if !json.Valid([]byte(body)) || !strings.HasPrefix(body, `{"jsonrpc":"2.0",`) && !strings.Contains(body, `"method":`) {
				t.Fatalf("the output holds %q", body)
			}
		}
	})
}
