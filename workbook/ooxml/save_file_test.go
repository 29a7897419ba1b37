package ooxml

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"sync"
	"testing"
	"time"
)

func writeText(text string) func(io.Writer) error {
	return func(w io.Writer) error {
		_, err := io.WriteString(w, text)
		return err
	}
}

func nothingElse() error { return nil }

// leave puts a temporary file there that no process holds, old enough also for
// systems where files cannot be locked.
func leave(t *testing.T, name string) {
	t.Helper()
	if err := os.WriteFile(name, []byte("half of"), 0o600); err != nil {
		t.Fatal(err)
	}
	old := time.Now().Add(-2 * staleAfter)
	if err := os.Chtimes(name, old, old); err != nil {
		t.Fatal(err)
	}
}

func TestASaveRemovesWhatKilledSavesOfItsTargetLeft(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "Trips.xlsx")
	for _, i := range []int{1, 2, tempNames} {
		leave(t, tempName(path, i))
	}
	other := tempName(filepath.Join(dir, "Costs.xlsx"), 1)
	leave(t, other)
	if err := replace(path, 0o640, writeText("whole"), nothingElse); err != nil {
		t.Fatal(err)
	}
	onlyFiles(t, dir, filepath.Base(other), "Trips.xlsx")
	if got := fileBytes(t, path); string(got) != "whole" {
		t.Errorf("it holds %q", got)
	}
}

func TestSavesOfOneTargetAtOnceKeepClearOfEachOther(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "Trips.xlsx")
	inner := func() error { return replace(path, 0o640, writeText("inner"), nothingElse) }
	err := replace(path, 0o640, writeText("outer"), func() error {
		if err := inner(); err != nil {
			return err
		}
		if got := fileBytes(t, path); string(got) != "inner" {
			t.Errorf("it holds %q", got)
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if got := fileBytes(t, path); string(got) != "outer" {
		t.Errorf("it holds %q", got)
	}
	onlyFiles(t, dir, "Trips.xlsx")

	var all sync.WaitGroup
	for i := range tempNames / 2 {
		all.Go(func() {
			for k := range 50 {
				if err := replace(path, 0o640, writeText(fmt.Sprintf("%d %03d", i, k)), nothingElse); err != nil {
					t.Error(err)
				}
			}
		})
	}
	all.Wait()
	if got := fileBytes(t, path); len(got) != len("0 049") || string(got[1:]) != " 049" {
		t.Errorf("it holds %q", got)
	}
	onlyFiles(t, dir, "Trips.xlsx")
}

func TestASaveThatFailsLeavesTheTargetAndNothingElse(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "Trips.xlsx")
	if err := replace(path, 0o640, writeText("old"), nothingElse); err != nil {
		t.Fatal(err)
	}
	for name, err := range map[string]error{
		"while writing": replace(path, 0o640, func(w io.Writer) error {
			if err := writeText("half")(w); err != nil {
				return err
			}
			return io.ErrShortWrite
		}, nothingElse),
		"before the rename": replace(path, 0o640, writeText("new"), func() error { return io.ErrShortWrite }),
	} {
		if err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if got := fileBytes(t, path); string(got) != "old" {
		t.Errorf("it holds %q", got)
	}
	onlyFiles(t, dir, "Trips.xlsx")
}
