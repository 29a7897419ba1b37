package rpc

import (
	"context"
	"fmt"
	"io"
	"strings"
	"testing"
)

func TestCancelWhileRunning(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	for _, id := range []string{`7`, `-7`, `"7"`, `7.5`, `"\u0061/b"`} {
		c.send(`{"jsonrpc":"2.0","id":%s,"method":"test/wait"}`, id)
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%s}}`, strings.Replace(id, `\u0061`, "a", 1))
		c.want(`{"jsonrpc":"2.0","id":` + id + `,"error":{"code":-32800,"message":"The client cancelled this call."}}`)
	}
	// An answered, an unknown and a faulty id: no reply, no harm.
	for _, id := range []string{`7`, `8`, `null`, `{}`, `[`} {
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%s}}`, id)
	}
	c.wantPart(`"method":"window/logMessage"`, "names no id")
	c.wantPart(`"id":null`, `-32700`)
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest"}`)
	c.wantPart(`"method":"window/logMessage"`, "names no id")
	c.leave()
}

func TestCancelWhileQueuedRunsNothing(t *testing.T) {
	ran := make(chan string, 10)
	release := make(chan bool)
	methods := append(Methods(), Method{Name: "test/mark", Long: true, Handler: func(_ context.Context, call *Call) (any, error) {
		ran <- string(call.Params)
		<-release
		return true, nil
	}})
	c := begin(t, Options{Methods: methods, Limits: Limits{Workers: 1, Queue: 2}})
	c.initialize()
	for i := 1; i <= 3; i++ {
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"test/mark","params":{"i":%d}}`, i, i)
		if i == 1 {
			<-ran
		}
	}
	c.send(`{"jsonrpc":"2.0","id":4,"method":"test/mark"}`)
	c.want(`{"jsonrpc":"2.0","id":4,"error":{"code":-32802,"message":"2 long calls are waiting already; send this one again when some have been answered."}}`)
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":2}}`)
	c.wantPart(`"id":2`, `-32800`)
	c.send(`{"jsonrpc":"2.0","id":5,"method":"test/mark","params":{"i":5}}`)
	close(release)
	c.want(`{"jsonrpc":"2.0","id":1,"result":true}`)
	c.want(`{"jsonrpc":"2.0","id":3,"result":true}`)
	c.want(`{"jsonrpc":"2.0","id":5,"result":true}`)
	if a, b := <-ran, <-ran; a != `{"i":3}` || b != `{"i":5}` {
		t.Errorf("ran %s and %s", a, b)
	}
	c.leave()
}

func TestTheQueueIsBoundedByBytesToo(t *testing.T) {
	c := begin(t, Options{Limits: Limits{Workers: 1, QueueBytes: 1000}})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/wait"}`)
	text := strings.Repeat("x", 600)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"test/wait","params":{"text":"%s"}}`, text)
	c.send(`{"jsonrpc":"2.0","id":3,"method":"test/wait","params":{"text":"%s"}}`, text)
	c.wantPart(`"id":3`, `-32802`)
	for id := 1; id <= 2; id++ {
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%d}}`, id)
		c.wantPart(fmt.Sprintf(`"id":%d`, id), `-32800`)
	}
	c.leave()
}

func TestAnIdInFlightIsRefusedToOthers(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":"a","method":"test/wait"}`)
	for _, method := range []string{"test/wait", "test/echo", "no/such"} {
		c.send(`{"jsonrpc":"2.0","id":"\u0061","method":"%s"}`, method)
		c.want(`{"jsonrpc":"2.0","id":null,"error":{"code":-32600,"message":"The id \"\\u0061\" belongs to a request that has not been answered yet; give each request an id of its own."}}`)
	}
	c.send(`{"jsonrpc":"2.0","id":null,"method":"test/wait"}`)
	c.send(`{"jsonrpc":"2.0","id":null,"method":"test/echo","params":{}}`)
	c.want(`{"jsonrpc":"2.0","id":null,"result":{}}`)
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":"a"}}`)
	c.wantPart(`"id":"a"`, `-32800`)
	c.send(`{"jsonrpc":"2.0","id":"a","method":"test/echo","params":{}}`)
	c.want(`{"jsonrpc":"2.0","id":"a","result":{}}`)
	c.send(`{"jsonrpc":"2.0","method":"exit"}`)
	c.want(`{"jsonrpc":"2.0","id":null,"error":{"code":-32802,"message":"The server is ending; the call was given up."}}`)
	c.ends(1)
}

