package rpc

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
)

// TestEveryMessageIsAnsweredOnce sends thousands of messages of every kind, in
// pieces of random length, and counts the answers: one to each request under
// its own id, one with id null to each message whose id cannot be told, none to
// notifications.
func TestEveryMessageIsAnsweredOnce(t *testing.T) {
	for seed := range uint64(4) {
		random := rand.New(rand.NewPCG(seed, 99))
		want := map[string]int{}
		var stream strings.Builder
		spoilt := false        // the last body was no JSON, so that bytes after it count as its rest
		for id := range 3000 { // four seeds: 12000 and more messages in all
			expect := func(id string, code string) { want[id+" "+code]++ }
			now := false
			send := func(format string, values ...any) { stream.WriteString(frame(fmt.Sprintf(format, values...))) }
			key := fmt.Sprint(id)
			switch random.IntN(23) {
			case 0:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/echo","params":{"x":[%d]}}`, id, random.Int())
				expect(key, "result")
			case 1:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/long","params":[]}`, id)
				expect(key, "result")
			case 2:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/panicLong"}`, id)
				expect(key, "-32603")
			case 3:
				send(`{"jsonrpc":"2.0","id":"%d","method":"no/such"}`, id)
				expect(`"`+key+`"`, "-32601")
			case 4:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/numbers","params":{"values":[1,"a"]}}`, id)
				expect(key, "-32602")
			case 5:
				send(`{"jsonrpc":"2.0","id":-%d.5,"method":"test/numbers","params":{"values":[%g,null]}}`, id, random.NormFloat64())
				expect("-"+key+".5", "result")
			case 6:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/echo","params":{]}`, id)
				expect("null", "-32700")
				now = true
			case 7:
				send(`[{"jsonrpc":"2.0","id":%d,"method":"test/echo"},{"jsonrpc":"2.0","id":%d,"method":"test/echo"}]`, id, id)
				expect("null", "-32600")
			case 8:
				send(`{"jsonrpc":"1.0","id":%d,"method":"test/echo"}`, id)
				expect(key, "-32600")
			case 9:
				send(`{"jsonrpc":"2.0","id":{"x":%d},"method":"test/echo"}`, id)
				expect("null", "-32600")
			case 10:
				send(`{"jsonrpc":"2.0","method":"test/set","params":{"value":%d}}`, id)
			case 11:
				send(`{"jsonrpc":"2.0","method":"test/unknown"}`)
			case 12:
				send(`{"jsonrpc":"2.0","id":%d,"method":"test/wait"}`, id)
				send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%d}}`, id)
				expect(key, "-32800")
			case 13:
				stream.WriteString("Content-Length: what\r\n\r\n{}")
				if expect("null", "-32700"); spoilt {
					want["null -32700"]--
				}
				now = true
			case 14:
				stream.WriteString(`{"bare":"JSON"}` + "\n")
				if expect("null", "-32700"); spoilt {
					want["null -32700"]--
				}
				now = true
			case 15:
				stream.WriteString(fmt.Sprintf("Content-Length: %d\r\n\r\n{\"cut\":", 100+random.IntN(1000)))
				if expect("null", "-32700"); spoilt {
					// The header after the fault is searched for, and this is one.
					spoilt = false
				}
				now = true
				// What follows has to be a header, else the body swallows it.
				id := fmt.Sprintf(`"after %d"`, id)
				send(`{"jsonrpc":"2.0","id":%s,"method":"test/echo"}`, id)
				expect(id, "result")
				now = false
			case 16:
				send(`{"jsonrpc":"2.0","id":null,"method":"test/echo"}`)
				expect("null", "result")
			case 18:
				send(`{"jsonrpc":"2.0","method":"sheets/didOpen","params":{"book":"held","sheet":"Trips","version":%d,"cells":[{"at":"A1","column":["minutes",%d,2]}]}}`, id, id)
				send(`{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"standard-score","arguments":{"value":1,"mean":"sum of minutes in Trips","sd":1},"book":"held"}}`, id)
				expect(key, "result")
			case 19:
				sheet := []string{"Trips", "Calculations"}[random.IntN(2)]
				send(`{"jsonrpc":"2.0","method":"sheets/didOpen","params":{"book":"b%d","sheet":%q,"version":1,"cells":[{"at":"A1","rows":[["work out","sample","> mean"],["mean-interval","1; 2; %d"]]}]}}`, random.IntN(4), sheet, id)
			case 20:
				send(`{"jsonrpc":"2.0","method":"sheets/didChange","params":{"book":"b%d","sheet":"Calculations","baseVersion":%d,"version":%d,"cells":[{"at":"B%d","rows":[[%d,"3; 4"]]},{"clear":"C7:D9"}]}}`,
					random.IntN(4), random.IntN(4), random.IntN(4), 1+random.IntN(4), id)
			case 21:
				send(`{"jsonrpc":"2.0","method":"sheets/didClose","params":{"book":"b%d"}}`, random.IntN(4))
			case 22:
				send(`{"jsonrpc":"2.0","id":%d,"method":"workbooks/fill","params":{"path":"Trips.xlsx"}}`, id)
				expect(key, "-32803")
			case 17:
				send(`{"jsonrpc":"2.0","id":%d,"result":"to no call"}`, id)
			}
			spoilt = now
		}
		// The queue must hold all the long calls: which of them would find it
		// full depends on the workers' speed.
		c := begin(t, Options{Limits: Limits{Queue: 3000}})
		c.initialize()
		left := &pieces{[]byte(stream.String()), func() int { return 1 + random.IntN(5000) }}
		go func() {
			b := make([]byte, 5000)
			for {
				n, err := left.Read(b)
				if err != nil {
					break
				}
				c.raw(string(b[:n]))
			}
			c.send(`{"jsonrpc":"2.0","id":"last","method":"test/echo"}`)
		}()
		total := 0
		for _, n := range want {
			total += n
		}
		for answers := 0; answers < total+1; {
			m := c.next()
			if strings.HasPrefix(m, `{"jsonrpc":"2.0","method":`) {
				continue // results, refusals and log messages
			}
			answers++
			id, rest, _ := strings.Cut(strings.TrimPrefix(m, `{"jsonrpc":"2.0","id":`), `,"`)
			kind := "result"
			if code, ok := strings.CutPrefix(rest, `error":{"code":`); ok {
				kind, _, _ = strings.Cut(code, ",")
			}
			if id == `"last"` {
				continue
			}
			if want[id+" "+kind]--; want[id+" "+kind] < 0 {
				t.Fatalf("seed %d: not wanted, or once too often: %.300s", seed, m)
			}
		}
		c.send(`{"jsonrpc":"2.0","id":"bye","method":"shutdown"}`)
		for !strings.Contains(c.next(), `"id":"bye","result":null`) {
		}
		c.send(`{"jsonrpc":"2.0","method":"exit"}`)
		c.ends(0)
	}
}
