package funcs_test

import (
	"context"
	"errors"
	"fmt"

	"halfwidth/funcs"
)

func ExampleFunction_Answer() {
	f, err := funcs.Lookup("mean-interval")
	if err != nil {
		fmt.Println(err)
		return
	}
	out, err := f.Answer(context.Background(), map[string]any{"sample": []float64{12.1, 11.8, 12.6, 12.0, 12.4}, "confidence": 0.99})
	if err != nil {
		fmt.Println(err)
		return
	}
	lower, _ := out.Get("lower")
	upper, _ := out.Get("upper")
	// t of 4 degrees of freedom at 0.995 is 4.60409 in the printed tables, the mean 12.18, the sd 0.319374.
	fmt.Printf("%s: %.4f to %.4f\n", out.Status, lower, upper)
	// Output: ok: 11.5224 to 12.8376
}

func ExampleFunction_Answer_refused() {
	f, _ := funcs.Lookup("mean-interval")
	out, err := f.Answer(context.Background(), map[string]any{"sample": []float64{2, 2, 2}})
	fmt.Println(out.Status, out.Findings[0].Code, err)
	_, err = f.Answer(context.Background(), map[string]any{"sample": []float64{1, 2, 3}, "confidence": 95.0})
	var wrong funcs.ArgumentErrors
	fmt.Println(errors.As(err, &wrong))
	// Output:
	// refused no-spread <nil>
	// true
}
