package ooxml_test

import (
	"fmt"

	"halfwidth/workbook/ooxml"
)

// One column of a sheet of the demo workbook, read in one pass.
func ExampleBook_Scan() {
	book, err := ooxml.Open("../../testdata/workbooks/larkmoor.xlsx", ooxml.Limits{})
	if err != nil {
		fmt.Println(err)
		return
	}
	defer book.Close()
	wanted := new(ooxml.Columns)
	wanted.Add(5)
	numbers, others := 0, 0
	facts, err := book.Scan(book.SheetIndex("Trips"), ooxml.ScanOptions{Columns: wanted}, func(row *ooxml.Row) error {
		for _, cell := range row.Cells {
			if cell.Type == ooxml.TypeNumber {
				numbers++
			} else {
				others++
			}
		}
		return nil
	})
	// The header and four remarks are texts; the other trips have no minutes.
	fmt.Println(numbers, others, facts.LastRow, err)
	// Output: 1967 5 2001 <nil>
}
