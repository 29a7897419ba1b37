package main

import (
	"fmt"
	"io"
	"os"
	"strings"
	"sync"
	"time"

	"golang.org/x/term"
)

// progress is a bar on a terminal, and nothing elsewhere.
type progress struct {
	w     io.Writer // nil for no bar
	books int

	mu    sync.Mutex
	done  int
	drawn time.Time
	width int // of what is drawn
}

// The bar is this long, and drawn so often at most.
const (
	barLength = 30
	barPause  = 100 * time.Millisecond
)

func newProgress(w io.Writer, books int, quiet bool) *progress {
	p := &progress{books: books}
	if f, ok := w.(*os.File); ok && !quiet && books > 1 && term.IsTerminal(int(f.Fd())) {
		p.w = w
	}
	return p
}

// step counts one book.
func (p *progress) step() {
	if p.w == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	p.done++
	if now := time.Now(); now.Sub(p.drawn) >= barPause {
		p.drawn = now
		n := p.done * barLength / p.books
		p.draw(fmt.Sprintf("[%s%s] %d of %d workbooks", strings.Repeat("#", n), strings.Repeat(" ", barLength-n), p.done, p.books))
	}
}

// draw puts a line in the place of the one before. Spaces cover what is longer,
// since not every terminal takes commands.
func (p *progress) draw(line string) {
	fmt.Fprintf(p.w, "\r%-*s", p.width, line)
	p.width = len(line)
}

// end takes the bar away.
func (p *progress) end() {
	if p.w != nil && p.width > 0 {
		p.draw("")
		fmt.Fprint(p.w, "\r")
	}
}
