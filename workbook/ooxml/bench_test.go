package ooxml

import (
	"archive/zip"
	"bytes"
	"fmt"
	"io"
	"math/rand/v2"
	"strconv"
	"sync"
	"testing"

	"github.com/klauspost/compress/flate"
)

// benchBook builds a book like a list of trips that a spreadsheet program saved:
// a depot by shared string, a whole number, amounts of two decimals, measurements
// of full precision, a date.
func benchBook(rows, cols int) []byte {
	random := rand.New(rand.NewPCG(1, 2))
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	z.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) { return flate.NewWriter(w, 6) })
	put := func(name, text string) {
		w, err := z.Create(name)
		if err != nil {
			panic(err)
		}
		io.WriteString(w, text)
	}
	put("[Content_Types].xml", contentTypes)
	put("_rels/.rels", packageRels)
	put("xl/workbook.xml", workbookXML)
	put("xl/_rels/workbook.xml.rels", workbookRels)
	put("xl/sharedStrings.xml", `<sst xmlns="`+mainTransitional+`"><si><t>North</t></si><si><t>Quay</t></si><si><t>Mill</t></si><si><t>Fell</t></si></sst>`)
	var s bytes.Buffer
	s.WriteString(xmlHead + `<worksheet xmlns="` + mainTransitional + `"><dimension ref="` + (Range{1, 1, rows, cols}).String() + `"/><sheetData>`)
	for r := 1; r <= rows; r++ {
		fmt.Fprintf(&s, `<row r="%d" spans="1:%d">`, r, cols)
		for c := 1; c <= cols; c++ {
			fmt.Fprintf(&s, `<c r="%s"`, CellName(r, c))
			switch c % 5 {
			case 1:
				fmt.Fprintf(&s, ` t="s"><v>%d</v></c>`, random.IntN(4))
			case 2:
				fmt.Fprintf(&s, `><v>%d</v></c>`, random.IntN(1000))
			case 3:
				fmt.Fprintf(&s, ` s="1"><v>%.2f</v></c>`, 100*random.Float64())
			case 4:
				fmt.Fprintf(&s, `><v>%s</v></c>`, strconv.FormatFloat(20+3*random.NormFloat64(), 'g', -1, 64))
			default:
				fmt.Fprintf(&s, ` s="1"><v>%d</v></c>`, 45000+r/50)
			}
		}
		s.WriteString("</row>")
	}
	s.WriteString("</sheetData></worksheet>")
	put("xl/worksheets/sheet1.xml", s.String())
	if err := z.Close(); err != nil {
		panic(err)
	}
	return b.Bytes()
}

var bookM = sync.OnceValue(func() *Book {
	data := benchBook(100000, 10)
	b, err := OpenReaderAt("M.xlsx", bytes.NewReader(data), int64(len(data)), Limits{})
	if err != nil {
		panic(err)
	}
	return b
})

// BenchmarkInflateOnly is the floor: the sheet part inflated and checked against
// its checksum, its bytes thrown away.
func BenchmarkInflateOnly(b *testing.B) {
	book := bookM()
	buf := make([]byte, blockSize)
	for b.Loop() {
		r, err := book.open(book.entries[0])
		if err != nil {
			b.Fatal(err)
		}
		n, err := io.CopyBuffer(struct{ io.Writer }{io.Discard}, struct{ io.Reader }{r}, buf)
		if err != nil {
			b.Fatal(err)
		}
		b.SetBytes(n)
	}
}

func benchScan(b *testing.B, options ScanOptions, columns ...int) {
	book := bookM()
	b.SetBytes(int64(book.zip.File[book.entries[0]].UncompressedSize64))
	b.ReportAllocs()
	for b.Loop() {
		options.Columns = nil
		if len(columns) > 0 {
			options.Columns = AllColumns()
		}
		sum := 0.0
		_, err := book.Scan(0, options, func(r *Row) error {
			if r.Number == 100 && len(columns) > 0 {
				options.Columns.Clear()
				for _, c := range columns {
					options.Columns.Add(c)
				}
			}
			for i := range r.Cells {
				sum += r.Cells[i].Number
			}
			return nil
		})
		if err != nil {
			b.Fatal(err)
		}
	}
}

func classifyTotals(text []byte) uint8 {
	for _, word := range [...]string{"total", "subtotal", "sum", "average"} {
		if len(text) >= len(word) && bytes.EqualFold(text[:len(word)], []byte(word)) {
			return 1
		}
	}
	return 0
}

func BenchmarkScanTwoColumns(b *testing.B) {
	benchScan(b, ScanOptions{Classify: classifyTotals}, 1, 4)
}

func BenchmarkScanAllColumns(b *testing.B) { benchScan(b, ScanOptions{Classify: classifyTotals}) }

func BenchmarkSpliceInBigSheet(b *testing.B) {
	book := bookM()
	var edits []Edit
	for r := 1; r <= 240; r++ {
		edits = append(edits, Edit{r * 400, 12, NumberValue(float64(r) / 7)})
	}
	for b.Loop() {
		if _, err := book.Write(io.Discard, Changes{Edits: map[int][]Edit{0: edits}}); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkScanInflated scans the part from memory, to see what scanning adds to
// inflating.
func BenchmarkScanInflated(b *testing.B) {
	book := bookM()
	data, err := book.load(book.entries[0])
	if err != nil {
		b.Fatal(err)
	}
	columns := new(Columns)
	columns.Add(1)
	columns.Add(4)
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		s := newScanner(newLexer(bytes.NewReader(data), blockSize, book.limits), ScanOptions{Columns: columns, Classify: classifyTotals}, func(*Row) error { return nil })
		s.table = book.sharedStrings
		if err := s.run(); err != nil {
			b.Fatal(err)
		}
	}
}
