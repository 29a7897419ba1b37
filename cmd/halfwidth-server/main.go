// Command halfwidth-server answers statistical questions over its standard
// input and output, in JSON-RPC 2.0 framed as in the Language Server Protocol. It
// reads its options and hands the streams to package rpc.
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime"
	"strings"
	"syscall"

	"halfwidth/cmd/internal/buildinfo"
	"halfwidth/rpc"
)

func main() {
	out := os.Stdout
	// A stray print anywhere must not get between the frames.
	os.Stdout = os.Stderr
	// A client that has gone is met as an error of writing, not as a signal
	// that ends the process before it has cleaned up.
	signal.Ignore(syscall.SIGPIPE)
	os.Exit(run(os.Args[1:], os.Stdin, out, os.Stderr))
}

const usage = `Usage: halfwidth-server [options]

Reads JSON-RPC 2.0 messages from standard input and writes the replies to
standard output, each as "Content-Length: N", CR LF, an empty line and N bytes
of JSON in UTF-8 (the base protocol of the Language Server Protocol 3.17).
It ends after the notification exit, or when its input ends. Exit status: 0
after shutdown, 1 without it, 2 where an option is wrong.

Options:
  --max-message-bytes N   longest message taken (%d)
  --max-depth N           deepest nesting taken (%d)
  --max-sample-values N   numbers taken in one list (%d)
  --max-open-sheets N     sheets that a client may have open (%d)
  --max-open-cells N      cells that these may hold, blanks between counted (%d)
  --max-queue N           long calls that may wait (%d)
  --workers N             long calls worked on at once (one a core: %d)
  --may-fill DIR          a folder in which workbooks/fill may read and write
                          files; to be given once for each (none)
  --version               print the version
  --help                  print this
`

func run(args []string, in io.Reader, out, errw io.Writer) int {
	// Worked out before the number of threads is raised. It heeds the share of
	// the machine that the process was given.
	cores := runtime.GOMAXPROCS(0)
	limits := rpc.DefaultLimits()
	limits.Workers = cores

	flags := flag.NewFlagSet("halfwidth-server", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	help := flags.Bool("help", false, "")
	showVersion := flags.Bool("version", false, "")
	for name, field := range map[string]*int{
		"max-message-bytes": &limits.MessageBytes, "max-depth": &limits.Depth, "max-sample-values": &limits.SampleValues,
		"max-open-sheets": &limits.OpenSheets, "max-open-cells": &limits.OpenCells, "max-queue": &limits.Queue, "workers": &limits.Workers,
	} {
		flags.Var(atLeastOne{field}, name, "")
	}
	var mayFill []string
	flags.Func("may-fill", "", func(dir string) error {
		dirs, err := rpc.ResolveFolders([]string{dir})
		mayFill = append(mayFill, dirs...)
		return err
	})
	standard := limits
	err := flags.Parse(args)
	switch {
	case *help || errors.Is(err, flag.ErrHelp):
		fmt.Fprintf(out, usage, standard.MessageBytes, standard.Depth, standard.SampleValues, standard.OpenSheets, standard.OpenCells, standard.Queue, standard.Workers)
		return 0
	case err != nil:
		fmt.Fprintf(errw, "halfwidth-server: %s\nWrite halfwidth-server --help for the options.\n", inOurWords(err))
		return 2
	case flags.NArg() > 0:
		fmt.Fprintf(errw, "halfwidth-server: %q is no option, and there is nothing else to name\nWrite halfwidth-server --help for the options.\n", flags.Arg(0))
		return 2
	case *showVersion:
		fmt.Fprintf(out, "halfwidth-server %s\n", buildinfo.Version())
		return 0
	}
	// With all cores computing, a thread more for the reader and one for the
	// writer bring a cancel from 22 ms to 0.1 ms.
	runtime.GOMAXPROCS(cores + 2)
	// Never touched, it counts as memory in use without taking any: so garbage is
	// collected once there are some tens of megabytes of it, and not after every few
	// hundred short calls.
	ballast := make([]byte, 16<<20)
	defer runtime.KeepAlive(ballast)
	return rpc.Serve(context.Background(), in, out, errw, rpc.Options{Version: buildinfo.Version(), Limits: limits, MayFill: mayFill})
}

// inOurWords words an error of package flag as the help words options.
func inOurWords(err error) string {
	text := err.Error()
	if name, ok := strings.CutPrefix(text, "flag provided but not defined: -"); ok {
		return "there is no option --" + name
	}
	if name, ok := strings.CutPrefix(text, "flag needs an argument: -"); ok {
		return "--" + name + " needs a value"
	}
	if rest, ok := strings.CutPrefix(text, "invalid value "); ok {
		value, rest, _ := strings.Cut(rest, " for flag -")
		name, why, _ := strings.Cut(rest, ": ")
		return "--" + name + " is " + value + ": " + why
	}
	return text
}

// atLeastOne is a whole number from 1 to what 31 bits hold.
type atLeastOne struct{ field *int }

func (v atLeastOne) String() string {
	if v.field == nil {
		return ""
	}
	return fmt.Sprint(*v.field)
}

func (v atLeastOne) Set(text string) error {
	var n int
	if _, err := fmt.Sscanf(text, "%d", &n); err != nil || fmt.Sprint(n) != text || n < 1 || n > 1<<31-1 {
		return errors.New("write a whole number from 1 to 2147483647")
	}
	*v.field = n
	return nil
}
