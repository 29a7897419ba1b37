package main

import (
	"io"
	"os"
	"time"

	"github.com/schollz/progressbar/v3"
	"golang.org/x/term"
)

// progress is a bar on a terminal, and nothing elsewhere.
type progress struct{ bar *progressbar.ProgressBar }

func newProgress(w io.Writer, books int, quiet bool) *progress {
	if f, ok := w.(*os.File); quiet || !ok || !term.IsTerminal(int(f.Fd())) || books < 2 {
		return &progress{}
	}
	return &progress{progressbar.NewOptions(books,
		progressbar.OptionSetWriter(w),
		progressbar.OptionSetDescription("workbooks"),
		progressbar.OptionShowCount(),
		progressbar.OptionSetWidth(30),
		progressbar.OptionThrottle(100*time.Millisecond),
		progressbar.OptionClearOnFinish())}
}

// step counts one book.
func (p *progress) step() {
	if p.bar != nil {
		p.bar.Add(1)
	}
}

// end takes the bar away.
func (p *progress) end() {
	if p.bar != nil {
		p.bar.Clear()
	}
}
