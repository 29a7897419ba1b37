package rpc

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// plainChange makes a change the slow way: lines counted from the start, columns
// by going through the characters of the line.
func plainChange(text string, utf8 bool, c textChange) string {
	if c.Range == nil {
		return c.Text
	}
	at := func(p position) int {
		line, i := 0, 0
		for line < p.Line {
			end := strings.IndexAny(text[i:], "\r\n")
			if end < 0 {
				return len(text)
			}
			i += end + 1
			if text[i-1] == '\r' && i < len(text) && text[i] == '\n' {
				i++
			}
			line++
		}
		for column := 0; i < len(text) && text[i] != '\r' && text[i] != '\n'; {
			r := []rune(text[i:])[0]
			size := 1
			switch {
			case utf8:
				size = len(string(r))
			case r > 0xffff:
				size = 2
			}
			if column += size; column > p.Character {
				break
			}
			i += len(string(r))
		}
		return i
	}
	from, to := at(c.Range.Start), at(c.Range.End)
	if from > to {
		from, to = to, from
	}
	return text[:from] + c.Text + text[to:]
}

// checkChanges compares changes made at once with the same made one by one the
// slow way, and the kept line starts with those of the whole text.
func checkChanges(t *testing.T, text string, utf8 bool, changes []textChange) {
	t.Helper()
	got := newLines(text, utf8).changed(changes)
	want := text
	for _, c := range changes {
		want = plainChange(want, utf8, c)
	}
	if got.text != want {
		t.Fatalf("%q after %v is %q, want %q", text, changes, got.text, want)
	}
	if whole := newLines(want, utf8); !slices.Equal(got.starts, whole.starts) {
		t.Fatalf("%q after %v: the lines of %q start at %v, want %v", text, changes, want, got.starts, whole.starts)
	}
	for offset := range len(want) + 1 {
		p := got.position(offset)
		if back := got.offset(p); back != offset && offset < len(want) && want[offset] < 0x80 && !(offset > 0 && want[offset-1] == '\r' && want[offset] == '\n') {
			t.Fatalf("offset %d of %q is %v, which is offset %d", offset, want, p, back)
		}
	}
}

func TestManyChangesGiveTheWholeText(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	pieces := []string{"", "a", ",", "\n", "\r", "\r\n", "ä", "😀", "\n\r", "minutes in Trips\n", "\r\r\n\n"}
	some := func() string {
		var b strings.Builder
		for range random.IntN(6) {
			b.WriteString(pieces[random.IntN(len(pieces))])
		}
		return b.String()
	}
	for range 20_000 {
		var changes []textChange
		for range random.IntN(5) {
			c := textChange{Text: some()}
			if random.IntN(12) > 0 {
				c.Range = &textRange{position{random.IntN(6), random.IntN(6)}, position{random.IntN(6), random.IntN(6)}}
			}
			changes = append(changes, c)
		}
		checkChanges(t, some()+some(), random.IntN(2) == 0, changes)
	}
}

func TestColumnsAreCountedAsTheClientDoes(t *testing.T) {
	text := "ab😀é,x\n"
	for _, c := range []struct {
		utf8      bool
		character int
		offset    int
	}{{false, 2, 2}, {false, 3, 2}, {false, 4, 6}, {false, 5, 8}, {false, 6, 9}, {false, 99, 10}, {true, 2, 2}, {true, 4, 2}, {true, 6, 6}, {true, 7, 6}, {true, 8, 8}, {true, 99, 10}, {false, -1, 0}} {
		l := newLines(text, c.utf8)
		if got := l.offset(position{0, c.character}); got != c.offset {
			t.Errorf("column %d (utf-8: %v) is offset %d, want %d", c.character, c.utf8, got, c.offset)
		}
	}
	for _, p := range []position{{5, 0}, {1, 0}, {2, 7}} {
		if got := newLines(text, false).offset(p); got != len(text) {
			t.Errorf("%v is offset %d, want the end", p, got)
		}
	}
}

func FuzzChanges(f *testing.F) {
	f.Add("work out,> mean\r\nmean-interval,\r\n", false, 1, 3, 1, 5, "😀\r", 0, 0, 2, 0, "\n")
	f.Add("a\rb\nc", true, 0, 1, 1, 0, "\n", 0, 0, 9, 9, "")
	f.Fuzz(func(t *testing.T, text string, utf8 bool, l1, c1, l2, c2 int, new1 string, l3, c3, l4, c4 int, new2 string) {
		for _, s := range []string{text, new1, new2} {
			if strings.ToValidUTF8(s, "") != s {
				return // messages are valid UTF-8
			}
		}
		for _, n := range []int{l1, l2, l3, l4, c1, c2, c3, c4} {
			if n < 0 || n > 1<<31-1 {
				return // LSP counts with unsigned 31 bits
			}
		}
		checkChanges(t, text, utf8, []textChange{{&textRange{position{l1, c1}, position{l2, c2}}, new1}, {&textRange{position{l3, c3}, position{l4, c4}}, new2}})
	})
}

// A replacement in every row of a long sheet comes as one change a row.
func BenchmarkAChangeInEveryOf5000Rows(b *testing.B) {
	var text strings.Builder
	text.WriteString("work out,label,sample,> mean,> lower,> upper\n")
	for i := range 5000 {
		fmt.Fprintf(&text, "mean-interval,row %d,minutes in trips.csv where depot = North and route = %d,,,\n", i, i)
	}
	var changes []textChange
	for i := range 5000 {
		changes = append(changes, textChange{&textRange{position{i + 1, 0}, position{i + 1, 4}}, "mean"})
	}
	l := newLines(text.String(), false)
	b.SetBytes(int64(len(l.text)))
	for b.Loop() {
		l.changed(changes)
	}
}
