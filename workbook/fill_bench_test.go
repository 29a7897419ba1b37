package workbook

import (
	"archive/zip"
	"context"
	"fmt"
	"io"
	"math/rand/v2"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"github.com/klauspost/compress/flate"
	"github.com/xuri/excelize/v2"
)

// bigBook writes a book of so many rows and columns, half of them numbers, with
// a calculation sheet of two questions.
func bigBook(b *testing.B, rows, cols int) string {
	b.Helper()
	f := excelize.NewFile()
	defer f.Close()
	check := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	check(f.SetSheetName("Sheet1", "Trips"))
	w, err := f.NewStreamWriter("Trips")
	check(err)
	header := []any{"depot", "minutes"}
	for i := len(header); i < cols; i++ {
		header = append(header, fmt.Sprintf("column %d", i+1))
	}
	check(w.SetRow("A1", header))
	rng := rand.New(rand.NewPCG(1, 1))
	depots := []string{"North", "Quay", "Mill", "Fell"}
	for r := range rows {
		row := []any{depots[rng.IntN(4)], float64(rng.IntN(6000)) / 100}
		for i := len(row); i < cols; i++ {
			if i%2 == 0 {
				row = append(row, rng.IntN(100000))
			} else {
				row = append(row, rng.NormFloat64())
			}
		}
		check(w.SetRow(fmt.Sprintf("A%d", r+2), row))
	}
	check(w.Flush())
	_, err = f.NewSheet("Calculations")
	check(err)
	for i, line := range [][]any{
		{"work out", "sample", "> mean", "> lower", "> upper", "> status"},
		{"mean-interval", "minutes in Trips"},
		{"mean-interval", "minutes in Trips where depot = North"},
	} {
		check(f.SetSheetRow("Calculations", fmt.Sprintf("A%d", i+1), &line))
	}
	path := filepath.Join(b.TempDir(), "big.xlsx")
	check(f.SaveAs(path))
	return path
}

// inflateOnly reads the data sheet to its end and does nothing with it: the
// floor that a fill is measured against.
func inflateOnly(b *testing.B, path string) {
	in, err := zip.OpenReader(path)
	if err != nil {
		b.Fatal(err)
	}
	defer in.Close()
	in.RegisterDecompressor(zip.Deflate, func(r io.Reader) io.ReadCloser { return flate.NewReader(r) })
	for _, f := range in.File {
		if !strings.HasSuffix(f.Name, "worksheets/sheet1.xml") {
			continue
		}
		r, err := f.Open()
		if err != nil {
			b.Fatal(err)
		}
		if _, err := io.Copy(io.Discard, r); err != nil {
			b.Fatal(err)
		}
		r.Close()
	}
}

// BenchmarkFill100k compares a fill of 100,000 rows by 10 columns with inflating
// its data sheet alone, both on one core; see the metric times-inflate.
func BenchmarkFill100k(b *testing.B) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	path := bigBook(b, 100_000, 10)
	const floors = 5
	start := time.Now()
	for range floors {
		inflateOnly(b, path)
	}
	floor := time.Since(start) / floors
	for b.Loop() {
		if _, err := Fill(context.Background(), path, Options{Replace: true}); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(floor), "times-inflate")
}
