package texttab_test

import (
	"fmt"
	"os"

	"halfwidth/cmd/internal/texttab"
)

func ExampleTable_Write() {
	t := texttab.Table{
		Columns: []texttab.Column{{Name: "depot"}, {Name: "mean", Right: true}},
		Rows: []texttab.Row{
			{Cells: []any{"North", 30.736570561456748}, Notes: []string{"4 cells were skipped."}},
			{Cells: []any{"Quay", 9.5}},
		},
	}
	for _, format := range []texttab.Format{texttab.Text, texttab.CSV} {
		if err := t.Write(os.Stdout, format); err != nil {
			fmt.Println(err)
		}
	}
	// Output:
	// depot     mean
	// North  30.7366  [1]
	// Quay    9.5
	//
	// [1] 4 cells were skipped.
	// depot,mean,notes
	// North,30.736570561456748,4 cells were skipped.
	// Quay,9.5,
}
