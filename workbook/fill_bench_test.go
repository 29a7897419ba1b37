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

// bookOf writes a book of so many rows and columns, half of them numbers, with a
// calculation sheet of one question for each expression.
func bookOf(b *testing.B, path string, rows, cols int, samples ...string) {
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
	check(f.SetSheetRow("Calculations", "A1", &[]any{"work out", "sample", "> mean", "> lower", "> upper", "> status"}))
	for i, sample := range samples {
		check(f.SetSheetRow("Calculations", fmt.Sprintf("A%d", i+2), &[]any{"mean-interval", sample}))
	}
	check(f.SaveAs(path))
}

// fiveSamples are the questions of a usual book.
var fiveSamples = []string{"minutes in Trips", "minutes in Trips where depot = North", "minutes in Trips where depot = Quay",
	"minutes in Trips where depot = Mill", "minutes in Trips where depot = Fell"}

// inflateOnly reads the parts whose names end so to their end and does nothing
// with them: the floor that a fill is measured against.
func inflateOnly(b *testing.B, path, end string) {
	in, err := zip.OpenReader(path)
	if err != nil {
		b.Fatal(err)
	}
	defer in.Close()
	in.RegisterDecompressor(zip.Deflate, func(r io.Reader) io.ReadCloser { return flate.NewReader(r) })
	for _, f := range in.File {
		if !strings.HasSuffix(f.Name, end) {
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

// fillAgainstInflate compares fills of the books, on one core, with inflating
// the parts whose names end so; see the metric times-inflate.
func fillAgainstInflate(b *testing.B, end string, paths ...string) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	const floors = 5
	start := time.Now()
	for range floors {
		for _, path := range paths {
			inflateOnly(b, path, end)
		}
	}
	floor := time.Since(start) / floors
	b.ReportAllocs()
	for b.Loop() {
		for _, path := range paths {
			if _, err := Fill(context.Background(), path, Options{Replace: true}); err != nil {
				b.Fatal(err)
			}
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(floor), "times-inflate")
}

// BenchmarkFill100k fills a book of 100,000 rows by 10 columns.
func BenchmarkFill100k(b *testing.B) {
	path := filepath.Join(b.TempDir(), "big.xlsx")
	bookOf(b, path, 100_000, 10, fiveSamples[:2]...)
	fillAgainstInflate(b, "worksheets/sheet1.xml", path)
}

// BenchmarkFill5000 fills a book of 5,000 rows by 6 columns.
func BenchmarkFill5000(b *testing.B) {
	path := filepath.Join(b.TempDir(), "book.xlsx")
	bookOf(b, path, 5_000, 6, fiveSamples...)
	fillAgainstInflate(b, "worksheets/sheet1.xml", path)
}

// BenchmarkFillSmallBooks fills 40 books of 40 rows by 3 columns. What counts
// here is opening and saving, so that all parts are the floor.
func BenchmarkFillSmallBooks(b *testing.B) {
	dir := b.TempDir()
	var paths []string
	for i := range 40 {
		path := filepath.Join(dir, fmt.Sprintf("book-%02d.xlsx", i))
		bookOf(b, path, 40, 3, fiveSamples...)
		paths = append(paths, path)
	}
	fillAgainstInflate(b, "", paths...)
}
