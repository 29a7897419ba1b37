package funcs

import (
	"cmp"
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestClosestNamesForgiveCaseHyphensAndSlips(t *testing.T) {
	names := []string{"mean-interval", "median-interval", "minutes", "Trips"}
	for written, want := range map[string]string{"Mean interval": "mean-interval", "mintues": "minutes", "trips": "Trips", "mean-intervl": "mean-interval"} {
		if got := Closest(written, names); len(got) == 0 || got[0] != want {
			t.Errorf("Closest(%q) = %v, want %q first", written, got, want)
		}
	}
	for _, strange := range []string{"zzzzzz", strings.Repeat("minutes", 1<<20)} {
		if got := Closest(strange, names); len(got) != 0 {
			t.Errorf("Closest(%.20s) = %v, want none", strange, got)
		}
	}
}

// The quick search gives what counting the edits of every name gives.
func TestClosestIsTheNearestOfAll(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	text := func() string {
		b := make([]rune, random.IntN([]int{9, 30}[random.IntN(2)]))
		for i := range b {
			b[i] = []rune("aabcé -")[random.IntN(7)]
		}
		return string(b)
	}
	plain := func(s string) string { return strings.NewReplacer(" ", "", "-", "").Replace(s) }
	found := 0
	for range 2000 {
		written, names := text(), make([]string, random.IntN(8))
		for i := range names {
			names[i] = text()
			if w := []rune(written); len(w) > 2 && random.IntN(2) == 0 { // the same with slips
				for range random.IntN(9) {
					k := 1 + random.IntN(len(w)-1)
					w[k], w[k-1] = w[k-1], []rune(text() + "bc")[0]
				}
				names[i] = string(w)
			}
		}
		distance := func(name string) int {
			a, b := []rune(plain(written)), []rune(plain(name))
			most := max(1, max(len(a), len(b))/3)
			d := edits(a, b)
			if d > most && min(len(a), len(b)) >= 3 && strings.Contains(plain(name), plain(written)) {
				return max(len(a), len(b))/3 + 1
			}
			if d > most {
				return -1
			}
			return d
		}
		want := slices.DeleteFunc(slices.Clone(names), func(name string) bool { return distance(name) < 0 })
		slices.SortFunc(want, func(a, b string) int { return cmp.Or(cmp.Compare(distance(a), distance(b)), cmp.Compare(a, b)) })
		want = want[:min(3, len(want))]
		if got := Closest(written, names); !slices.Equal(got, want) {
			t.Fatalf("Closest(%q, %q) = %q, want %q", written, names, got, want)
		}
		found += len(want)
	}
	if found < 1000 {
		t.Errorf("only %d names were near", found)
	}
}

// edits is the optimal string alignment distance, as its definition has it.
func edits(a, b []rune) int {
	d := make([][]int, len(a)+1)
	for i := range d {
		d[i] = make([]int, len(b)+1)
		for j := range d[i] {
			switch {
			case i == 0 || j == 0:
				d[i][j] = i + j
			case a[i-1] == b[j-1]:
				d[i][j] = d[i-1][j-1]
			default:
				d[i][j] = 1 + min(d[i-1][j], d[i][j-1], d[i-1][j-1])
			}
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				d[i][j] = min(d[i][j], 1+d[i-2][j-2])
			}
		}
	}
	return d[len(a)][len(b)]
}

func TestClosestOfAHundredThousandNamesIsQuick(t *testing.T) {
	names := make([]string, 100_000)
	for i := range names {
		names[i] = fmt.Sprintf("Route %d, stop %d", i/300, i%300)
	}
	ready := NewNameList(names)
	start := time.Now()
	const most = 10
	for range most {
		if got := ready.Closest("Ruote 77, stop 12"); len(got) == 0 || got[0] != "Route 77, stop 12" {
			t.Fatalf("got %q", got)
		}
	}
	t.Logf("%v each", time.Since(start)/most)
	long := []string{strings.Repeat("a", 1<<20), strings.Repeat("A", 1<<20+1) + "b"}
	if got := Closest(long[0], long); len(got) != 2 || got[0] != long[0] { // as they stand in both
		t.Errorf("%d of two long names are near", len(got))
	}
}
