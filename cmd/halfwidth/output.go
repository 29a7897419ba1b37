package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"syscall"
)

// printer passes on what a command prints and keeps the first failure, so that
// none goes unnoticed, whoever printed.
type printer struct {
	io.Writer
	err error
}

func (p *printer) Write(b []byte) (int, error) {
	if p.err != nil {
		return 0, p.err
	}
	n, err := p.Writer.Write(b)
	p.err = err
	return n, err
}

// Fd is that of the file behind, which may be a terminal.
func (p *printer) Fd() uintptr { return fdOf(p.Writer) }

// fdOf is the descriptor of a file, or of the file that a writer passes on to;
// one that no file has, where there is none.
func fdOf(w io.Writer) uintptr {
	if f, ok := w.(interface{ Fd() uintptr }); ok {
		return f.Fd()
	}
	return ^uintptr(0)
}

// errUnread ends a command whose reader has gone: the right end for
// `halfwidth functions | head -3`, and no failure to speak of.
var errUnread = errors.New("nobody reads what is printed")

// failure is the error of a command that could not print everything. The command
// may have failed by itself besides.
func (p *printer) failure(ctx context.Context, err error) error {
	if errors.Is(context.Cause(ctx), errUnread) {
		return errUnread
	}
	cause := p.err
	var at *fs.PathError
	if errors.As(cause, &at) {
		cause = at.Err
	}
	failed := fmt.Errorf("the results cannot be printed: %w", cause)
	if err == nil || errors.Is(err, p.err) || errors.Is(err, errRefused) {
		return failed
	}
	return errors.Join(failed, err)
}

// pipe is standard output, with the signal of a reader that went ignored: it would
// end the process at once and leave temporary files behind. Instead the work is
// called off, as by an interrupt.
type pipe struct {
	io.Writer
	callOff context.CancelCauseFunc
}

func (p *pipe) Fd() uintptr { return fdOf(p.Writer) }

func (p *pipe) Write(b []byte) (int, error) {
	n, err := p.Writer.Write(b)
	if errors.Is(err, syscall.EPIPE) {
		p.callOff(errUnread)
	}
	return n, err
}
