package rpc

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"sync"
	"testing"
	"time"
)

func unfailing(t *testing.T) func(error) {
	return func(err error) { t.Errorf("the writer failed: %v", err) }
}

func TestFramesOfManyGoroutinesStayWhole(t *testing.T) {
	for _, ready := range []func() bool{nil, func() bool { return true }, alternately()} {
		var out lockedBuffer
		w := newFrameWriter(&out, ready, unfailing(t))
		var group sync.WaitGroup
		for g := range 8 {
			group.Go(func() {
				for i := range 500 {
					body := fmt.Appendf(nil, `{"g":%d,"i":%d,"text":"%s"}`, g, i, strings.Repeat("x", i*g))
					if i%3 == 0 {
						_ = w.gather(body)
					} else {
						_ = w.send(body)
					}
				}
			})
		}
		group.Wait()
		w.flush()
		w.close(patience)
		got := framesOf(strings.NewReader(out.String()), Limits{})
		if len(got) != 4001 || got[4000] != "EOF" {
			t.Fatalf("%d frames came out whole", len(got)-1)
		}
		next := [8]int{}
		for _, body := range got[:4000] {
			var g, i int
			if n, _ := fmt.Sscanf(body, `{"g":%d,"i":%d,`, &g, &i); n != 2 || i != next[g] {
				t.Fatalf("%.60s out of turn", body)
			}
			next[g]++
		}
	}
}

func alternately() func() bool {
	var mu sync.Mutex
	n := 0
	return func() bool {
		mu.Lock()
		defer mu.Unlock()
		n++
		return n%2 == 0
	}
}

func TestGatheredFramesLeaveTogether(t *testing.T) {
	var out countingWriter
	w := newFrameWriter(&out, func() bool { return true }, unfailing(t))
	for range 10 {
		_ = w.gather([]byte("{}"))
	}
	if out.calls != 0 {
		t.Error("gathered frames left before the flush")
	}
	w.flush()
	if out.calls != 1 || out.Len() != 10*len(frame("{}")) {
		t.Errorf("%d bytes left in %d writes", out.Len(), out.calls)
	}
	w.close(patience)
	if err := w.send([]byte("{}")); !errors.Is(err, errOutputClosed) {
		t.Errorf("a closed writer says %v", err)
	}
}

type countingWriter struct {
	bytes.Buffer
	calls int
}

func (c *countingWriter) Write(p []byte) (int, error) {
	c.calls++
	return c.Buffer.Write(p)
}

func TestAFailedWriteIsToldOnce(t *testing.T) {
	for _, out := range []io.Writer{failing{}, silent{}} {
		told := make(chan error, 10)
		w := newFrameWriter(out, nil, func(err error) { told <- err })
		_ = w.send([]byte("{}"))
		if err := <-told; err == nil {
			t.Error("no error was told")
		}
		if err := w.send([]byte("{}")); err == nil {
			t.Error("a broken writer took a frame")
		}
		w.waitRoom(0)
		w.close(patience)
		if len(told) != 0 {
			t.Errorf("told again: %v", <-told)
		}
	}
}

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, errors.New("broken") }

type silent struct{}

func (silent) Write([]byte) (int, error) { return 0, nil }

func TestCloseGivesUpOnAClientThatDoesNotRead(t *testing.T) {
	_, out := io.Pipe()
	w := newFrameWriter(out, nil, func(error) {})
	_ = w.send([]byte("{}"))
	start := time.Now()
	w.close(20 * time.Millisecond)
	if d := time.Since(start); d > 5*time.Second {
		t.Errorf("close waited %v", d)
	}
	out.Close()
}

func TestAPipeSaysWhetherItTakesAPage(t *testing.T) {
	r, w, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	defer w.Close()
	ready := writableNow(w)
	if ready == nil {
		if writableNow(io.Discard) != nil {
			t.Error("a stream that is no file claims to know")
		}
		return // asked on Linux only
	}
	if !ready() {
		t.Fatal("an empty pipe takes nothing")
	}
	page := make([]byte, atOnce)
	for pages := 0; ready(); pages++ {
		if pages > 10_000 {
			t.Fatal("a pipe that nobody reads always takes more")
		}
		if _, err := w.Write(page); err != nil { // blocks for good if ready lies
			t.Fatal(err)
		}
	}
	if _, err := io.ReadFull(r, make([]byte, 16*atOnce)); err != nil {
		t.Fatal(err)
	}
	if !ready() {
		t.Error("a pipe with room takes nothing")
	}
}

func TestRemarksNeverWait(t *testing.T) {
	in, out := io.Pipe() // nobody reads
	r := newRemarks(out)
	for i := range 2000 {
		r.say("line %d", i)
	}
	start := time.Now()
	r.close()
	if d := time.Since(start); d > 5*time.Second {
		t.Errorf("close waited %v", d)
	}
	in.Close()

	var text lockedBuffer
	r = newRemarks(&text)
	r.say("two\nlines and %d", 7)
	r.trace("a fault", []byte("one\ntwo\n"))
	r.close()
	if want := "halfwidth-server: two lines and 7\nhalfwidth-server: a fault\n    one\n    two\n"; text.String() != want {
		t.Errorf("got %q, want %q", text.String(), want)
	}
	if r.dropped.Load() != 0 {
		t.Error("lines were dropped with room for them")
	}
}
