package page_test

import (
	"context"
	"fmt"
	"strings"

	"halfwidth/workbook"
	"halfwidth/workbook/page"
)

func ExampleWrite() {
	ctx := context.Background()
	report, err := workbook.Work(ctx, "../../testdata/workbooks/handling.calculations.csv", workbook.Options{KeepValues: true})
	if err != nil {
		fmt.Println(err)
		return
	}
	var html strings.Builder
	err = page.Write(ctx, &html, report)
	// A picture for each of the five questions, and no script.
	fmt.Println(strings.Count(html.String(), "<svg"), strings.Contains(html.String(), "<script"), err)
	// Output: 5 false <nil>
}
