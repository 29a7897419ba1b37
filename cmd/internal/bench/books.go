package main

import (
	"fmt"
	"math/rand/v2"
	"os"
	"slices"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"
)

var depots = []string{"North", "Quay", "Mill", "Fell"}

// layout says what a workbook of trips holds.
type layout struct {
	rows, columns int
	questions     int
	beside        bool // the questions stand beside the data, not on a sheet of their own
}

// headers of the calculation sheet; the results begin at the fifth.
var headers = []any{"work out", "sample", "second-sample", "samples", "> mean", "> lower", "> upper", "> difference", "> p-value", "> status", "> note"}

// question is line i of the calculation sheet, from 0: of all rows, of one
// depot's, of two depots, of all depots as groups.
func question(i int) []any {
	column, depot, other := []string{"minutes", "cost"}[i%2], depots[i/2%4], depots[(i/2+1)%4]
	all := column + " in Trips"
	switch i % 5 {
	case 0, 1:
		return []any{"mean-interval", all}
	case 2:
		return []any{"mean-interval", all + " where depot = " + depot}
	case 3:
		return []any{"difference-interval", all + " where depot = " + depot, all + " where depot = " + other}
	}
	return []any{"analysis-of-variance", nil, nil, all + " for each depot"}
}

// book has a workbook of trips written, by another process: what this one had
// resident would count as the memory of those that it starts.
func (b *bench) book(path string, l layout) error {
	_, err := as("book", path, strconv.Itoa(l.rows), strconv.Itoa(l.columns), strconv.Itoa(l.questions), strconv.FormatBool(l.beside)).run()
	return err
}

// makeBook plays the role that book asks for.
func makeBook(args []string) error {
	l, err := layout{}, error(nil)
	for i, field := range []*int{&l.rows, &l.columns, &l.questions} {
		if *field, err = strconv.Atoi(args[1+i]); err != nil {
			return err
		}
	}
	if l.beside, err = strconv.ParseBool(args[4]); err != nil {
		return err
	}
	return l.write(args[0])
}

// write writes a workbook of trips.
func (l layout) write(path string) error {
	f := excelize.NewFile()
	defer f.Close()
	if err := f.SetSheetName("Sheet1", "Trips"); err != nil {
		return err
	}
	write := func(sheet string, lines int, line func(i int) []any) error {
		w, err := f.NewStreamWriter(sheet)
		if err != nil {
			return err
		}
		for i := range lines {
			if err := w.SetRow(fmt.Sprintf("A%d", i+1), line(i)); err != nil {
				return err
			}
		}
		return w.Flush()
	}
	questions := func(i int) []any {
		if i == 0 {
			return headers
		}
		return question(i - 1)
	}
	random := rand.New(rand.NewPCG(1, 1))
	err := write("Trips", l.rows+1, func(i int) []any {
		row := make([]any, l.columns)
		for c := range row {
			switch {
			case i == 0:
				row[c] = fmt.Sprintf("other %d", c)
			case c == 0:
				row[c] = depots[random.IntN(4)]
			case c == 1:
				row[c] = float64(random.IntN(6000)) / 100
			case c == 2:
				row[c] = random.IntN(100_000)
			default:
				row[c] = random.NormFloat64()
			}
		}
		if i == 0 {
			copy(row, []any{"depot", "minutes", "cost"})
		}
		if l.beside && i <= l.questions {
			row = append(append(row, nil), questions(i)...)
		}
		return row
	})
	if err != nil {
		return err
	}
	if !l.beside {
		if _, err := f.NewSheet("Calculations"); err != nil {
			return err
		}
		if err := write("Calculations", l.questions+1, questions); err != nil {
			return err
		}
	}
	return f.SaveAs(path)
}

func (b *bench) fill(path ...string) job {
	return job{program: b.program, args: append([]string{"fill", "--replace", "--format", "csv"}, path...), status: 1} // a small sample may refuse a row
}

// workbooks measures a fill of forty calculations over two columns.
func (b *bench) workbooks(page *strings.Builder) error {
	fmt.Fprint(page, "## Filling a workbook\n\nForty questions about two columns: of all rows, of one depot's, of two depots, of all depots as groups; on a sheet of their own,\n"+
		"or beside the data. One floor inflates the data sheet with Go's standard library, the other with the quicker inflate that halfwidth\n"+
		"uses; neither does anything with what comes out. The library is excelize, which only reads all rows and writes the cells; the script\n"+
		"does forty intervals with openpyxl and scipy. The peak is the most memory that the fill had resident.\n\n"+
		"| rows × columns | fill / inflating | fill / inflating quickly | peak, MiB | library / fill | script / fill |\n| --- | ---: | ---: | ---: | ---: | ---: |\n")
	scripted := b.hasPython("openpyxl", "scipy")
	code := b.file(".py")
	if err := os.WriteFile(code, []byte(script), 0o600); err != nil {
		return err
	}
	for _, l := range []layout{{rows: 5_000, columns: 6}, {rows: 100_000, columns: 10}, {rows: 1_000_000, columns: 5}, {rows: 1_000_000, columns: 5, beside: true}} {
		l.rows, l.questions = l.rows/b.scale, 40
		path, name := b.file(".xlsx"), fmt.Sprintf("%s × %d", thousands(l.rows), l.columns)
		if err := b.book(path, l); err != nil {
			return err
		}
		fill := b.fill(path)
		if l.beside {
			fill.args = slices.Insert(fill.args, 1, "--sheet", "Trips")
			name += ", beside the data"
		}
		var floors []string
		for _, floor := range []string{"inflate", "inflate quickly"} {
			ratio, err := b.ratio(b.pairs, fill, as(floor, path))
			if err != nil {
				return err
			}
			floors = append(floors, figure(ratio))
		}
		peak, err := fill.peak()
		if err != nil {
			return err
		}
		library, script := notMeasured, notMeasured
		if !l.beside {
			few := 3
			if l.rows > 200_000 {
				few = 1
			}
			ratio, err := b.ratio(few, as("excelize", path), fill)
			if err != nil {
				return err
			}
			library = figure(ratio)
		}
		if scripted && l.rows <= 200_000 {
			ratio, err := b.ratio(1, job{program: b.python, args: []string{code, path}}, fill)
			if err != nil {
				return err
			}
			script = figure(ratio)
		}
		fmt.Fprintf(page, "| %s | %s | %s | %s | %s | %s |\n", name, floors[0], floors[1], peak, library, script)
	}
	page.WriteByte('\n')
	return nil
}

const notMeasured = "not measured"
