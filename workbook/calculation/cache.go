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
	users  map[cacheKey]int // how many calls are still to come, where that is known
	rooms  rooms
	keep   bool // readings may be read after the last call
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
	values  int
}

// keyOf is the key of a term's reading, where it has one that is kept.
func keyOf(t *term) (cacheKey, bool) {
	if t == nil || t.query == nil {
		return cacheKey{}, false
	}
	return cacheKey{t.query.at.sheet, t.written, t.query.header}, true
}

// expect tells which rows are to come, so that a reading can be let go after the
// last that reads it.
func (c *cache) expect(levels [][]*Row) {
	c.users = map[cacheKey]int{}
	for _, level := range levels {
		for _, r := range level {
			for _, in := range r.Inputs {
				if key, ok := keyOf(in.term); ok {
					c.users[key]++
				}
			}
		}
	}
}

// done tells that a row is worked out.
func (c *cache) done(r *Row) {
	c.mu.Lock()
	defer c.mu.Unlock()
	for _, in := range r.Inputs {
		key, ok := keyOf(in.term)
		if !ok {
			continue
		}
		if c.users[key]--; c.users[key] > 0 {
			continue
		}
		if e := c.entry[key]; e != nil {
			c.values -= e.values
			delete(c.entry, key)
			if e.reading != nil && !c.keep {
				c.rooms.takeBack(e.reading)
			}
		}
	}
}

// gather gives the reading of a query, which must not be changed.
func (c *cache) gather(ctx context.Context, written string, b *bound) (*reading, error) {
	if f := b.ready(); f != nil {
		return b.gather(ctx, false, &c.rooms)
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
		e.reading, e.err = b.gather(ctx, false, &c.rooms)
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
		e.values = n
		c.values += n
	})
	return e.reading, e.err
}
