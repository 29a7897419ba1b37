package workbook

import (
	"archive/zip"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/klauspost/compress/flate"
	"github.com/xuri/excelize/v2"
)

// The benchmarks below run whole processes in turn, a fill and what it is
// measured against, and give the median ratio of their processor time (user and
// system). The floor does nothing but inflate the data sheet. Run them by
//
//	go test ./workbook -run '^$' -bench Process -benchtime 1x -timeout 30m

// role makes the test binary play another program, so that it has a process of
// its own.
const role = "HALFWIDTH_BENCH_ROLE"

func TestMain(m *testing.M) {
	switch path := os.Args[len(os.Args)-1]; os.Getenv(role) {
	case "inflate":
		exitOn(inflateSheet(path, false))
	case "inflate quickly":
		exitOn(inflateSheet(path, true))
	case "excelize":
		exitOn(fillByExcelize(path))
	default:
		os.Exit(m.Run())
	}
}

func exitOn(err error) {
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	os.Exit(0)
}

// inflateSheet reads the first sheet to its end and does nothing with it: with
// the standard library, or with the quicker inflate that a fill uses.
func inflateSheet(path string, quickly bool) error {
	in, err := zip.OpenReader(path)
	if err != nil {
		return err
	}
	defer in.Close()
	if quickly {
		in.RegisterDecompressor(zip.Deflate, flate.NewReader)
	}
	for _, f := range in.File {
		if !strings.HasSuffix(f.Name, "worksheets/sheet1.xml") {
			continue
		}
		r, err := f.Open()
		if err != nil {
			return err
		}
		if _, err := io.Copy(io.Discard, r); err != nil {
			return err
		}
		return r.Close()
	}
	return fmt.Errorf("%s has no first sheet", path)
}

// fillByExcelize does the file work of a fill by a general-purpose library: all
// rows read, 240 cells set, the book saved.
func fillByExcelize(path string) error {
	f, err := excelize.OpenFile(path)
	if err != nil {
		return err
	}
	defer f.Close()
	rows, err := f.Rows("Trips")
	if err != nil {
		return err
	}
	for rows.Next() {
		if _, err := rows.Columns(excelize.Options{RawCellValue: true}); err != nil {
			return err
		}
	}
	if err := rows.Close(); err != nil {
		return err
	}
	for i := range 240 {
		if err := f.SetCellValue("Calculations", fmt.Sprintf("%c%d", 'F'+i%6, 2+i/6), float64(i)/7); err != nil {
			return err
		}
	}
	return f.SaveAs(strings.TrimSuffix(path, ".xlsx") + "-excelize.xlsx")
}

// fortyCalculations are questions over two columns: of all rows, filtered and
// grouped.
func fortyCalculations() [][]any {
	lines := [][]any{{"work out", "sample", "second-sample", "samples", "> mean", "> lower", "> upper", "> difference", "> p-value", "> status", "> note"}}
	depots := []string{"North", "Quay", "Mill", "Fell"}
	for i := range 40 {
		column, depot, other := []string{"minutes", "cost"}[i%2], depots[i/2%4], depots[(i/2+1)%4]
		all := column + " in Trips"
		switch i % 5 {
		case 0, 1:
			lines = append(lines, []any{"mean-interval", all})
		case 2:
			lines = append(lines, []any{"mean-interval", all + " where depot = " + depot})
		case 3:
			lines = append(lines, []any{"difference-interval", all + " where depot = " + depot, all + " where depot = " + other})
		default:
			lines = append(lines, []any{"analysis-of-variance", nil, nil, all + " for each depot"})
		}
	}
	return lines
}

