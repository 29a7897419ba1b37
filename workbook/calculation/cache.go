package calculation

import (
	"context"
	"sync"
)

// keptValues is how many numbers of samples a cache holds on to; samples past
// it are read again for each row that names them.
const keptValues = 4 << 20

// cache keeps the readings of expressions that several rows share. What it
// keeps never changes an answer, only the time it takes.
type cache struct {
	mu     sync.Mutex
	entry  map[cacheKey]*cacheEntry
	values int
}

// cacheKey is an expression as written, at the place it was tied to.
type cacheKey struct {
	sheet   *sheet
	written string
	header  int
}

type cacheEntry struct {
	once    sync.Once
	reading *reading
	err     error
}

// gather gives the reading of a query, which must not be changed.
func (c *cache) gather(ctx context.Context, written string, b *bound) (*reading, error) {
	if f := b.ready(); f != nil {
		return b.gather(ctx, false)
	}
	key := cacheKey{b.at.sheet, written, b.header}
	c.mu.Lock()
	if c.entry == nil {
		c.entry = map[cacheKey]*cacheEntry{}
	}
	e := c.entry[key]
	if e == nil {
		e = &cacheEntry{}
		c.entry[key] = e
	}
	c.mu.Unlock()
	e.once.Do(func() {
		e.reading, e.err = b.gather(ctx, false)
		n := 0
		if e.err == nil {
			for _, s := range e.reading.series {
				n += len(s.values)
			}
		}
		c.mu.Lock()
		defer c.mu.Unlock()
		if e.err != nil || c.values+n > keptValues {
			delete(c.entry, key)
			return
		}
		c.values += n
	})
	return e.reading, e.err
}
