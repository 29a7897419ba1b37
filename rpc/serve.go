package rpc

import (
	"context"
	"fmt"
	"io"
	"time"

	"github.com/sourcegraph/jsonrpc2"
)

// Options set up a server. The zero value serves.
type Options struct {
	Version string   // of the program, given at initialize
	Limits  Limits   // what is 0 takes the default
	Methods []Method // nil: Methods()
	MayFill []string // folders in which workbooks/fill may read and write, as ResolveFolders gives them

	lookEvery  time.Duration    // between looks at the client's process
	waitInTurn time.Duration    // 0: the constant of that name
	settle     time.Duration    // 0: the constant of that name
	ready      func() bool      // for the writer; nil: found out from out
	began      func(s *Session) // lets a test look on
}

// Serve answers the messages of one client until it sends exit, its input ends,
// its process has gone, its output is closed, or ctx ends. It returns the exit
// code of the Language Server Protocol: 0 after shutdown, else 1.
//
// Replies go to out, lines for people to errw, which is never waited for. The
// goroutine that reads in ends with it, which may be after Serve has returned.
func Serve(ctx context.Context, in io.Reader, out, errw io.Writer, opts Options) int {
	opts.Limits = opts.Limits.withDefaults()
	if opts.Methods == nil {
		opts.Methods = Methods()
	}
	if opts.lookEvery <= 0 {
		opts.lookEvery = time.Second
	}
	if opts.waitInTurn <= 0 {
		opts.waitInTurn = waitInTurn
	}
	if opts.settle <= 0 {
		opts.settle = settle
	}
	if opts.ready == nil {
		opts.ready = writableNow(out)
	}
	remarks := newRemarks(errw)
	var s *Session
	writer := newFrameWriter(out, opts.ready, func(err error) {
		s.end(fmt.Sprintf("the client takes no more output: %v", err))
	})
	s = newSession(ctx, writer, remarks, opts)
	s.stream = newStream(in, s)
	// The library's context is not ctx: it would close the connection before
	// the calls under way have been answered.
	s.conn = jsonrpc2.NewConn(context.WithoutCancel(ctx), s.stream, s.stream, jsonrpc2.SetLogger(remarks))
	if opts.began != nil {
		opts.began(s)
	}
	go s.stream.read()
	select {
	case <-s.ended:
	case <-ctx.Done():
		s.end("the server was told to stop")
		<-s.ended // another goroutine may be ending it
	}
	writer.close(s.limits.Patience)
	_ = s.conn.Close()
	remarks.close()
	return s.code
}
