package rpc

import (
	"context"
	"encoding/json"
	"strings"
	"testing"
	"time"
)

// A reply that cannot be read as it stands comes to an end all the same, where it
// can be told what it replies to.
func TestRepliesOfEveryForm(t *testing.T) {
	for _, test := range []struct{ reply, logged string }{
		{`"result":{"applied":true}`, ""},
		{`"result":{"applied":true},"error":null`, ""},
		{`"result":{"applied":false}`, "the client did not make the edit"},
		{`"result":{"applied":false,"failureReason":"busy"}`, "the client did not make the edit: busy"},
		{`"result":[1]`, "the client refused the edit: its answer is a list"},
		{`"error":{"code":-32601,"message":"no"}`, "the client refused the edit: no"},
		{`"error":{"code":-32601,"message":"no"},"result":null`, "the client refused the edit: no"},
		{`"error":"no"`, "the client refused the edit: the client's error has no whole code and no text"},
		{`"error":{"code":"x","message":5}`, "the client refused the edit: the client's error has no whole code and no text"},
	} {
		t.Run(test.reply, func(t *testing.T) {
			e := newTextEditor(t, `{"workspace":{"applyEdit":true}}`, "", nil)
			e.silent = true
			e.open("a.calculations.csv", "minutes\n")
			e.send(`{"jsonrpc":"2.0","id":"e","method":"workspace/executeCommand","params":{"command":"halfwidth.edit","arguments":[{"uri":%q,"title":"Mend","edits":[{"range":{},"newText":"x"}]}]}}`,
				e.uri("a.calculations.csv"))
			for deadline := time.Now().Add(patience); len(e.asked) == 0; e.take() {
				if time.Now().After(deadline) {
					t.Fatal("the server asks nothing")
				}
			}
			e.send(`{"jsonrpc":"2.0","id":0,%s}`, test.reply)
			if test.logged != "" {
				var m struct{ Method, Params json.RawMessage }
				for deadline := time.Now().Add(patience); !strings.Contains(string(m.Method), "logMessage"); {
					if err := json.Unmarshal([]byte(e.next()), &m); err != nil || time.Now().After(deadline) {
						t.Fatalf("nothing is logged (%v)", err)
					}
				}
				if want := `"Mend: ` + test.logged + `"`; !strings.Contains(string(m.Params), want) {
					t.Errorf("logged is %s, want %s", m.Params, want)
				}
			}
			e.in.Close()
			for m := range e.messages {
				if strings.Contains(m, "logMessage") {
					t.Errorf("one line too many: %s", m)
				}
			}
			e.ends(1)
			if strings.Contains(e.remarks.String(), "passed over") {
				t.Errorf("remarks: %s", e.remarks)
			}
		})
	}
}

// A client that never replies is asked no more after a while, and again once it
// has replied.
func TestAClientThatNeverRepliesIsAskedNoMore(t *testing.T) {
	methods := append(Methods(), Method{Name: "test/tell", Handler: func(_ context.Context, call *Call) (any, error) {
		call.Session.tell("workspace/codeLens/refresh", nil)
		return nil, nil
	}})
	c := begin(t, Options{Methods: methods})
	c.initialize()
	asked := 0
	tell := func() {
		c.send(`{"jsonrpc":"2.0","id":"t","method":"test/tell"}`)
		for m := c.next(); !strings.Contains(m, `"id":"t"`); m = c.next() {
			asked++
		}
	}
	for range 2 * mostUnheard {
		tell()
	}
	for ; asked < mostUnheard; asked++ { // the calls leave from goroutines of their own
		c.wantPart("workspace/codeLens/refresh")
	}
	c.send(`{"jsonrpc":"2.0","id":0,"result":null}`)
	for deadline := time.Now().Add(patience); asked == mostUnheard; time.Sleep(time.Millisecond) {
		if tell(); time.Now().After(deadline) {
			t.Fatal("after a reply nothing more is asked")
		}
	}
	if asked > mostUnheard+1 {
		t.Errorf("%d calls were sent", asked)
	}
	c.leave()
}
