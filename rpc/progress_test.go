package rpc

import (
	"context"
	"fmt"
	"strings"
	"testing"
	"testing/synctest"
	"time"
)

// steps is a long method that reports a thousand steps, one each 5 ms.
func steps(_ context.Context, call *Call) (any, error) {
	progress := call.Progress("counting parcels")
	return Later(func(ctx context.Context) (any, error) {
		for i := range 1000 {
			if ctx.Err() != nil {
				time.Sleep(time.Second) // reports go on after the cancel has been answered
				progress.Report(1000, 1000, "too late")
				call.Progress("again").Report(1, 1, "too late")
				return nil, ctx.Err()
			}
			progress.Report(i, 1000, "")
			time.Sleep(5 * time.Millisecond)
		}
		progress.Report(10, 1000, "a falling share")
		return "done", nil
	})
}

func TestProgressHasABeginAtMostTenReportsASecondAndAnEnd(t *testing.T) {
	for _, token := range []string{`"t"`, `7`} {
		synctest.Test(t, func(t *testing.T) {
			c := begin(t, Options{Methods: append(Methods(), Method{Name: "test/steps", Handler: steps})})
			c.initialize()
			c.send(`{"jsonrpc":"2.0","id":1,"method":"test/steps","params":{"workDoneToken":%s}}`, token)
			c.want(`{"jsonrpc":"2.0","method":"$/progress","params":{"token":` + token + `,"value":{"cancellable":true,"kind":"begin","percentage":0,"title":"counting parcels"}}}`)
			reports, last := 0, 0
			for {
				m := c.next()
				var percent int
				if n, _ := fmt.Sscanf(m, `{"jsonrpc":"2.0","method":"$/progress","params":{"token":`+token+`,"value":{"kind":"report","percentage":%d}}}`, &percent); n == 1 {
					reports++
					if percent < last || percent > 100 {
						t.Errorf("%d %% follows on %d %%", percent, last)
					}
					last = percent
					continue
				}
				if strings.Contains(m, "a falling share") && strings.Contains(m, fmt.Sprintf(`"percentage":%d}`, last)) {
					m = c.next()
				}
				if want := `{"jsonrpc":"2.0","method":"$/progress","params":{"token":` + token + `,"value":{"kind":"end"}}}`; m != want {
					t.Errorf("got  %s\nwant %s", m, want)
				}
				break
			}
			c.want(`{"jsonrpc":"2.0","id":1,"result":"done"}`)
			if reports < 45 || reports > 50 { // five seconds
				t.Errorf("%d reports in 5 s", reports)
			}
			c.leave()
		})
	}
}

func TestProgressOfACancelledCallEndsBeforeItsReply(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := begin(t, Options{Methods: append(Methods(), Method{Name: "test/steps", Handler: steps})})
		c.initialize()
		c.send(`{"jsonrpc":"2.0","id":1,"method":"test/steps","params":{"workDoneToken":"t"}}`)
		c.wantPart(`"kind":"begin"`)
		c.wantPart(`"kind":"report"`)
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":1}}`)
		c.wantPart(`"kind":"end"`)
		c.wantPart(`"id":1`, `-32800`)
		time.Sleep(3 * time.Second)
		c.leave() // which finds no message left
	})
}

func TestNoProgressWithoutAToken(t *testing.T) {
	quick := Method{Name: "test/quick", Handler: func(_ context.Context, call *Call) (any, error) {
		call.Progress("nothing").Report(1, 2, "")
		return true, nil
	}}
	notice := Method{Name: "test/notice", Notification: true, Handler: quick.Handler}
	c := begin(t, Options{Methods: append(Methods(), quick, notice)})
	c.initialize()
	for _, params := range []string{`{}`, `{"workDoneToken":null}`, `{"workDoneToken":{}}`, `[]`, `null`, `{"inner":{"workDoneToken":1}}`} {
		c.send(`{"jsonrpc":"2.0","id":1,"method":"test/quick","params":%s}`, params)
		c.want(`{"jsonrpc":"2.0","id":1,"result":true}`)
	}
	c.send(`{"jsonrpc":"2.0","method":"test/notice","params":{"workDoneToken":1}}`)
	c.leave()
}
