package workbook

import (
	"context"
	"errors"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"sync"
	"testing"

	"halfwidth/workbook/ooxml"
)

// faultyBooks are a workbook and a text sheet, each with one calculation over a
// data file beside it, in a folder of its own.
func faultyBooks(t *testing.T) map[string]string {
	t.Helper()
	row := []any{"mean-interval", "minutes in data.csv"}
	book, text := filepath.Join(t.TempDir(), "a.xlsx"), filepath.Join(t.TempDir(), "a.calculations.csv")
	makeBook(t, book, twoSheets(meanHeader, row), nil)
	write(t, text, "work out,sample,> mean,> status\nmean-interval,minutes in data.csv,,\n")
	for _, path := range []string{book, text} {
		write(t, filepath.Join(filepath.Dir(path), "data.csv"), "minutes\n12\n14\n16\n")
	}
	return map[string]string{"workbook": book, "text": text}
}

// during fills a book and lets something happen while its rows are worked out.
func during(ctx context.Context, path string, o Options, happen func()) error {
	var once sync.Once
	o.Progress = func(int, int) { once.Do(happen) }
	_, err := Fill(ctx, path, o)
	return err
}

// folderHolds fails if the folder of a file holds other names than these.
func folderHolds(t *testing.T, path string, names ...string) {
	t.Helper()
	list, err := os.ReadDir(filepath.Dir(path))
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, f := range list {
		got = append(got, f.Name())
	}
	if strings.Join(got, " ") != strings.Join(names, " ") {
		t.Errorf("the folder holds %q, want %q", got, names)
	}
}

func TestABookThatGoesOrChangesDuringAFillIsNotFilled(t *testing.T) {
	for kind := range faultyBooks(t) {
		for name, happen := range map[string]func(path string) error{
			"removed":     os.Remove,
			"renamed":     func(path string) error { return os.Rename(path, filepath.Join(filepath.Dir(path), "b.xlsx")) },
			"replaced":    func(path string) error { return errors.Join(os.Remove(path), os.WriteFile(path, []byte("x"), 0o600)) },
			"a folder":    func(path string) error { return errors.Join(os.Remove(path), os.Mkdir(path, 0o700)) },
			"cut short":   func(path string) error { return os.Truncate(path, 3) },
			"overwritten": func(path string) error { return os.WriteFile(path, []byte("another text"), 0o600) },
		} {
			for _, inPlace := range []bool{false, true} {
				if runtime.GOOS == "windows" && name != "overwritten" {
					continue // an open file stays in its place there
				}
				book := faultyBooks(t)[kind]
				err := during(t.Context(), book, Options{InPlace: inPlace}, func() {
					if err := happen(book); err != nil {
						t.Fatal(err)
					}
				})
				if !errors.Is(err, ooxml.ErrChanged) && !errors.Is(err, os.ErrNotExist) && !errors.Is(err, ooxml.ErrDamaged) {
					t.Errorf("%s, %s, in place %v: %v", kind, name, inPlace, err)
				}
				if err != nil && !strings.Contains(err.Error(), filepath.Base(book)) {
					t.Errorf("%s, %s: the error does not name the book: %v", kind, name, err)
				}
				left, err := filepath.Glob(filepath.Join(filepath.Dir(book), "*-filled*"))
				saving, err2 := filepath.Glob(filepath.Join(filepath.Dir(book), ".saving*"))
				if len(left)+len(saving) > 0 || err != nil || err2 != nil {
					t.Errorf("%s, %s, in place %v: left %v %v", kind, name, inPlace, left, saving)
				}
			}
		}
	}
}

func TestAnOutputThatComesDuringAFillStays(t *testing.T) {
	for kind, book := range faultyBooks(t) {
		output := outputName(book)
		err := during(t.Context(), book, Options{}, func() { write(t, output, "somebody's\n") })
		if err == nil || !strings.Contains(err.Error(), "--replace") || read(t, output) != "somebody's\n" {
			t.Errorf("%s: %v; it reads %q", kind, err, read(t, output))
		}
		if err := errors.Join(os.Remove(output), during(t.Context(), book, Options{Replace: true}, func() { write(t, output, "somebody's\n") })); err != nil || read(t, output) == "somebody's\n" {
			t.Errorf("%s with --replace: %v", kind, err)
		}
		if err := os.Remove(output); err != nil {
			t.Fatal(err)
		}
		for _, replace := range []bool{false, true} {
			err = during(t.Context(), book, Options{Replace: replace}, func() { _ = os.MkdirAll(filepath.Join(output, "in"), 0o700) })
			if err == nil || !strings.Contains(err.Error(), output+" is there and is no file") && !strings.Contains(err.Error(), output+": this is not a file") {
				t.Errorf("%s, a folder: %v", kind, err)
			}
		}
		folderHolds(t, book, filepath.Base(output), filepath.Base(book), "data.csv")
	}
}

