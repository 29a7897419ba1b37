package calculation

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"testing"
	"testing/iotest"
)

func TestALineOfTooManyCellsIsRefusedBeforeItIsHeld(t *testing.T) {
	for _, line := range []string{strings.Repeat(",", MaxCol), strings.Repeat(",", 4<<20)} {
		_, err := readCSV(t, "a,b\n"+line+"\n1,2\n", FileOptions{})
		if err == nil || err.Error() != "is damaged in line 2: it has more than 16384 columns" {
			t.Errorf("%d cells: %v", len(line)+1, err)
		}
	}
	if _, err := readCSV(t, "a,b\n"+strings.Repeat(",", MaxCol-1)+"\n", FileOptions{}); err != nil {
		t.Error(err)
	}
}

// readCSV reads a data file whole.
func readCSV(t *testing.T, text string, options FileOptions) (*Frame, error) {
	t.Helper()
	file := NewTextFile("trips.csv", func() (io.ReadCloser, error) {
		return io.NopCloser(iotest.OneByteReader(strings.NewReader(text))), nil
	}, options)
	return file.Read(context.Background(), "trips.csv", func(*Frame) Columns { return Columns{All: true} })
}

func TestCellsOfATextFileAreTyped(t *testing.T) {
	text := "\xef\xbb\xbfa,b,c,d,e,f,g,h\r\n" +
		"12.5,\" 7 \",95%,2024-03-01,08:30,TRUE,#N/A,\"say \"\"no\"\"\"\r\n" +
		"\r\n" +
		"1e3,-3,2024-03-01 12:00,1:00:30,\"1,5\",false,Total,\"two\r\nlines\""
	f, err := readCSV(t, text, FileOptions{})
	if err != nil {
		t.Fatal(err)
	}
	want := [][]Cell{
		{{Kind: Text, Text: "a"}},
		{{Kind: Number, Number: 12.5}, {Kind: Number, Number: 7}, {Kind: Number, Number: 0.95}, {Kind: Date, Number: 45352},
			{Kind: Duration, Number: 8.5 / 24}, {Kind: Bool, Number: 1}, {Kind: Error, Text: "#N/A"}, {Kind: Text, Text: `say "no"`}},
		{},
		{{Kind: Number, Number: 1000}, {Kind: Number, Number: -3}, {Kind: Date, Number: 45352.5}, {Kind: Duration, Number: 3630.0 / 86400},
			{Kind: Text, Text: "1,5"}, {Kind: Bool}, {Kind: Text, Text: "Total"}, {Kind: Text, Text: "two\r\nlines"}},
	}
	for i, row := range want {
		for j, cell := range row {
			if got := f.At(i+1, j+1); got != cell {
				t.Errorf("row %d, column %d: got %+v, want %+v", i+1, j+1, got, cell)
			}
		}
	}
	if f.Row(2) != RowFilled || f.Row(3) != 0 || f.Row(4) != RowFilled|RowTotal || f.LastRow() != 4 {
		t.Errorf("rows are flagged %v %v %v, last %d", f.Row(2), f.Row(3), f.Row(4), f.LastRow())
	}
}

func TestDecimalCommaIsReadOnlyWhereAsked(t *testing.T) {
	text := "a;b\n12,5;1.5\n"
	f, err := readCSV(t, text, FileOptions{DecimalComma: true})
	if err != nil || f.At(2, 1) != (Cell{Kind: Number, Number: 12.5}) || f.At(2, 2).Kind != Text {
		t.Errorf("with a decimal comma: %+v %+v %v", f.At(2, 1), f.At(2, 2), err)
	}
	f, err = readCSV(t, text, FileOptions{})
	if err != nil || f.At(2, 1).Kind != Text || f.At(2, 2) != (Cell{Kind: Number, Number: 1.5}) {
		t.Errorf("without: %+v %+v %v", f.At(2, 1), f.At(2, 2), err)
	}
}

