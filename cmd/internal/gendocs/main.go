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
var pages = map[string]func(root string) ([]byte, error){
	"funcs/FUNCTIONS.md": functionPages,
}

// cautionTable is how often cautions come, made by funcs/internal/calibration.
const cautionTable = "funcs/internal/calibration/table.md"

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
		want, err := make(root)
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

// functionPages is the reference: a list of the families, a page for each
// function, and how often the cautions come.
func functionPages(root string) ([]byte, error) {
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
	table, err := os.ReadFile(filepath.Join(root, filepath.FromSlash(cautionTable)))
	if err != nil {
		return nil, err
	}
	b.WriteString("\n## How often cautions come\n\n" + aboutCautions)
	b.Write(bytes.ReplaceAll(table, []byte("\r\n"), []byte("\n")))
	return b.Bytes(), nil
}

const aboutCautions = `Percentages of 1000 simulated calls for which a caution comes: of mean-interval for one sample of n values, of difference-interval with
pooled variances for two, of analysis-of-variance for ten groups of n. Made by
` + "`go run ./funcs/internal/calibration " + cautionTable + "`" + `. Of independent normal values with one variance each caution
takes in about 1 call in 100, at any n and for any number of groups, and all of them together fewer than 5 from n = 5 on. No-spread and
cells-skipped are facts of the values and cells at hand and have nothing to calibrate.

- few-values comes below 5 values, always.
- skewed-for-n asks for two things: that n is at most 25·G1² (Cochran's rule), and that the skewness G1 differs from 0 at significance
  0.01 (D'Agostino 1970). At n = 20 the first alone would take in 8% of normal samples; from 31 it implies the second.
- neighbours-alike compares the lag-1 autocorrelation with its mean -1/n and standard deviation (n-2)/(n√(n-1)) for independent normal
  values (Moran 1948), at significance 0.01.
- far-value is exact for normal values. For skewed or heavy-tailed laws it comes as often as such values do: it asks to look at one.
- heavy-tail looks at Hill's tail index, and says that no n is enough; so it must also be rare for laws that have a variance. At 100
  values it came for 8% of lognormal samples, and so it starts at 150. A t law with 2 degrees of freedom, whose variance just does not
  exist, cannot be told from that lognormal law at such n: a rule that found it more often would accuse both.
- spreads-unlike asks that one sd is more than twice another, and that their F test is significant at 0.01, shared among all pairs
  (Bonferroni). Twice alone would take in every fifth pair of groups of 5.
- Where a call has several samples, the significance of each caution is shared among them. Ten groups, each looked at
  with 0.01, would give a caution in every tenth call without cause.

`
