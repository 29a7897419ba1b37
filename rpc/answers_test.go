package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"halfwidth/funcs"
)

// endless draws as many values as one call may, which takes some half a second.
func endless() string {
	values := make([]string, 300)
	for i := range values {
		values[i] = fmt.Sprint(i * i % 97)
	}
	return fmt.Sprintf(`{"name":"bootstrap-interval","arguments":{"sample":[%s],"of":"median","resamples":100000}}`, strings.Join(values, ","))
}

const score = `{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}`

func TestALongCallIsCancelledWhileItWorks(t *testing.T) {
	c := begin(t, Options{Limits: Limits{Workers: 1}})
	c.initialize()
	for _, request := range []string{
		`"method":"functions/answer","params":` + endless(),
		`"method":"functions/answerMany","params":{"calls":[` + score + "," + endless() + "," + score + `]}`,
	} {
		c.send(`{"jsonrpc":"2.0","id":"long",%s}`, request)
		// A quick call does not wait for the long one.
		c.send(`{"jsonrpc":"2.0","id":"quick","method":"functions/answer","params":%s}`, score)
		c.wantPart(`"id":"quick","result":{"function":"standard-score","status":"ok"`)
		time.Sleep(20 * time.Millisecond) // so that the long one has begun
		start := time.Now()
		c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":"long"}}`)
		c.want(`{"jsonrpc":"2.0","id":"long","error":{"code":-32800,"message":"The client cancelled this call."}}`)
		// The only worker is free again only where the draws have stopped.
		c.send(`{"jsonrpc":"2.0","id":"next","method":"functions/answerMany","params":{"calls":[%s]}}`, score)
		c.wantPart(`"id":"next","result":[{"outcome":`)
		if d := time.Since(start); d > patience/2 {
			t.Errorf("the work went on for %v after it was cancelled", d)
		}
	}
	c.leave()
}

func TestProgressEndsBeforeTheReply(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answerMany","params":{"calls":[%s,%s],"workDoneToken":"t"}}`, score, endless())
	c.wantPart(`"kind":"begin"`)
	time.Sleep(20 * time.Millisecond)
	c.send(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":1}}`)
	c.want(`{"jsonrpc":"2.0","method":"$/progress","params":{"token":"t","value":{"kind":"end"}}}`)
	c.wantPart(`"id":1`, `-32800`)
	c.leave()

	// Calls that last: reports rise between begin and end.
	slow := `{"name":"bootstrap-interval","arguments":{"sample":[1,2,4,8,16,32],"resamples":100000}}`
	c = begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answerMany","params":{"calls":[%s],"workDoneToken":"t"}}`, strings.Repeat(slow+",", 19)+slow)
	c.wantPart(`"kind":"begin"`)
	last, reports := 0, 0
	for {
		m := c.next()
		if strings.Contains(m, `"kind":"end"`) {
			break
		}
		var report struct {
			Params struct{ Value struct{ Percentage int } }
		}
		if err := json.Unmarshal([]byte(m), &report); err != nil || !strings.Contains(m, `"kind":"report"`) || report.Params.Value.Percentage < last {
			t.Fatalf("got %s after %d%%", m, last)
		}
		last, reports = report.Params.Value.Percentage, reports+1
	}
	if r := c.reply(); string(r.ID) != "1" || r.Error != nil || reports == 0 {
		t.Errorf("%d reports, %+v", reports, r.Error)
	}
	c.leave()
}

func TestAQuestionSplitAnywhereIsTheSame(t *testing.T) {
	open := frame(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{}}`)
	question := frame(`{"jsonrpc":"2.0","id":"é","method":"functions/answer","params":{"name":"normal-transform","arguments":{"mean":1.5,"sd":2e0,"add":"3"}}}`)
	var want string
	for at := range len(question) {
		c := begin(t, Options{})
		c.raw(open + question[:at])
		if at > 0 {
			time.Sleep(time.Microsecond)
		}
		c.raw(question[at:])
		c.wantPart(`"id":"start"`)
		if want == "" {
			want = c.wantPart(`"id":"é"`, `"mean":4.5`)
		} else {
			c.want(want)
		}
		c.in.Close()
		c.ends(1)
	}
}

func TestTenThousandQuestionsInARow(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	go func() {
		var b strings.Builder
		for i := range 10_000 {
			b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"standard-score","arguments":{"value":%d,"mean":0,"sd":4}}}`, i, i)))
		}
		io.WriteString(c.in, b.String())
	}()
	answered := map[int]bool{}
	for range 10_000 { // in their order, unless one was held up
		var id int
		m := c.next()
		if _, err := fmt.Sscanf(m, `{"jsonrpc":"2.0","id":%d,`, &id); err != nil || answered[id] {
			t.Fatalf("answered twice, or nothing known: %s", m)
		}
		answered[id] = true
		if want := fmt.Sprintf(`"result":{"function":"standard-score","status":"ok","results":{"score":%s,`, appendNumber(nil, float64(id)/4)); !strings.Contains(m, want) {
			t.Fatalf("got %s\nwhich lacks %s", m, want)
		}
	}
	c.leave()
}