func TestDamagedTextFilesAreRefusedWithTheirLine(t *testing.T) {
	for _, c := range []struct {
		text, reason string
		line         int
	}{
		{"a,b\n1,\"x\n", "never closed", 2},
		{"a,b\n1,\"x\"y\n", "after", 2},
		{"a,b\n\"two\nlines\",1\n\"x\"y\n", "follows a closing quote", 4},
		{"a,b\n1,\xff\xfe\n", "UTF-8", 2},
	} {
		_, err := readCSV(t, c.text, FileOptions{})
		var csv *CSVError
		if !errors.As(err, &csv) || csv.Line != c.line {
			t.Errorf("%q: got %v, want an error in line %d", c.text, err, c.line)
		}
	}
	broken := errors.New("the disk is gone")
	file := NewTextFile("trips.csv", func() (io.ReadCloser, error) {
		return io.NopCloser(io.MultiReader(strings.NewReader("a,b\n1,2\n"), iotest.ErrReader(broken))), nil
	}, FileOptions{})
	if _, err := file.Read(context.Background(), "trips.csv", func(*Frame) Columns { return Columns{All: true} }); !errors.Is(err, broken) {
		t.Errorf("got %v, want the reader's error", err)
	}
}

func TestOnlyKeptColumnsOfATextFileStayInMemory(t *testing.T) {
	var b bytes.Buffer
	b.WriteString("depot,minutes,remark\n")
	for i := range 5000 {
		fmt.Fprintf(&b, "North,%d,\"remark %d\"\n", i, i)
	}
	file := NewTextFile("trips.csv", func() (io.ReadCloser, error) { return io.NopCloser(bytes.NewReader(b.Bytes())), nil }, FileOptions{})
	heads := 0
	f, err := file.Read(context.Background(), "trips.csv", func(head *Frame) Columns {
		heads++
		if head.LastRow() != HeadRows || head.At(1, 3).Text != "remark" {
			t.Errorf("the head has %d rows, C1 is %+v", head.LastRow(), head.At(1, 3))
		}
		return Columns{List: []int{2}}
	})
	if err != nil || heads != 1 {
		t.Fatalf("%d heads, %v", heads, err)
	}
	if got := f.At(5001, 2); got != (Cell{Kind: Number, Number: 4999}) {
		t.Errorf("the last value is %+v", got)
	}
	if f.At(5001, 3) != (Cell{}) || len(f.texts) > 2*HeadRows+3 {
		t.Errorf("a column that is not kept is kept: %+v, %d texts", f.At(5001, 3), len(f.texts))
	}
}

func TestScannerHoldsLittleOfALongFile(t *testing.T) {
	row := "North,12.5,\"a remark that is rather long\"\n"
	s := newCSVScanner(strings.NewReader(strings.Repeat(row, 50_000)), dialect{separator: ','})
	rows := 0
	for s.next() {
		if want := rows * len(row); s.fields[0].span.Start != want || s.end.End != want+len(row) {
			t.Fatalf("row %d stands at %v to %v, want %d", rows+1, s.fields[0].span, s.end, want)
		}
		rows++
	}
	if rows != 50_000 || s.err != nil || cap(s.buf) > 256<<10 {
		t.Errorf("%d rows, %v, a buffer of %d bytes", rows, s.err, cap(s.buf))
	}
}