// An output that is changed between the question whether it may be replaced and
// the end of the writing stays as it is; one that another fill wrote is replaced.
func TestAnOutputIsAskedAboutAgainWhenAllIsWritten(t *testing.T) {
	for kind, book := range faultyBooks(t) {
		d, plan, err := open(t.Context(), book, Options{})
		if err != nil {
			t.Fatal(err)
		}
		results, err := plan.Run(t.Context(), 1)
		if err != nil {
			t.Fatal(err)
		}
		c, err := d.changes(results)
		if err != nil {
			t.Fatal(err)
		}
		output := outputName(book)
		still, err := mayReplace(c, output)
		if err != nil {
			t.Fatal(err)
		}
		fill(t, book, Options{})
		if _, err := c.saveAs(output, still); err != nil {
			t.Errorf("%s: another fill came between: %v", kind, err)
		}
		if still, err = mayReplace(c, output); err != nil {
			t.Fatal(err)
		}
		write(t, output, "somebody's\n")
		if _, err := c.saveAs(output, still); err == nil || !strings.Contains(err.Error(), "--replace") || read(t, output) != "somebody's\n" {
			t.Errorf("%s: %v; it reads %q", kind, err, read(t, output))
		}
		d.Close()
		folderHolds(t, book, filepath.Base(output), filepath.Base(book), "data.csv")
	}
}

// What a data file becomes while it is read, or before, refuses the rows that
// read it, or leaves them as they were read; nothing else stops.
func TestADataFileThatIsNotThereAnyMoreRefusesItsRows(t *testing.T) {
	for kind, book := range faultyBooks(t) {
		data := filepath.Join(filepath.Dir(book), "data.csv")
		if err := during(t.Context(), book, Options{}, func() { _ = os.Remove(data) }); err != nil {
			t.Errorf("%s: removed when it was read: %v", kind, err)
		}
		for name, happen := range map[string]func() error{
			"removed":  func() error { return nil },
			"a folder": func() error { return os.Mkdir(data, 0o700) },
		} {
			_ = os.Remove(data)
			if err := happen(); err != nil {
				t.Fatal(err)
			}
			report, err := Fill(t.Context(), book, Options{Replace: true})
			if err != nil || report.Counts()["refused"] != 1 {
				t.Fatalf("%s, %s: %v", kind, name, err)
			}
			if note := report.Results.Rows[0].Findings[0].Message; !strings.Contains(note, "data.csv is not there") {
				t.Errorf("%s, %s: %s", kind, name, note)
			}
		}
	}
}

func TestAFillThatIsCancelledWritesNothing(t *testing.T) {
	for kind, book := range faultyBooks(t) {
		ctx, cancel := context.WithCancel(t.Context())
		if err := during(ctx, book, Options{}, cancel); !errors.Is(err, context.Canceled) {
			t.Errorf("%s: %v", kind, err)
		}
		folderHolds(t, book, filepath.Base(book), "data.csv")
	}
}

// Fills of one book at once all succeed, and the output is that of one.
func TestFillsOfOneBookAtOnceGiveOneWholeOutput(t *testing.T) {
	for kind, book := range faultyBooks(t) {
		fill(t, book, Options{})
		want := read(t, outputName(book))
		var all sync.WaitGroup
		for range 3 {
			all.Go(func() {
				for range 20 {
					if _, err := Fill(t.Context(), book, Options{}); err != nil {
						t.Errorf("%s: %v", kind, err)
					}
				}
			})
		}
		all.Wait()
		if read(t, outputName(book)) != want {
			t.Errorf("%s: the output has other bytes", kind)
		}
		folderHolds(t, book, filepath.Base(outputName(book)), filepath.Base(book), "data.csv")
	}
}
