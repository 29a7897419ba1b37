package main

import (
	"fmt"
	"strings"

	"github.com/xuri/excelize/v2"
)

// block is one block of the calculation sheet: a header row and the rows below.
type block struct {
	title  string
	header string // cells with | between them
	rows   []string
}

// blocks asks every kind of question once or more. Numbers and percentages are
// stored as numbers, all else as text; a result column is left empty.
var blocks = []block{
	{"What do the measurements look like?",
		"work out: sample-summary | sample | > n | > mean | > sd | > median | > upper-quartile | > skewness | > lag-1-autocorrelation | > skipped | > status | > note",
		[]string{
			"all trips | minutes in Trips",
			"day shift | minutes in Trips where shift = day",
			"night shift | minutes in Trips where shift = night",
			"delay | \"delay (minutes)\" in Trips",
		}},
	{"How sure are we of the average?",
		"work out | label | sample | reference | direction | population-size | confidence | > mean | > lower | > upper | > half-width | > n | > p-value | > status | > note | > sentence",
		[]string{
			"mean-interval | North | minutes in Trips where depot = North",
			"mean-interval | Quay | minutes in Trips where depot = Quay | 30 | below",
			"mean-interval | Mill, 99% | minutes in Trips where depot = Mill | | | | 99%",
			"mean-interval | Fell, April only | minutes in Trips where depot = Fell and date >= 2026-04-01 and date <= 2026-04-30",
			"mean-interval | first week, by its name | minutes in first_week | 30",
			"mean-interval | delay (skewed) | \"delay (minutes)\" in Trips where depot = Fell and shift = night",
			"mean-interval | sample of 48 out of 310 routes | Routes!C2:C49 | | | 310",
		}},
	{"Did the new order of stops help?",
		"work out | label | sample | second-sample | direction | > difference | > lower | > upper | > n | > t | > p-value | > correlation | > status | > sentence",
		[]string{
			"paired-interval | before and after, by route | \"before (minutes)\" in Routes | \"after (minutes)\" in Routes | above",
		}},
	{"Is the difference real?",
		"work out | label | sample | second-sample | variances | reference | > difference | > lower | > upper | > df | > p-value | > standardized-difference | > status | > note | > sentence",
		[]string{
			"difference-interval | North less Quay | minutes in Trips where depot = North | minutes in Trips where depot = Quay",
			"difference-interval | day less night, pooled | minutes in Trips where shift = day | minutes in Trips where shift = night | pooled",
			"difference-interval | Fell less Mill, against 2 minutes | minutes in Trips where depot = Fell | minutes in Trips where depot = Mill | | 2",
		}},
	{"How much do the values vary?",
		"work out | label | samples | sample | second-sample | reference | > pooled-sd | > sd | > sd-lower | > sd-upper | > ratio | > lower | > upper | > df | > p-value | > status | > note",
		[]string{
			"pooled-variance | within depots | minutes in Trips for each depot",
			"variance-interval | North, against a variance of 36 | | minutes in Trips where depot = North | | 36",
			"variance-ratio-interval | Fell over Quay | | minutes in Trips where depot = Fell | minutes in Trips where depot = Quay",
		}},
	{"How many must we measure?",
		"work out | label | sd | first-sd | second-sd | half-width | difference | power | population-size | allocation-ratio | > n | > second-n | > n-planned | > attained-half-width | > attained-power | > chance-met | > status | > sentence",
		[]string{
			"mean-precision-size | mean to within 1 minute | 6.5 | | | 1",
			"mean-precision-size | the same, of 310 routes | 18 | | | 4 | | | 310",
			"difference-precision-size | two depots to within 1.5 minutes | | 6 | 7.5 | 1.5",
			"mean-test-size | to see a change of 1.5 minutes | 6.5 | | | | 1.5 | 90%",
			"difference-test-size | to see 2 minutes between depots | | 6 | 8 | | 2 | 80%",
			"difference-test-size | the same, twice as many at the second | | 6 | 8 | | 2 | 80% | | 2",
		}},
	{"What will next week cost?",
		"work out | label | lows | likelies | highs | means | sds | correlation | threshold | chance | > mean | > sd | > lower | > upper | > probability-above | > value-for-chance | > sd-together | > status | > note",
		[]string{
			"normal-sum | from lowest, likely, highest | lowest in Costs | likely in Costs | highest in Costs | | | | 70000 | 90%",
			"normal-sum | from the last quarter | | | | \"weekly mean\" in Costs | \"weekly sd\" in Costs | 0.2 | 70000 | 90%",
		}},
	{"Arithmetic of normal and related values",
		"work out | label | mean | sd | value | multiply | add | from | to | probability | counted-from | df | first-df | second-df | > probability | > probability-outside | > value | > score | > mean | > sd | > status",
		[]string{
			"normal-probability | share of trips within 40 minutes | 31.5 | 6 | | | | | 40",
			"normal-quantile | minutes that 95% of trips stay within | 31.5 | 6 | | | | | | 0.95",
			"standard-score | a trip of 45 minutes | 31.5 | 6 | 45",
			"normal-transform | minutes to cost: 0.85 a minute, 4 a trip | 31.5 | 6 | | 0.85 | 4",
			"t-probability | beyond 2.5, 11 degrees of freedom | | | | | | 2.5 | | | | 11",
			"t-quantile | two-sided 95%, 11 degrees of freedom | | | | | | | | 0.025 | above | 11",
			"chi-square-probability | above 20, 11 degrees of freedom | | | | | | 20 | | | | 11",
			"chi-square-quantile | upper 5% | | | | | | | | 0.05 | above | 11",
			"f-probability | above 3 | | | | | | 3 | | | | | 3 | 40",
			"f-quantile | upper 1% | | | | | | | | 0.01 | above | | 3 | 40",
		}},
	{"What share is damaged?",
		"work out | label | successes | n | first-successes | first-n | second-successes | second-n | reference | > proportion | > difference | > lower | > upper | > p-value | > status | > sentence",
		[]string{
			"proportion-interval | damaged trips, against 3% | count in Trips where damaged = yes | count in Trips | | | | | 0.03",
			"proportion-difference-interval | damage, day less night | | | count in Trips where damaged = yes and shift = day | count in Trips where shift = day | count in Trips where damaged = yes and shift = night | count in Trips where shift = night",
		}},
	{"May the answers be trusted?",
		"work out | label | sample | n | > n | > predicted-coverage | > coverage | > n-needed | > coverage-at-30 | > shapiro-wilk-p-value | > lag-1-autocorrelation | > p-value | > tail-index | > status | > note | > sentence",
		[]string{
			"normality-check | are trips from Fell normal | minutes in Trips where depot = Fell",
			"independence-check | trips from Fell, in their order | minutes in Trips where depot = Fell",
			"tail-check | tails of the delays | \"delay (minutes)\" in Trips",
			"coverage-check | does the interval of 25 delays hold | \"delay (minutes)\" in Trips where depot = Fell and shift = night | 25",
			"enough-n-for-mean | how many delays would be enough | \"delay (minutes)\" in Trips where depot = Fell and shift = night",
		}},
}