// fillText fills a text calculation sheet whose data stand in trips.csv.
func fillText(t *testing.T, name, text, data string) (string, *Results) {
	t.Helper()
	sheet, err := ParseTextSheet(name, []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	source := sheet.Source(func(file string, options FileOptions) (Source, error) {
		if file != "trips.csv" {
			return nil, errors.New("is not beside the sheet")
		}
		return NewTextFile(file, func() (io.ReadCloser, error) { return io.NopCloser(strings.NewReader(data)), nil }, options), nil
	})
	plan, err := NewPlan(context.Background(), source, Options{NoTables: "a text file has no sheets"})
	if err != nil {
		t.Fatal(err)
	}
	results, err := plan.Run(context.Background(), 2)
	if err != nil {
		t.Fatal(err)
	}
	var edits []Edit
	for _, r := range results.Rows {
		edits = append(edits, r.Edits...)
	}
	return string(sheet.Apply(edits)), results
}

const trips = "depot;minutes\nNorth;12,1\nNorth;11,8\nQuay;15,5\nNorth;12,6\n"

func TestFilledTextSheetKeepsEveryOtherByte(t *testing.T) {
	text := "\xef\xbb\xbf\"A remark, quoted\" ;x\r\n" +
		"default decimal-mark;,\r\n" +
		"\r\n" +
		"\"work out\";label ;sample;own;> mean;> used;> status;> note\r\n" +
		"mean-interval;\"N\";minutes in trips.csv where depot = North; keep \"me\";\"old\"\r\n" +
		"mean-interval;;\"12,1; 13\";;1;2;3;4\r\n" +
		"mean-interval;;\"12; 13.5\";;;;\r\n" +
		"\r\n;tail"
	want := "\xef\xbb\xbf\"A remark, quoted\" ;x\r\n" +
		"default decimal-mark;,\r\n" +
		"\r\n" +
		"\"work out\";label ;sample;own;> mean;> used;> status;> note\r\n" +
		"mean-interval;\"N\";minutes in trips.csv where depot = North; keep \"me\";12,166666666666666;3;caution;" +
		"The sample has only 3 values: the interval rests wholly on the values being normal. Measure at least 5.\r\n" +
		"mean-interval;;\"12,1; 13\";;;;refused;\"C6 (sample) cannot be read: character 3, at ,: write numbers with ; between them and . as the decimal mark.\"\r\n" +
		"mean-interval;;\"12; 13.5\";;12,75;2;caution;" +
		"The sample has only 2 values: the interval rests wholly on the values being normal. Measure at least 5.\r\n" +
		"\r\n;tail"
	got, _ := fillText(t, "x.calculations.csv", text, trips)
	if got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
	if again, _ := fillText(t, "x.calculations.csv", got, trips); again != got {
		t.Errorf("filled twice:\n%s\nonce:\n%s", again, got)
	}
}

func TestTextThatStartsLikeAFormulaGetsASpace(t *testing.T) {
	sheet, err := ParseTextSheet("x.csv", []byte("a,b\n"))
	if err != nil {
		t.Fatal(err)
	}
	for v, want := range map[any]string{
		"=1": " =1", "-x": " -x", "+": " +", "@a": " @a", "a=1": "a=1", -1.5: "-1.5", 3: "3", true: "TRUE", nil: "", "a,b": `"a,b"`, "say \"x\"": `"say ""x"""`,
	} {
		if got := string(sheet.Apply([]Edit{{CellRef{1, 2}, v}})); got != "a,"+want+"\n" {
			t.Errorf("%v is written %q, want %q", v, got, "a,"+want+"\n")
		}
	}
}

func TestPositionsInATextSheet(t *testing.T) {
	text := "a,\"say \"\"x\"\" ä\",b\r\nlast,12\n"
	sheet, err := ParseTextSheet("x.csv", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	cell := CellRef{1, 2}
	if got := sheet.CellText(cell); got != `say "x" ä` {
		t.Fatalf("B1 reads %q", got)
	}
	span, ok := sheet.TextSpan(cell, Span{4, 7}) // "x" with its quotes
	if !ok || text[span.Start:span.End] != `""x""` {
		t.Errorf("the span of \"x\" is %q", text[span.Start:span.End])
	}
	at := strings.Index(text, "x")
	if c, within, ok := sheet.CellAt(at); !ok || c != cell || within != 5 {
		t.Errorf("the offset of x lies in %v at %d, %v", c, within, ok)
	}
	if c, within, ok := sheet.CellAt(strings.Index(text, "12") + 1); !ok || c != (CellRef{2, 2}) || within != 1 {
		t.Errorf("the offset in 12 lies in %v at %d, %v", c, within, ok)
	}
	if span, ok := sheet.CellSpan(CellRef{2, 5}); !ok || span.Start != len(text)-1 {
		t.Errorf("a cell past the end of row 2 stands at %v, %v", span, ok)
	}
}

func TestLinesConvertOffsetsToLinesAndBack(t *testing.T) {
	text := "a😀b\r\nä\rc\n"
	lines := NewLines(text)
	for _, c := range []struct{ offset, line, column int }{{0, 0, 0}, {5, 0, 3}, {6, 0, 4}, {8, 1, 0}, {10, 1, 1}, {11, 2, 0}, {12, 2, 1}, {13, 3, 0}} {
		line, column := lines.ByteToLine(c.offset)
		if line != c.line || column != c.column {
			t.Errorf("offset %d is %d:%d, want %d:%d", c.offset, line, column, c.line, c.column)
		}
		if got := lines.LineToByte(c.line, c.column); got != c.offset {
			t.Errorf("%d:%d is offset %d, want %d", c.line, c.column, got, c.offset)
		}
	}
	if got := lines.LineToByte(0, 99); got != 6 {
		t.Errorf("past the end of line 0: offset %d, want 6", got)
	}
	if got := lines.LineToByte(9, 0); got != len(text) {
		t.Errorf("past the last line: offset %d, want %d", got, len(text))
	}
}

// FuzzTextSheet fills any text as a calculation sheet. Nothing may panic, the
// bytes before the first block stay, and filling twice gives the same bytes.
func FuzzTextSheet(f *testing.F) {
	f.Add("work out,sample,> mean,> note\nmean-interval,12; 13; 14,,\n")
	f.Add("default confidence,90%\nwork out: mean-interval;mean;sd;n;> lower;> upper\nx;1;2;3;;\ny;E3;2;9;;\n")
	f.Add("work out\tsample\ttable sheet\t> used\nmean-interval\tminutes in trips.csv for each depot\tT\t\n\nmean-interval\tB2\t\t")
	f.Add("work out,sample,second-sample,> n\r\npaired-interval,minutes in trips.csv,\"minutes in trips.csv where depot <> \"\"Quay\"\"\",")
	// The separator is found again though what is written has quotes, and the header one without its match.
	f.Add("work out, <8 \"q,second-sample,> n\r\n airetes terval,minutcsv\r\n\" t\"")
	f.Add("calculation sheet\nwork out,sample,sample,> sd,> sd\nmean-interval,A1:B9,C5,D5,E5")
	f.Fuzz(func(t *testing.T, text string) {
		sheet, err := ParseTextSheet("x.calculations.csv", []byte(text))
		if err != nil {
			return
		}
		if same := sheet.Apply(nil); string(same) != text {
			t.Fatal("a sheet without edits changed")
		}
		if strings.Contains(text, "resamples") || strings.Contains(text, "-size") || strings.Contains(text, "coverage") || strings.Contains(text, "power") {
			return // long computations are not what is sought here
		}
		once, results := fillText(t, "x.calculations.csv", text, trips)
		for _, r := range results.Rows {
			if r.Status == "refused" && len(r.Edits) > 0 && r.Note() == "" {
				t.Fatalf("row %d is refused without a reason", r.Row.Number)
			}
			for _, d := range r.Findings {
				if written := sheet.CellText(d.Cell); d.Span.End > len(written) {
					t.Fatalf("a finding at %v of %q", d.Span, written)
				}
			}
		}
		if twice, _ := fillText(t, "x.calculations.csv", once, trips); twice != once {
			t.Fatalf("filled once:\n%s\ntwice:\n%s", once, twice)
		}
	})
}

func BenchmarkTextFileOfAMillionRows(b *testing.B) {
	var text bytes.Buffer
	text.WriteString("trip-id,depot,driver,minutes,parcels,remark\n")
	for i := range 1_000_000 {
		fmt.Fprintf(&text, "t%d,depot %d,driver %d,%d.%02d,%d,\"a remark, %d\"\n", i, i%40, i%300, i%60, i%97, i%20, i%1000)
	}
	b.SetBytes(int64(text.Len()))
	file := NewTextFile("trips.csv", func() (io.ReadCloser, error) { return io.NopCloser(bytes.NewReader(text.Bytes())), nil }, FileOptions{})
	for b.Loop() {
		f, err := file.Read(context.Background(), "trips.csv", func(*Frame) Columns { return Columns{List: []int{2, 4}} })
		if err != nil || f.LastRow() != 1_000_001 {
			b.Fatal(f.LastRow(), err)
		}
	}
}
