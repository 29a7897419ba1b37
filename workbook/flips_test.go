package workbook

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"halfwidth/workbook/ooxml"
)

// answers writes down what a fill of a book gave: all result cells.
func answers(t *testing.T, dir string, data []byte) (string, error) {
	t.Helper()
	path := filepath.Join(dir, "book.xlsx")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	report, err := Fill(context.Background(), path, Options{Replace: true})
	if err != nil {
		return "", err
	}
	var s strings.Builder
	for _, row := range report.Results.Rows {
		fmt.Fprintln(&s, row.Status, row.Edits)
	}
	return s.String(), nil
}

// damages fills damaged copies of a book. Each must be refused, or give the same
// answers, never others.
func damages(t *testing.T, good []byte, copies func(yield func(name string, data []byte) bool)) (refused, same int) {
	t.Helper()
	dir := t.TempDir()
	want, err := answers(t, dir, good)
	if err != nil {
		t.Fatal(err)
	}
	for name, data := range copies {
		got, err := answers(t, dir, data)
		var refusal *ooxml.Error
		switch {
		case err == nil && got == want:
			same++
		case err == nil:
			t.Errorf("%s: other answers:\n%s\nwant\n%s", name, got, want)
		case !errors.As(err, &refusal) || refusal.Kind == nil || refusal.Reason == "":
			t.Errorf("%s: refused without a kind or a reason: %v", name, err)
		default:
			refused++
		}
	}
	return refused, same
}

func TestATruncatedBookIsRefused(t *testing.T) {
	good, err := os.ReadFile(demo)
	if err != nil {
		t.Fatal(err)
	}
	_, same := damages(t, good, func(yield func(string, []byte) bool) {
		for i := range 16 {
			if n := len(good) * i / 16; !yield(fmt.Sprintf("the first %d bytes", n), good[:n]) {
				return
			}
		}
		for n := 1; n <= 32; n++ {
			if !yield(fmt.Sprintf("without the last %d bytes", n), good[:len(good)-n]) {
				return
			}
		}
	})
	if same > 0 {
		t.Errorf("%d truncated books were read", same)
	}
}

// One changed byte of the demo workbook: anywhere, and in the headers and the
// directory, which no checksum covers, at every byte of a smaller book.
func TestAChangedByteGivesNoOtherAnswer(t *testing.T) {
	good, err := os.ReadFile(demo)
	if err != nil {
		t.Fatal(err)
	}
	random := rand.New(rand.NewPCG(1, 2))
	count, step := 120, 1
	if testing.Short() {
		count, step = 10, 41
	}
	refused, same := damages(t, good, func(yield func(string, []byte) bool) {
		for range count {
			at, change := random.IntN(len(good)), byte(1+random.IntN(255))
			data := bytes.Clone(good)
			data[at] ^= change
			if !yield(fmt.Sprintf("byte %d ^ %#02x", at, change), data) {
				return
			}
		}
	})
	t.Logf("demo workbook: %d refused, %d with the same answers", refused, same)
	small := plainBook().with("xl/worksheets/_rels/sheet1.xml.rels", relsA+relation("t", "table", "../t.xml")+`</Relationships>`).
		with("xl/t.xml", xmlHead+`<table xmlns="`+mainSpace+`" displayName="Deliveries" ref="A1:B7"><tableColumns><tableColumn name="depot"/><tableColumn name="minutes"/></tableColumns></table>`).
		with(questionPart, question("minutes in Deliveries")).zip(t, "")
	refused, same = damages(t, small, func(yield func(string, []byte) bool) {
		for at := 0; at < len(small); at += step {
			change := byte(1 + random.IntN(255))
			data := bytes.Clone(small)
			data[at] ^= change
			if !yield(fmt.Sprintf("byte %d ^ %#02x", at, change), data) {
				return
			}
		}
	})
	t.Logf("small workbook: %d refused, %d with the same answers", refused, same)
}
