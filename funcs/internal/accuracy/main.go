// Command accuracy measures the laws and plans against the high-precision check
// values in testdata/references/numerics and writes the accuracy page.
//
//	go run ./funcs/internal/accuracy funcs/ACCURACY.md
package main

import (
	"encoding/csv"
	"fmt"
	"math"
	"math/big"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
)

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: accuracy FILE.md")
		os.Exit(2)
	}
	page, err := measure(filepath.Join("testdata", "references"))
	if err == nil {
		err = os.WriteFile(os.Args[1], []byte(page), 0o644)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "accuracy:", err)
		os.Exit(1)
	}
}

// measured is what one quantity showed over its points.
type measured struct {
	name   string
	errors []float64
	from   map[string]float64 // the least and the greatest of each argument
	to     map[string]float64
	least  float64 // of the values
}

// passed over: a finite factor that the catalogue does not use.
func passedOver(row map[string]string) bool { return row["fpc"] == "(N-n)/(N-1)" }

// folders of the reference files.
var folders = []string{"numerics", "further"}

// measureAll gives every quantity of every file, in the order in which they come.
func measureAll(references string) ([]*measured, error) {
	var list []*measured
	for _, folder := range folders {
		files, err := filepath.Glob(filepath.Join(references, folder, "*.csv"))
		if err != nil || len(files) == 0 {
			return nil, fmt.Errorf("no reference files in %s of %s (%v)", folder, references, err)
		}
		for _, file := range files {
			if list, err = measureFile(list, file); err != nil {
				return nil, fmt.Errorf("%s: %w", file, err)
			}
		}
	}
	return list, nil
}

func measure(references string) (string, error) {
	list, err := measureAll(references)
	if err != nil {
		return "", err
	}
	var b strings.Builder
	b.WriteString(`# Accuracy

Made by ` + "`go run ./funcs/internal/accuracy funcs/ACCURACY.md`" + `: every point of testdata/references/numerics and further, computed at 50 to
60 digits for exactly the doubles given, against what this program computes. Relative errors; 0 means that every double is the nearest or
the sample size is equal. Left out: half-widths with the finite factor √((N-n)/(N-1)), which no function uses.

| quantity | points | largest error | median error | domain tried |
| --- | --- | --- | --- | --- |
`)
	for _, m := range list {
		slices.Sort(m.errors)
		fmt.Fprintf(&b, "| %s | %d | %s | %s | %s |\n", m.name, len(m.errors), short(m.errors[len(m.errors)-1]), short(m.errors[len(m.errors)/2]), m.domain())
	}
	return b.String(), nil
}

// short writes an error with two digits; what is below half a unit of the last
// place of a double is 0.
func short(e float64) string {
	if e < 1.2e-16 {
		return "0"
	}
	return strconv.FormatFloat(e, 'e', 1, 64)
}

// domain words the ranges of the arguments.
func (m *measured) domain() string {
	var parts []string
	for name, low := range m.from {
		text := name + " " + strconv.FormatFloat(low, 'g', 6, 64)
		if high := m.to[name]; high != low {
			text += " to " + strconv.FormatFloat(high, 'g', 6, 64)
		}
		parts = append(parts, text)
	}
	slices.Sort(parts)
	return strings.Join(append(parts, "values from "+strconv.FormatFloat(m.least, 'g', 2, 64)), "; ")
}

// measureFile adds the quantities of a file to the list.
func measureFile(list []*measured, path string) ([]*measured, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil {
		return nil, err
	}
	for _, record := range records[1:] {
		row := map[string]string{}
		for i, name := range records[0] {
			row[name] = record[i]
		}
		if passedOver(row) {
			continue
		}
		name := row["function"]
		i := slices.IndexFunc(list, func(m *measured) bool { return m.name == name })
		if i < 0 {
			i = len(list)
			list = append(list, &measured{name: name, from: map[string]float64{}, to: map[string]float64{}, least: math.Inf(1)})
		}
		if err := list[i].add(row); err != nil {
			return nil, fmt.Errorf("%v: %w", row, err)
		}
	}
	return list, nil
}

// add computes one point and keeps its error.
func (m *measured) add(row map[string]string) error {
	compute, ok := quantities[m.name]
	if !ok {
		return fmt.Errorf("no way to compute %s", m.name)
	}
	for name, cell := range row {
		x, err := strconv.ParseFloat(cell, 64)
		if err != nil || name == "value" || name == "check_digits" {
			continue
		}
		if low, ok := m.from[name]; !ok || x < low {
			m.from[name] = x
		}
		if high, ok := m.to[name]; !ok || x > high {
			m.to[name] = x
		}
	}
	got, err := compute(func(name string) float64 {
		x, err := strconv.ParseFloat(row[name], 64)
		if err != nil {
			return 0
		}
		return x
	}, func(name string) string { return row[name] })
	if err != nil {
		return err
	}
	want, _, err := big.ParseFloat(row["value"], 10, 200, big.ToNearestEven)
	if err != nil {
		return err
	}
	if math.IsNaN(got) || math.IsInf(got, 0) {
		return fmt.Errorf("got %v", got)
	}
	e := new(big.Float).SetPrec(200).SetFloat64(got)
	e.Sub(e, want)
	if want.Sign() != 0 {
		e.Quo(e, want)
	}
	relative, _ := e.Abs(e).Float64()
	m.errors = append(m.errors, relative)
	size, _ := new(big.Float).Abs(want).Float64()
	m.least = math.Min(m.least, size)
	return nil
}
