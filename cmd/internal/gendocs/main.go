// Command gendocs renews the pages that are made from the code.
//
//	go run ./cmd/internal/gendocs          write them
//	go run ./cmd/internal/gendocs -check   compare them; exit status 1 where one differs
package main

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"halfwidth/funcs"
)

// pages are the generated files, from the top of the repository.
var pages = map[string]func() ([]byte, error){
	"funcs/FUNCTIONS.md": functionPages,
}

func main() {
	check := flag.Bool("check", false, "compare instead of writing")
	root := flag.String("root", ".", "the top of the repository")
	flag.Parse()
	stale, err := renew(*root, *check)
	if err != nil {
		fmt.Fprintln(os.Stderr, "gendocs:", err)
		os.Exit(2)
	}
	if len(stale) > 0 {
		fmt.Fprintf(os.Stderr, "gendocs: out of date: %s; run: go run ./cmd/internal/gendocs\n", strings.Join(stale, ", "))
		os.Exit(1)
	}
}

// renew writes the pages, or names those that differ.
func renew(root string, check bool) (stale []string, err error) {
	for name, make := range pages {
		want, err := make()
		if err != nil {
			return nil, fmt.Errorf("%s: %w", name, err)
		}
		path := filepath.Join(root, filepath.FromSlash(name))
		if !check {
			if err := os.WriteFile(path, want, 0o644); err != nil {
				return nil, err
			}
			continue
		}
		got, err := os.ReadFile(path)
		if err != nil && !os.IsNotExist(err) {
			return nil, err
		}
		// A checkout may have given the page the line ends of its system.
		if !bytes.Equal(bytes.ReplaceAll(got, []byte("\r\n"), []byte("\n")), want) {
			stale = append(stale, name)
		}
	}
	return stale, nil
}

// functionPages is the reference: a list of the families, then a page for each
// function.
func functionPages() ([]byte, error) {
	var b bytes.Buffer
	b.WriteString("# Functions\n\nMade from the code by `go run ./cmd/internal/gendocs`; `halfwidth functions NAME` shows the same page.\n\n")
	for _, family := range funcs.Families() {
		fmt.Fprintf(&b, "- %s (%s):", family.Name, family.Summary)
		for i, f := range family.Functions {
			if i > 0 {
				b.WriteString(",")
			}
			fmt.Fprintf(&b, " [%s](#%s)", f.Name, f.Name)
		}
		b.WriteString("\n")
	}
	b.WriteString("\nEvery function gives these results besides its own:\n\n")
	for _, r := range funcs.CommonResults {
		fmt.Fprintf(&b, "- `%s` (%s): %s\n", r.Name, r.Kind, r.Summary)
	}
	for _, f := range funcs.All() {
		b.WriteString("\n")
		if err := funcs.WriteReference(&b, f); err != nil {
			return nil, err
		}
	}
	return b.Bytes(), nil
}
