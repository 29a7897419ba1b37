package funcs

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// untested gives the reason for published rows that no test names; patterns
// match a row's id, or the id of its table. Rows of a topic that a test goes
// through but cannot use are listed with their reasons there (see leftOut).
var untested = map[string]string{
	`^nist-prc-262\.90th_percentile$`: "sample-summary gives quartiles, no other percentiles",
	`^cohen1992-chi2`:                 "no plan for a chi-square test of a table",
	`^nist-prc-232\.r$`:               "a ratio of the plan's own inputs; the plan's size is tested",
	`^gum-h2b\.`:                      "correlations among three derived quantities, which no function gives",
	`^cochran-normal-approx$`:         "a rule for counts, which no function gives",
	`^cochran-skewness-rule$`:         "a rule and not a value; enough-n-for-mean is held to its formula",
}

// Every published row is named by a test, through its topic, its table, its
// example or itself, or is left out with a reason.
func TestEveryPublishedRowIsTestedOrLeftOutWithAReason(t *testing.T) {
	var sources strings.Builder
	for _, pattern := range []string{"*_test.go", "internal/*/*_test.go"} {
		files, err := filepath.Glob(pattern)
		if err != nil {
			t.Fatal(err)
		}
		for _, file := range files {
			if file == "published_ledger_test.go" {
				continue
			}
			text, err := os.ReadFile(file)
			if err != nil {
				t.Fatal(err)
			}
			sources.Write(text)
		}
	}
	tests := sources.String()
	used := map[string]bool{}
	check := func(id string, names ...string) {
		for _, name := range names {
			if strings.Contains(tests, `"`+name+`"`) || strings.Contains(tests, `"`+name+`.`) {
				return
			}
		}
		for pattern, reason := range untested {
			if reason != "" && regexp.MustCompile(pattern).MatchString(id) {
				used[pattern] = true
				return
			}
		}
		t.Errorf("%s: no test names it, and no reason is given", id)
	}
	for _, r := range csvRows(t, published+"examples.csv") {
		if r["reproduced"] != "no" {
			check(r["id"], r["topic"], r["example"], r["id"])
		}
	}
	for _, r := range csvRows(t, published+"tables.csv") {
		check(r["table_id"], r["table_id"])
	}
	for pattern := range untested {
		if !used[pattern] {
			t.Errorf("the reason for %s is not needed", pattern)
		}
	}
}
