package workbook_test

import (
	"context"
	"fmt"
	"os"
	"path/filepath"

	"halfwidth/workbook"
)

// A text calculation sheet is filled as a workbook is; the output stands beside
// it.
func ExampleFill() {
	dir, err := os.MkdirTemp("", "example")
	if err != nil {
		fmt.Println(err)
		return
	}
	defer os.RemoveAll(dir)
	path := filepath.Join(dir, "trips.calculations.csv")
	if err := os.WriteFile(path, []byte("work out,sample,> mean,> n\nmean-interval,12; 13; 14; 17,,\n"), 0o600); err != nil {
		fmt.Println(err)
		return
	}
	report, err := workbook.Fill(context.Background(), path, workbook.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	text, err := os.ReadFile(report.Saved.Path)
	fmt.Printf("%s, %d cells, %v\n%s", filepath.Base(report.Saved.Path), report.Saved.Cells, err, text)
	// Output:
	// trips-filled.calculations.csv, 2 cells, <nil>
	// work out,sample,> mean,> n
	// mean-interval,12; 13; 14; 17,14,4
}
