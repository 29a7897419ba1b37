package rpc

import (
	"context"
	"fmt"
	"strings"
	"testing"
	"time"
)

// slowMethods has one method whose work should be quick and lasts until it is
// let go or given up.
func slowMethods(begun chan<- string, release <-chan bool) []Method {
	return append(Methods(), Method{Name: "test/soon", Handler: func(_ context.Context, call *Call) (any, error) {
		return call.soon("a kind", func(ctx context.Context) (any, error) {
			if string(call.Params) != "" {
				return "quick", nil
			}
			begun <- string(call.id)
			select {
			case <-release:
				return "slow", nil
			case <-ctx.Done():
				begun <- "given up " + string(call.id)
				return nil, ctx.Err()
			}
		})
	}})
}

func TestWorkThatTurnsOutLongHoldsNothingUp(t *testing.T) {
	begun, release := make(chan string, 100), make(chan bool)
	c := begin(t, Options{Methods: slowMethods(begun, release), Limits: Limits{Workers: 2, Queue: 3}, waitInTurn: 5 * time.Millisecond})
	c.initialize()
	for id := range 2 {
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"test/soon"}`, id)
		if got := <-begun; got != fmt.Sprint(id) {
			t.Fatalf("begun %s", got)
		}
	}
	// Two go on, as many as there are workers: the next of the kind wait their turn.
	time.Sleep(50 * time.Millisecond) // so that both workers wait for them
	for id := 2; id < 6; id++ {
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"test/soon"}`, id)
	}
	c.wantPart(`"id":5`, "-32802")
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":0}}`)
	c.wantPart(`"id":0`, "-32800")
	if a, b := <-begun, <-begun; a+b != "given up 02" && a+b != "2given up 0" {
		t.Errorf("after the cancel came %s and %s", a, b)
	}
	for range 4 {
		release <- true
	}
	answered := ""
	for range 4 {
		answered += c.wantPart(`"result":"slow"`)
	}
	for id := 1; id < 5; id++ {
		if strings.Count(answered, fmt.Sprintf(`"id":%d,`, id)) != 1 {
			t.Errorf("call %d: %s", id, answered)
		}
	}
	// The kind is taken in turn again.
	c.send(`{"jsonrpc":"2.0","id":9,"method":"test/soon","params":{}}`)
	c.want(`{"jsonrpc":"2.0","id":9,"result":"quick"}`)
	c.leave()
}

func TestAPanicInQuickWorkStopsItsCallAlone(t *testing.T) {
	methods := append(Methods(), Method{Name: "test/soon", Handler: func(_ context.Context, call *Call) (any, error) {
		return call.soon("a kind", func(context.Context) (any, error) { panic("secret detail") })
	}})
	c := begin(t, Options{Methods: methods})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"test/soon"}`)
	c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32603,"message":"` + internalFault + `"}}`)
	c.leave()
	if !strings.Contains(c.remarks.String(), "secret detail") {
		t.Errorf("remarks were: %s", c.remarks)
	}
}