func (b *book) calculations() {
	const sheet = "Calculations"
	b.check(b.SetCellValue(sheet, "A1", "Larkmoor Parcels: questions about the trip sheet"))
	b.check(b.SetCellStyle(sheet, "A1", "A1", b.bold))
	b.check(b.SetCellValue(sheet, "A2", "default confidence"))
	b.put(sheet, 2, 2, "95%")
	row := 4
	for _, block := range blocks {
		b.check(b.SetCellValue(sheet, cell(1, row), block.title))
		row += 2
		header := strings.Split(block.header, " | ")
		for i, name := range header {
			b.check(b.SetCellValue(sheet, cell(i+1, row), name))
		}
		b.check(b.SetCellStyle(sheet, cell(1, row), cell(len(header), row), b.bold))
		for _, line := range block.rows {
			row++
			for i, text := range strings.Split(line, "|") {
				b.put(sheet, i+1, row, strings.TrimSpace(text))
			}
		}
		row += 2
	}
	b.check(b.SetColWidth(sheet, "A", "A", 24))
	b.check(b.SetColWidth(sheet, "B", "B", 36))
	b.check(b.SetColWidth(sheet, "C", "D", 30))
	b.check(b.SetColWidth(sheet, "E", "U", 14))
	index, err := b.GetSheetIndex(sheet)
	b.check(err)
	b.SetActiveSheet(index)
}

// put stores a number or a percentage as a number, all else as text.
func (b *book) put(sheet string, col, row int, text string) {
	if text == "" {
		return
	}
	var x float64
	number, isPercent := strings.CutSuffix(text, "%")
	if n, err := fmt.Sscanf(number+"\n", "%g\n", &x); n == 1 && err == nil {
		if isPercent {
			b.check(b.SetCellValue(sheet, cell(col, row), x/100))
			style, err := b.NewStyle(&excelize.Style{NumFmt: 9})
			b.check(err)
			b.check(b.SetCellStyle(sheet, cell(col, row), cell(col, row), style))
			return
		}
		b.check(b.SetCellValue(sheet, cell(col, row), x))
		return
	}
	b.check(b.SetCellStr(sheet, cell(col, row), text))
}

func cell(col, row int) string {
	name, err := excelize.CoordinatesToCellName(col, row)
	if err != nil {
		panic(err) // the layout above is ours
	}
	return name
}