// tripsBook writes a book of so many rows and columns, the first two of them
// depot and minutes and the third cost, with forty calculations on a sheet of
// their own, or beside the data.
func tripsBook(b *testing.B, rows, cols int, beside bool) string {
	b.Helper()
	f := excelize.NewFile()
	defer f.Close()
	check := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	questions := fortyCalculations()
	check(f.SetSheetName("Sheet1", "Trips"))
	w, err := f.NewStreamWriter("Trips")
	check(err)
	rng := rand.New(rand.NewPCG(1, 1))
	depots := []string{"North", "Quay", "Mill", "Fell"}
	for r := range rows + 1 {
		row := make([]any, 0, cols+1+len(questions[0]))
		if r == 0 {
			row = append(row, "depot", "minutes", "cost")
			for i := len(row); i < cols; i++ {
				row = append(row, fmt.Sprintf("column %d", i+1))
			}
		} else {
			row = append(row, depots[rng.IntN(4)], float64(rng.IntN(6000))/100, rng.IntN(100000))
			for i := len(row); i < cols; i++ {
				row = append(row, rng.NormFloat64())
			}
		}
		if beside && r < len(questions) {
			row = append(append(row, nil), questions[r]...)
		}
		check(w.SetRow(fmt.Sprintf("A%d", r+1), row))
	}
	check(w.Flush())
	if !beside {
		_, err = f.NewSheet("Calculations")
		check(err)
		for i, line := range questions {
			check(f.SetSheetRow("Calculations", fmt.Sprintf("A%d", i+1), &line))
		}
	}
	path := filepath.Join(b.TempDir(), "trips.xlsx")
	check(f.SaveAs(path))
	return path
}

// command builds the program and gives its path.
func command(b *testing.B) string {
	b.Helper()
	path := filepath.Join(b.TempDir(), "halfwidth")
	if out, err := exec.Command("go", "build", "-o", path, "../cmd/halfwidth").CombinedOutput(); err != nil {
		b.Fatalf("%v\n%s", err, out)
	}
	return path
}

// play is the test binary in a role.
func play(as, path string) func() *exec.Cmd {
	return func() *exec.Cmd {
		c := exec.Command(os.Args[0], path)
		c.Env = append(os.Environ(), role+"="+as)
		return c
	}
}

// compare runs two commands in turn and reports the median ratio of their
// processor time; it gives the largest memory of the first in MiB, 0 where the
// system does not tell it.
func compare(b *testing.B, name string, pairs int, first, second func() *exec.Cmd) float64 {
	b.Helper()
	cpu := func(c *exec.Cmd) float64 {
		var said strings.Builder
		c.Stderr = &said
		if err := c.Run(); err != nil {
			b.Fatalf("%s: %v\n%s", c, err, said.String())
		}
		return (c.ProcessState.UserTime() + c.ProcessState.SystemTime()).Seconds()
	}
	var ratios []float64
	peak := 0.0
	for range pairs {
		c := first()
		mine := cpu(c)
		peak = max(peak, peakMiB(c.ProcessState))
		ratios = append(ratios, mine/cpu(second()))
	}
	slices.Sort(ratios)
	b.ReportMetric(ratios[len(ratios)/2], name)
	return peak
}

func benchmarkProcess(b *testing.B, rows, cols, pairs int, beside bool) {
	halfwidth, path := command(b), tripsBook(b, rows, cols, beside)
	fill := func() *exec.Cmd {
		args := []string{"fill", "--replace", "--format", "csv", path}
		if beside {
			args = append(args, "--sheet", "Trips")
		}
		return exec.Command(halfwidth, args...)
	}
	for b.Loop() {
		b.ReportMetric(compare(b, "cpu/inflate", pairs, fill, play("inflate", path)), "peak-MiB")
		compare(b, "cpu/quick-inflate", pairs, fill, play("inflate quickly", path))
		if !beside {
			compare(b, "excelize/cpu", 1, play("excelize", path), fill)
		}
	}
}

func BenchmarkProcess100kBy10(b *testing.B)       { benchmarkProcess(b, 100_000, 10, 9, false) }
func BenchmarkProcessMillionBy5(b *testing.B)     { benchmarkProcess(b, 1_000_000, 5, 5, false) }
func BenchmarkProcessMillionInSheet(b *testing.B) { benchmarkProcess(b, 1_000_000, 5, 3, true) }
