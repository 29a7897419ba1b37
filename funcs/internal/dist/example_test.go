package dist_test

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
)

// The tables of Student's t print 2.228 for 10 degrees of freedom and 2.5% above.
func ExampleStudent() {
	law := dist.Student{DF: 10}
	fmt.Printf("%.3f\n", law.UpperQuantile(0.025))
	// Far out, one less the other tail would leave no digit.
	fmt.Println(1-law.CDF(1e9), law.SF(1e9) > 0)
	// Output:
	// 2.228
	// 0 true
}
