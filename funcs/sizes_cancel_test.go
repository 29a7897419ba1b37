package funcs

import (
	"context"
	"errors"
	"strings"
	"testing"
)

// countdown is a context that is cancelled once its error has been asked for a
// number of times, so that a test stops a search at any of its steps.
type countdown struct {
	context.Context
	left, asked int
}

func (c *countdown) Err() error {
	c.asked++
	if c.asked > c.left {
		return context.Canceled
	}
	return nil
}

// Every plan looks at its context before it works, those that search while they
// do; one stopped half way asks no more than a few times again and gives no answer.
func TestACancelledPlanEnds(t *testing.T) {
	for _, f := range sizesFamily {
		whole := &countdown{Context: t.Context(), left: 1 << 30}
		if _, err := f.Answer(whole, f.Example.arguments()); err != nil {
			t.Fatalf("%s: %v", f.Name, err)
		}
		searches := strings.HasSuffix(f.Name, "-size") || strings.HasSuffix(f.Name, "-detectable") || f == enoughNForMean
		if least := map[bool]int{false: 1, true: 3}[searches]; whole.asked < least {
			t.Errorf("%s looks at its context %d times, want %d", f.Name, whole.asked, least)
		}
		for _, left := range []int{0, whole.asked / 2, whole.asked - 1} {
			stopped := &countdown{Context: t.Context(), left: left}
			if _, err := f.Answer(stopped, f.Example.arguments()); !errors.Is(err, context.Canceled) {
				t.Errorf("%s stopped after %d of %d looks: %v", f.Name, left, whole.asked, err)
			}
			// A search that goes on holds at every step: twice its doubling steps at most.
			if more := stopped.asked - left; more > 5 {
				t.Errorf("%s stopped after %d looks went on for %d", f.Name, left, more)
			}
		}
	}
}
