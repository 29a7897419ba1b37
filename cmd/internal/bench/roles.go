package main

import (
	"archive/zip"
	"bufio"
	"context"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"strings"

	"github.com/klauspost/compress/flate"
	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
)

// roleVariable makes this program play a floor or a rival in a process of its
// own.
const roleVariable = "HALFWIDTH_BENCH_ROLE"

func play(role string, args []string) error {
	switch role {
	case "book":
		return makeBook(args)
	case "inflate", "inflate quickly":
		return inflateSheet(args[0], role == "inflate quickly")
	case "excelize":
		return fillByLibrary(args[0])
	case "echo":
		return echoFrames(os.Stdin, os.Stdout)
	case "values", "plain", "interval", "checked":
		n, err := strconv.Atoi(args[0])
		if err != nil {
			return err
		}
		return intervals(role, n)
	}
	return fmt.Errorf("there is no role %q", role)
}

// inflateSheet reads the first sheet to its end and does nothing with it: with
// the standard library, or with the quicker inflate that halfwidth uses.
func inflateSheet(path string, quickly bool) error {
	in, err := zip.OpenReader(path)
	if err != nil {
		return err
	}
	defer in.Close()
	if quickly {
		in.RegisterDecompressor(zip.Deflate, flate.NewReader)
	}
	r, err := in.Open("xl/worksheets/sheet1.xml")
	if err != nil {
		return err
	}
	_, err = io.Copy(io.Discard, r)
	return err
}

// fillByLibrary does the file work of a fill by a general-purpose library: all
// rows read, a mean made, the result cells set, the book saved.
func fillByLibrary(path string) error {
	f, err := excelize.OpenFile(path)
	if err != nil {
		return err
	}
	defer f.Close()
	rows, err := f.Rows("Trips")
	if err != nil {
		return err
	}
	sum, n := 0.0, 0
	for rows.Next() {
		cells, err := rows.Columns(excelize.Options{RawCellValue: true})
		if err != nil {
			return err
		}
		if x, err := strconv.ParseFloat(cells[1], 64); err == nil {
			sum, n = sum+x, n+1
		}
	}
	if err := rows.Close(); err != nil {
		return err
	}
	for i := range 40 * 6 {
		if err := f.SetCellValue("Calculations", fmt.Sprintf("%c%d", 'E'+i%6, 2+i/6), sum/float64(n)); err != nil {
			return err
		}
	}
	return f.SaveAs(strings.TrimSuffix(path, ".xlsx") + "-library.xlsx")
}

// script is what an analyst would write with general-purpose libraries of Python:
// the same forty intervals, written beside the questions.
const script = `import sys, math, openpyxl
from scipy import stats
path = sys.argv[1]
book = openpyxl.load_workbook(path)
trips, sheet = book["Trips"], book["Calculations"]
rows = [(r[0], r[1], r[2]) for r in trips.iter_rows(min_row=2, max_col=3, values_only=True)]
for i, depot in enumerate(["North", "Quay", "Mill", "Fell"] * 10):
    values = [r[1 + i % 2] for r in rows if i < 20 or r[0] == depot]
    n = len(values)
    mean = sum(values) / n
    sd = math.sqrt(sum((x - mean) ** 2 for x in values) / (n - 1))
    half = stats.t.ppf(0.975, n - 1) * sd / math.sqrt(n)
    for j, x in enumerate((mean, mean - half, mean + half, "ok")):
        sheet.cell(row=2 + i, column=5 + j).value = x
book.save(path[:-5] + "-script.xlsx")
`

// echoFrames gives back the body of every frame in a frame.
func echoFrames(in io.Reader, out io.Writer) error {
	r, w := bufio.NewReaderSize(in, 1<<16), bufio.NewWriterSize(out, 1<<16)
	var body []byte
	for {
		header, err := r.ReadString('\n')
		if err == io.EOF {
			return w.Flush()
		}
		if err != nil {
			return err
		}
		length, err := strconv.Atoi(strings.TrimSpace(strings.TrimPrefix(header, "Content-Length:")))
		if err != nil {
			return err
		}
		if _, err := r.Discard(len("\r\n")); err != nil {
			return err
		}
		body = append(body[:0], make([]byte, length)...)
		if _, err := io.ReadFull(r, body); err != nil {
			return err
		}
		fmt.Fprintf(w, "Content-Length: %d\r\n\r\n", length)
		if _, err := w.Write(body); err != nil {
			return err
		}
	}
}

// valuesOnce is how many values one interval has.
const valuesOnce = 100_000

// intervals works out a t interval of the mean n times: by loops alone, through
// the catalogue without and with its checks, or not at all.
func intervals(role string, n int) error {
	random := rand.New(rand.NewPCG(1, 1))
	values := make([]float64, valuesOnce)
	for i := range values {
		values[i] = 12 + 3*random.NormFloat64()
	}
	given := map[string]any{"sample": values}
	if role == "interval" {
		given["checks"] = false
	}
	f, err := funcs.Lookup("mean-interval")
	if err != nil {
		return err
	}
	for i := range n {
		values[i%valuesOnce]++ // never the same question twice
		switch role {
		case "plain":
			plainInterval(values)
		case "interval", "checked":
			if _, err := f.Answer(context.Background(), given); err != nil {
				return err
			}
		}
	}
	return nil
}

// plainInterval is the formula and nothing else: mean, sd, and a quantile of
// Student's t by three terms of its expansion about the normal's (which is close
// enough at these df, and costs nothing).
func plainInterval(values []float64) (lower, upper float64) {
	sum, n := 0.0, float64(len(values))
	for _, x := range values {
		sum += x
	}
	mean, squares := sum/n, 0.0
	for _, x := range values {
		squares += (x - mean) * (x - mean)
	}
	z, df := 1.959963984540054, n-1
	t := z + (z*z*z+z)/(4*df) + (5*math.Pow(z, 5)+16*z*z*z+3*z)/(96*df*df)
	half := t * math.Sqrt(squares/df/n)
	return mean - half, mean + half
}
