// Command calibration shows how often the cautions that functions raise by
// themselves come, for simulated samples of known laws, and writes the table that
// stands in funcs/FUNCTIONS.md.
//
//	go run ./funcs/internal/calibration funcs/internal/calibration/table.md
package main

import (
	"context"
	"fmt"
	"os"
	"strings"
	"sync"

	"halfwidth/funcs"
	"halfwidth/funcs/internal/num"
)

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: calibration FILE.md")
		os.Exit(2)
	}
	table, err := page(calls)
	if err == nil {
		err = os.WriteFile(os.Args[1], []byte(table), 0o644)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "calibration:", err)
		os.Exit(1)
	}
}

// calls is how many are made for each trial and size: a share of 1% is then known
// to within 0.3 points, one of 5% to within 0.7.
const calls = 1000

// sizes are the first at which each caution may come (5 ends few-values; 8, 10 and
// 150 begin the others), the last before, and more.
var sizes = []int{4, 5, 8, 10, 20, 30, 50, 100, 150, 200, 1000}

// page is the table: one row for each caution and trial, one column for each size.
func page(calls int) (string, error) {
	shares, err := tryAll(calls)
	if err != nil {
		return "", err
	}
	var b strings.Builder
	b.WriteString("| caution | values |")
	for _, n := range sizes {
		fmt.Fprintf(&b, " n = %d |", n)
	}
	b.WriteString("\n| --- | --- |" + strings.Repeat(" --- |", len(sizes)) + "\n")
	for _, row := range rows {
		for _, t := range row.trials {
			fmt.Fprintf(&b, "| %s | %s |", row.caution, t.name)
			for _, of := range shares[t.name] {
				fmt.Fprintf(&b, " %.1f |", 100*of[row.caution])
			}
			b.WriteString("\n")
		}
	}
	return b.String(), nil
}

// tryAll works every trial of the table out once at every size, side by side.
func tryAll(calls int) (map[string][]map[string]float64, error) {
	shares, failed := map[string][]map[string]float64{}, error(nil)
	var lock sync.Mutex
	var all sync.WaitGroup
	for _, row := range rows {
		for _, t := range row.trials {
			if shares[t.name] != nil {
				continue
			}
			bySize := make([]map[string]float64, len(sizes))
			shares[t.name] = bySize
			all.Go(func() {
				for i, n := range sizes {
					of, err := t.shares(n, calls)
					if err != nil {
						lock.Lock()
						failed = err
						lock.Unlock()
					}
					bySize[i] = of
				}
			})
		}
	}
	all.Wait()
	return shares, failed
}

// shares is the share of calls that raise each caution, and any.
func (t trial) shares(n, calls int) (map[string]float64, error) {
	counts, stream := map[string]int{}, num.NewStream()
	for i := range calls {
		stream.Start(1, uint64(i))
		out, err := funcs.Answer(context.Background(), t.function, t.draw(stream, n))
		if err != nil {
			return nil, err
		}
		seen := map[string]bool{} // a caution counts once a call, though several samples raise it
		for _, f := range out.Findings {
			seen[f.Code] = true
		}
		seen[anyCaution] = out.Status == funcs.StatusCaution
		for code, yes := range seen {
			if yes {
				counts[code]++
			}
		}
	}
	of := map[string]float64{}
	for code, count := range counts {
		of[code] = float64(count) / float64(calls)
	}
	return of, nil
}
