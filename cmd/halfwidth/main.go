// Command halfwidth answers statistical questions about the numbers in
// workbooks and writes the answers beside the questions, as plain values.
//
// Each verb has a file of its name: its flags, its help, what it prints. run.go
// has the table of verbs and the exit codes; batch.go works on several books at
// once. The work itself is package workbook's.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	ctx, stop := withSignals(context.Background())
	signal.Ignore(syscall.SIGPIPE)
	ctx, cancel := context.WithCancelCause(ctx)
	code := Run(ctx, os.Args[1:], &pipe{os.Stdout, cancel}, os.Stderr)
	stop()
	os.Exit(code)
}

// withSignals gives a context that the first interrupt, or request to terminate,
// ends; the second ends the process at once.
func withSignals(parent context.Context) (context.Context, func()) {
	ctx, cancel := context.WithCancelCause(parent)
	signals := make(chan os.Signal, 1)
	signal.Notify(signals, os.Interrupt, syscall.SIGTERM)
	go func() {
		select {
		case <-ctx.Done():
		case s := <-signals:
			code := exitInterrupted
			if s == syscall.SIGTERM {
				code = exitTerminated
			}
			cancel(interruption{code})
		}
		signal.Stop(signals)
	}()
	return ctx, func() { cancel(nil) }
}
