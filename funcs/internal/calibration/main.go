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
	table, err := page(samples)
	if err == nil {
		err = os.WriteFile(os.Args[1], []byte(table), 0o644)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "calibration:", err)
		os.Exit(1)
	}
}

// samples is how many are drawn for each law and size: a share of 1% is then
// known to within 0.3 points, one of 5% to within 0.7.
const samples = 1000

var sizes = []int{5, 10, 20, 30, 50, 100, 200, 1000}

// cautions are those that look at the values of one sample.
var cautions = []string{"skewed-for-n", "neighbours-alike", "far-value", "heavy-tail"}

// page is the table: one row for each caution and law, one column for each size.
func page(samples int) (string, error) {
	var b strings.Builder
	b.WriteString("| caution | law |")
	for _, n := range sizes {
		fmt.Fprintf(&b, " n = %d |", n)
	}
	b.WriteString("\n| --- | --- |" + strings.Repeat(" --- |", len(sizes)) + "\n")
	tables, err := over(laws, func(l law, n int) (map[string]float64, error) { return oneSample(l, n, samples) })
	if err != nil {
		return "", err
	}
	for _, caution := range cautions {
		for i, l := range laws {
			writeRow(&b, caution, l.name, tables[i], caution)
		}
	}
	tables, err = over(spreads, func(s spread, n int) (map[string]float64, error) { return twoSamples(s, n, samples) })
	if err != nil {
		return "", err
	}
	for i, s := range spreads {
		writeRow(&b, "spreads-unlike", s.name, tables[i], "spreads-unlike")
	}
	return b.String(), nil
}

func writeRow(b *strings.Builder, caution, law string, shares []map[string]float64, code string) {
	fmt.Fprintf(b, "| %s | %s |", caution, law)
	for _, of := range shares {
		fmt.Fprintf(b, " %.1f |", 100*of[code])
	}
	b.WriteString("\n")
}

// over works every case out at every size, side by side.
func over[T any](cases []T, share func(T, int) (map[string]float64, error)) ([][]map[string]float64, error) {
	out := make([][]map[string]float64, len(cases))
	failed := make([]error, len(cases))
	var all sync.WaitGroup
	for i, c := range cases {
		all.Go(func() {
			for _, n := range sizes {
				of, err := share(c, n)
				if err != nil {
					failed[i] = err
				}
				out[i] = append(out[i], of)
			}
		})
	}
	all.Wait()
	for _, err := range failed {
		if err != nil {
			return nil, err
		}
	}
	return out, nil
}

// oneSample is the share of samples for which mean-interval raises each caution.
func oneSample(l law, n, samples int) (map[string]float64, error) {
	return shares(samples, "mean-interval", func(s *num.Stream) map[string]any {
		x := make([]float64, n)
		l.draw(s, x)
		return map[string]any{"sample": x}
	})
}

// twoSamples is the same for difference-interval with pooled variances.
func twoSamples(d spread, n, samples int) (map[string]float64, error) {
	return shares(samples, "difference-interval", func(s *num.Stream) map[string]any {
		first, second := make([]float64, n), make([]float64, d.times*n)
		for i := range first {
			first[i] = d.sd * s.Normal()
		}
		for i := range second {
			second[i] = s.Normal()
		}
		return map[string]any{"sample": first, "second-sample": second, "variances": "pooled"}
	})
}

func shares(samples int, function string, draw func(*num.Stream) map[string]any) (map[string]float64, error) {
	of, stream := map[string]float64{}, num.NewStream()
	for i := range samples {
		stream.Start(1, uint64(i))
		out, err := funcs.Answer(context.Background(), function, draw(stream))
		if err != nil {
			return nil, err
		}
		seen := map[string]bool{} // a caution counts once a call, though both samples raise it
		for _, f := range out.Findings {
			if !seen[f.Code] {
				seen[f.Code] = true
				of[f.Code] += 1 / float64(samples)
			}
		}
	}
	return of, nil
}
