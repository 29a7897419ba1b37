package calculation_test

import (
	"fmt"
	"os"
	"strings"
	"testing"

	"halfwidth/workbook/calculation"
)

func ExampleParseExpression() {
	e, err := calculation.ParseExpression(`minutes IN Trips where depot = 'North' and minutes > 0`)
	fmt.Println(e, err)
	_, err = calculation.ParseExpression("12.1, 11.8")
	fmt.Println(err)
	// Output:
	// minutes in Trips where depot = "North" and minutes > 0 <nil>
	// character 5, at ,: write numbers with ; between them and . as the decimal mark
}

// Every expression that the README shows is one.
func TestTheExpressionsOfTheReadme(t *testing.T) {
	text, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	found := 0
	for line := range strings.Lines(string(text)) {
		expression, _, _ := strings.Cut(strings.TrimSpace(line), "   ")
		if !strings.HasPrefix(line, "      ") || !strings.Contains(expression, " in ") && !strings.Contains(expression, "!") && !strings.Contains(expression, "; ") || strings.ContainsAny(expression, `{[=>]`) && !strings.Contains(expression, "where") {
			continue
		}
		found++
		e, err := calculation.ParseExpression(expression)
		if err != nil {
			t.Errorf("%s: %v", expression, err)
			continue
		}
		if again, err := calculation.ParseExpression(e.String()); err != nil || again.String() != e.String() {
			t.Errorf("%s reads as %s, and that as %v (%v)", expression, e, again, err)
		}
	}
	if found < 8 {
		t.Errorf("%d expressions were found", found)
	}
}
