package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
	"time"
)

// Whatever a client does, and whenever it leaves, no call is answered twice, and
// none that came before the end is left out. The work in turn lasts about as long
// as messages wait for it, so that either may come first.
func TestEveryCallIsAnsweredOnceHoweverTheSessionEnds(t *testing.T) {
	seeds := uint64(25)
	if testing.Short() {
		seeds = 5
	}
	for seed := range seeds {
		for _, end := range []string{"exit", "shutdown", "end of input", "stop"} {
			t.Run(fmt.Sprintf("%s %d", end, seed), func(t *testing.T) { endAtRandom(t, rand.New(rand.NewPCG(seed, 1)), end) })
		}
	}
}

func endAtRandom(t *testing.T, r *rand.Rand, end string) {
	const most = 200 * time.Microsecond
	opts := Options{waitInTurn: time.Duration(1 + r.Int64N(int64(most))),
		Limits: Limits{Workers: 1 + r.IntN(3), Queue: 1 + r.IntN(50), Drain: time.Duration(1 + r.Int64N(int64(20*time.Millisecond)))}}
	opts.Methods = append(append(Methods(), testMethods()...), Method{Name: "test/soon", Handler: func(_ context.Context, call *Call) (any, error) {
		var p struct {
			Lasts time.Duration
			Heeds bool
		}
		if err := json.Unmarshal(call.Params, &p); err != nil {
			return nil, err
		}
		return call.soon(string(call.Params), func(ctx context.Context) (any, error) {
			for end := time.Now().Add(p.Lasts); time.Now().Before(end); {
				if p.Heeds && ctx.Err() != nil {
					return nil, ctx.Err()
				}
			}
			return "done", nil
		})
	}})
	c := begin(t, opts)
	c.initialize()
	sent, count, code := map[string]int{}, 1+r.IntN(100), 1
	stopBefore := -1
	if end == "stop" {
		stopBefore = r.IntN(count)
	}
	var gathered strings.Builder
	write := func() { _, _ = c.in.Write([]byte(gathered.String())); gathered.Reset() } // it fails once the server has stopped
	for i := range count {
		if i == stopBefore {
			go c.stop()
		}
		id := max(1, i-r.IntN(20)/19) // now and then that of the call before
		message := ""
		switch r.IntN(6) {
		case 0:
			gathered.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%d}}`, i-1)))
			continue
		case 1:
			message = `"method":"functions/answerMany","params":{"workDoneToken":1,"calls":[{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}]}`
		case 2:
			message = `"method":"test/wait"`
		default:
			message = fmt.Sprintf(`"method":"test/soon","params":{"lasts":%d,"heeds":%v}`, r.Int64N(3)*int64(most), r.IntN(2) == 0)
		}
		sent[fmt.Sprint(id)]++
		gathered.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,%s}`, id, message)))
		if r.IntN(3) == 0 {
			write()
		}
	}
	switch end {
	case "shutdown":
		gathered.WriteString(frame(`{"jsonrpc":"2.0","id":"bye","method":"shutdown"}`))
		sent[`"bye"`]++
		code = 0
		fallthrough
	case "exit":
		gathered.WriteString(frame(`{"jsonrpc":"2.0","method":"exit"}`))
	}
	write()
	if end == "end of input" {
		c.in.Close()
	}
	answered := map[string]int{}
	for m := range c.messages {
		var reply struct {
			ID     json.RawMessage
			Method string
		}
		if err := json.Unmarshal([]byte(m), &reply); err != nil {
			t.Fatal(err)
		}
		if reply.Method == "" {
			answered[string(reply.ID)]++
		}
	}
	c.ends(code)
	refused := answered["null"] // an id of a call that was not answered yet
	for id, n := range sent {
		if answered[id] > n {
			t.Errorf("%d calls had the id %s, and %d answers", n, id, answered[id])
		}
		refused -= n - answered[id]
	}
	if refused != 0 && end != "stop" || refused > 0 {
		t.Errorf("%d answers too many (negative: too few)", refused)
	}
}

// A session that is ended from outside answers the call that is worked on in turn.
func TestAStopAnswersTheWorkInTurn(t *testing.T) {
	begun, release := make(chan bool), make(chan bool)
	methods := append(Methods(), Method{Name: "test/soon", Handler: func(_ context.Context, call *Call) (any, error) {
		return call.soon("a kind", func(context.Context) (any, error) { // heeds no cancel
			begun <- true
			<-release
			return "too late", nil
		})
	}})
	c := begin(t, Options{Methods: methods, waitInTurn: time.Hour})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/soon"}`)
	<-begun
	c.stop()
	c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32802,"message":"The server is ending; the call was given up."}}`)
	c.ends(1)
	release <- true
}

// A request that is handled while another goroutine ends the session does not
// bring it back to life.
func TestAnEndedSessionStaysEnded(t *testing.T) {
	for _, late := range []Handler{shutdown, func(ctx context.Context, call *Call) (any, error) { return initialize(ctx, call, initializeParams{}) }} {
		ended := make(chan bool)
		c := begin(t, Options{Methods: append(Methods(), Method{Name: "test/late", When: Always, Handler: func(ctx context.Context, call *Call) (any, error) {
			call.Session.end("the test ends it")
			defer close(ended)
			return late(ctx, call)
		}})})
		c.send(`{"jsonrpc":"2.0","id":1,"method":"test/late"}`)
		<-ended
		c.in.Close()
		for range c.messages {
		}
		c.ends(1)
	}
}
