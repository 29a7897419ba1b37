// Command bench measures the programs against named floors and against
// themselves at other sizes, all in one run, and writes a page of the ratios.
//
//	go run ./cmd/internal/bench -o cmd/internal/bench/BENCHMARKS.md
//
// What is compared is the processor time (user and system) of whole processes,
// as the median of pairs that run in turn: so a machine that does other work
// besides disturbs little. Only the ratios mean anything on another machine.
package main

import (
	"flag"
	"fmt"
	"os"
	"strings"
)

func main() {
	if role := os.Getenv(roleVariable); role != "" {
		if err := play(role, os.Args[1:]); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		return
	}
	out := flag.String("o", "", "the page to write; it is printed if this is left out")
	python := flag.String("python", "python3", "a Python, with openpyxl and scipy for the script of general-purpose libraries")
	small := flag.Bool("small", false, "a hundredth of the sizes, to see that everything runs")
	flag.Parse()
	page, err := measure(*python, *small)
	if err == nil && *out != "" {
		err = os.WriteFile(*out, []byte(page), 0o644)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "bench:", err)
		os.Exit(1)
	}
	if *out == "" {
		fmt.Print(page)
	}
}

// measure runs everything and gives the page.
func measure(python string, small bool) (string, error) {
	dir, err := os.MkdirTemp("", "bench")
	if err != nil {
		return "", err
	}
	defer os.RemoveAll(dir)
	b := &bench{dir: dir, python: python, pairs: 3, scale: 1}
	if small {
		b.pairs, b.scale = 1, 100
	}
	if err := b.build(); err != nil {
		return "", err
	}
	var page strings.Builder
	page.WriteString(introduction + b.machine() + "\n")
	for _, part := range []func(*strings.Builder) error{b.workbooks, b.server, b.kernel, b.growth} {
		if err := part(&page); err != nil {
			return "", err
		}
	}
	return page.String(), nil
}

const introduction = `# What halfwidth costs

Made by ` + "`go run ./cmd/internal/bench -o cmd/internal/bench/BENCHMARKS.md`" + `. Each figure is a ratio of processor time (user and system) of
whole processes, the median of pairs that ran in turn in one run. A floor is the least that the job could take: it does one
part of the work and nothing else.

`
