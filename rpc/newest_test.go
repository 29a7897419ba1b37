package rpc

import (
	"context"
	"testing"
	"testing/synctest"
	"time"
)

// sent is a state whose results were sent, and when, from the first change on.
type sent struct {
	state int
	after time.Duration
}

// changing is a newest over numbers, whose work lasts as long as lasts says. Time
// is that of a synctest bubble: it passes only while everything waits.
type changing struct {
	newest[int]
	t      *testing.T
	start  time.Time
	atWork int
	begun  int
	sent   []sent
}

func newChanging(t *testing.T, lasts func(state int) time.Duration) *changing {
	c := &changing{t: t, start: time.Now()}
	c.settle = settle
	c.begin = func(run func(context.Context)) { go run(t.Context()) }
	c.work = func(ctx context.Context, state int) func() {
		c.begun++
		if c.atWork++; c.atWork > 1 {
			t.Errorf("state %d is begun while another is worked out", state)
		}
		wait(ctx, lasts(state))
		c.atWork--
		return func() { c.sent = append(c.sent, sent{state, time.Since(c.start)}) }
	}
	return c
}

// steadily makes changes to the states 1, 2, … and gives the last.
func (c *changing) steadily(every, during time.Duration) (last int) {
	for ; time.Since(c.start) < during; time.Sleep(every) {
		last++
		c.changed(last)
	}
	return last
}

// quiet lets everything come to its end, and holds what was sent against the
// rules: rising states, the newest at the end.
func (c *changing) quiet(last int) {
	c.t.Helper()
	time.Sleep(24 * time.Hour)
	synctest.Wait()
	was := 0
	for _, s := range c.sent {
		if s.state <= was {
			c.t.Errorf("state %d was sent after state %d", s.state, was)
		}
		was = s.state
	}
	if was != last {
		c.t.Errorf("the last sent is state %d, not %d", was, last)
	}
	if c.running {
		c.t.Error("the goroutine is still there")
	}
}

// gaps holds that something is sent at least as often, while changes come.
func (c *changing) gaps(most, during time.Duration) {
	c.t.Helper()
	was := time.Duration(0)
	for _, s := range append(c.sent, sent{after: during}) {
		if gap := min(s.after, during) - was; gap > most {
			c.t.Errorf("nothing was sent for %v up to %v", gap, s.after)
		}
		was = min(s.after, during)
	}
}

func TestABurstIsWorkedOutOnce(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newChanging(t, func(int) time.Duration { return time.Millisecond })
		last := c.steadily(settle/5, 10*settle)
		c.quiet(last)
		if c.begun != 1 {
			t.Errorf("it was worked out %d times", c.begun)
		}
		c.changed(last + 1)
		c.quiet(last + 1)
		if c.begun != 2 {
			t.Errorf("with one change later it was worked out %d times", c.begun)
		}
	})
}

// However steadily changes come, and however long each state takes to be worked
// out, results come while they do.
func TestChangesThatNeverPauseAreSentNowAndThen(t *testing.T) {
	for _, every := range []time.Duration{time.Millisecond, 5 * time.Millisecond, settle, 100 * time.Millisecond, 300 * time.Millisecond, 3 * time.Second} {
		for _, lasts := range []time.Duration{0, 3 * time.Millisecond, 100 * time.Millisecond, time.Second, 10 * time.Second} {
			synctest.Test(t, func(t *testing.T) {
				const during = 2 * time.Minute
				c := newChanging(t, func(int) time.Duration { return lasts })
				last := c.steadily(every, during)
				c.quiet(last)
				c.gaps(restless+settle+every+3*lasts, during)
				if t.Failed() {
					t.Logf("changes every %v, each worked out in %v", every, lasts)
				}
			})
		}
	}
}

// Once nothing is dropped any more, long work follows long work without a gap.
func TestLongWorkUnderSteadyChangesIsNotBegunAnew(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newChanging(t, func(int) time.Duration { return time.Second })
		last := c.steadily(5*time.Millisecond, time.Minute)
		c.quiet(last)
		if dropped := c.begun - len(c.sent); dropped > 4 {
			t.Errorf("%d of %d works were dropped", dropped, c.begun)
		}
		if end := c.sent[len(c.sent)-1].after; end > time.Minute+2*time.Second {
			t.Errorf("the newest came after %v", end)
		}
	})
}

func TestAChangeStopsHoursOfWork(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newChanging(t, func(state int) time.Duration { return []time.Duration{0, 5 * time.Hour, 0}[state] })
		c.changed(1)
		time.Sleep(10 * time.Second)
		c.changed(2)
		c.quiet(2)
		if want := (sent{2, 10*time.Second + settle}); len(c.sent) != 1 || c.sent[0] != want {
			t.Errorf("sent were %v, want %v alone", c.sent, want)
		}
	})
}

func TestNothingIsSentAfterADrop(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := newChanging(t, func(int) time.Duration { return time.Second })
		for _, after := range []time.Duration{0, settle / 2, settle + time.Millisecond, 500 * time.Millisecond} {
			c.changed(1)
			time.Sleep(after)
			c.drop()
			time.Sleep(2 * time.Second)
			synctest.Wait()
			if c.sent != nil || c.running {
				t.Errorf("dropped after %v: sent %v, running %v", after, c.sent, c.running)
			}
		}
		c.changed(1)
		time.Sleep(500 * time.Millisecond)
		c.drop()
		c.changed(2)
		c.quiet(2)
		if len(c.sent) != 1 {
			t.Errorf("sent were %v", c.sent)
		}
	})
}