// Quick and long, right and wrong, one and many, cancelled or not: each is
// answered once, and the same question always alike.
func TestQuestionsOfAllKindsMixed(t *testing.T) {
	quick := []string{score, `{"name":"mean-interval","arguments":{"sample":[12.1,11.8,12.6,12.0,12.4]}}`, `{"name":"mean-interval","arguments":{"sample":[5,5]}}`,
		`{"name":"equal-spread-test","arguments":{"samples":{"North":[1,2,4],"Quay":[2,4,9]}}}`, `{"name":"adjusted-p-values","arguments":{"p-values":[0.01,0.02,null,0.5]}}`}
	wrong := []string{`{"name":"mean-interval","arguments":{"sampel":[1]}}`, `{"name":"no-such","arguments":{}}`, `{"arguments":{}}`, `{"name":"mean-interval","arguments":{"sample":"a in b"}}`}
	long := []string{`{"name":"bootstrap-interval","arguments":{"sample":[1,2,4,8,16,32],"resamples":2000}}`,
		`{"name":"mean-interval","arguments":{"sample":[` + strings.Repeat("1,2,4,", 1000) + `8]}}`, `{"name":"mean-test-size","arguments":{"sd":1,"difference":0.5}}`}
	pick := func(random *rand.Rand, list []string) string { return list[random.IntN(len(list))] }
	random := rand.New(rand.NewPCG(3, 9))
	c := begin(t, Options{Limits: Limits{Queue: 2000}})
	c.initialize()
	var b strings.Builder
	kinds := map[string]string{} // the request of each id
	for i := range 1500 {
		var params string
		method := "functions/answer"
		switch random.IntN(6) {
		case 0, 1:
			params = pick(random, quick)
		case 2:
			params = pick(random, wrong)
		case 3:
			params = pick(random, long)
		case 4:
			method, params = "functions/answerMany", `{"calls":[`+pick(random, quick)+","+pick(random, wrong)+","+pick(random, long)+`]}`
		case 5:
			method, params = "functions/describe", fmt.Sprintf(`{"name":%q}`, funcs.All()[random.IntN(len(funcs.All()))].Name)
		}
		request := fmt.Sprintf(`"method":%q,"params":%s`, method, params)
		kinds[fmt.Sprint(i)] = request
		b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,%s}`, i, request)))
		if random.IntN(10) == 0 {
			b.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":%d}}`, i)))
		}
	}
	go io.WriteString(c.in, b.String())
	answers := map[string]string{}
	for range 1500 {
		m := c.next()
		id, answer, _ := strings.Cut(strings.TrimPrefix(m, `{"jsonrpc":"2.0","id":`), ",")
		request, known := kinds[id]
		if !known {
			t.Fatalf("not asked, or answered twice: %s", m)
		}
		delete(kinds, id)
		if strings.Contains(answer, `"code":-32800`) {
			continue
		}
		if before, ok := answers[request]; ok && before != answer {
			t.Fatalf("%s was answered by\n%s\nand by\n%s", request, before, answer)
		}
		answers[request] = answer
	}
	c.leave()
}

func BenchmarkAnswers(b *testing.B) {
	values := make(Series, 1_000_000)
	random := rand.New(rand.NewPCG(1, 1))
	for i := range values {
		values[i] = 12 + 3*random.NormFloat64()
	}
	list, _ := json.Marshal(values)
	for _, bench := range []struct{ name, params string }{
		{"summary", `{"name":"mean-interval","arguments":{"mean":12.5,"sd":3.25,"n":40}}`},
		{"five values", `{"name":"mean-interval","arguments":{"sample":[12.1,11.8,12.6,12.0,12.4]}}`},
		{"a million values", fmt.Sprintf(`{"name":"mean-interval","arguments":{"sample":%s,"checks":false}}`, list)},
		{"a million packed", fmt.Sprintf(`{"name":"mean-interval","arguments":{"sample":%s,"checks":false}}`, packed(values...))},
	} {
		b.Run(bench.name, func(b *testing.B) {
			c := begin(b, Options{})
			c.initialize()
			request := frame(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":` + bench.params + `}`)
			b.SetBytes(int64(len(request)))
			b.ReportAllocs()
			for b.Loop() {
				c.raw(request)
				c.wantPart(`"status":"ok"`)
			}
			c.leave()
		})
	}
}

// The same without a client that takes turns with the server.
func BenchmarkAnswersInARow(b *testing.B) {
	one := frame(`{"jsonrpc":"2.0","id":12,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"mean":12.5,"sd":3.25,"n":40}}}`)
	in := frame(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{}}`) + strings.Repeat(one, b.N)
	b.ReportAllocs()
	b.ResetTimer()
	Serve(context.Background(), strings.NewReader(in), io.Discard, io.Discard, Options{})
}