func TestAQuickCallIsAnsweredBesideLongOnes(t *testing.T) {
	c := begin(t, Options{Limits: Limits{Workers: 2}})
	c.initialize()
	for i := range 5 {
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"test/wait"}`, i)
	}
	c.send(`{"jsonrpc":"2.0","id":"quick","method":"test/echo","params":{}}`)
	c.want(`{"jsonrpc":"2.0","id":"quick","result":{}}`)
	for i := range 5 {
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%d}}`, i)
		c.wantPart(fmt.Sprintf(`"id":%d`, i), `-32800`)
	}
	c.leave()
}

func TestTheClientCanBeAskedAndTold(t *testing.T) {
	answers := make(chan string, 1)
	methods := append(Methods(), Method{Name: "test/ask", Long: true, Handler: func(ctx context.Context, call *Call) (any, error) {
		call.Session.LogMessage(LogInfo, "a <b> & c")
		var reply struct{ Title string }
		err := call.Session.Ask(ctx, "window/showMessageRequest", map[string]string{"message": "which?"}, &reply)
		answers <- fmt.Sprintf("%s %v", reply.Title, err)
		return reply.Title, err
	}})
	c := begin(t, Options{Methods: methods})
	c.initialize()
	ask := func() {
		c.send(`{"jsonrpc":"2.0","id":1,"method":"test/ask"}`)
		c.wantPart(`"method":"window/logMessage"`, `"type":3`)
	}
	ask()
	c.wantPart(`"method":"window/showMessageRequest"`, `"id":0`)
	for _, foreign := range []string{`{"jsonrpc":"2.0","id":99,"result":1}`, `{"jsonrpc":"2.0","id":-1,"result":1}`, `{"jsonrpc":"2.0","id":"x","result":1}`,
		`{"jsonrpc":"2.0","result":1}`, `{"jsonrpc":"2.0","id":0,"result":1,"error":{"code":1,"message":""}}`, `{"jsonrpc":"2.0","id":98,"error":7}`} {
		c.send("%s", foreign)
	}
	c.send(`{"jsonrpc":"2.0","id":0,"result":{"Title":"North"}}`)
	c.want(`{"jsonrpc":"2.0","id":1,"result":"North"}`)
	if got := <-answers; got != "North <nil>" {
		t.Errorf("the handler got %s", got)
	}
	ask()
	c.wantPart(`"method":"window/showMessageRequest"`, `"id":1`)
	c.send(`{"jsonrpc":"2.0","id":1,"error":{"code":-32601,"message":"no windows here"}}`)
	c.wantPart(`"id":1`, `"code":-32803`, `no windows here`)
	if got := <-answers; !strings.Contains(got, "no windows here") {
		t.Errorf("the handler got %s", got)
	}
	ask()
	c.wantPart(`"method":"window/showMessageRequest"`, `"id":2`)
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":1}}`)
	c.wantPart(`"id":1`, `-32800`)
	if got := <-answers; !strings.Contains(got, context.Canceled.Error()) {
		t.Errorf("the handler got %s", got)
	}
	c.leave()
}

func BenchmarkQuickCalls(b *testing.B) {
	methods := append(Methods(), testMethods()...)
	one := frame(`{"jsonrpc":"2.0","id":12,"method":"test/echo","params":{"name":"mean-interval","arguments":{"mean":12.5,"sd":3.25,"n":40}}}`)
	in := frame(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{}}`) + strings.Repeat(one, b.N)
	b.ReportAllocs()
	b.ResetTimer()
	Serve(context.Background(), strings.NewReader(in), io.Discard, io.Discard, Options{Methods: methods})
}
