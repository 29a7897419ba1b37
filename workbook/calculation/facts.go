package calculation

import (
	"slices"
	"sync"

	"halfwidth/funcs"
)

// facts are what several expressions over one sheet need to know of its rows;
// each is found once.
type facts struct {
	mu       sync.Mutex
	columns  map[rowsOfColumn]*columnFacts
	repeated map[string][]int
	gaps     map[[2]int][]gap
	indexes  map[rowsOfColumn]*index
}

// rowsOfColumn is a column from one row to another.
type rowsOfColumn struct{ col, first, last int }

// columnFacts is what a stretch of a column holds. Rows are the first of their
// kind, 0 where there is none.
type columnFacts struct {
	texts     []uint32 // the texts that stand in it, each once
	counts    []int32  // by text: how many rows hold it
	isTrue    bool
	isFalse   bool
	covered   int // inside a merged range
	unsaved   int // a formula without a saved value
	durations int

	valuesOnce sync.Once
	values     []string        // the texts, without outer space, as far as they are looked through
	near       *funcs.NameList // of the values
}

// mostValues is how many values of a column are looked through for near ones.
const mostValues = 100000

// prepareValues lists the values, unless that was done before.
func (f *columnFacts) prepareValues(texts []string) {
	f.valuesOnce.Do(func() {
		seen := map[string]bool{}
		for _, id := range f.texts {
			if text := trim(texts[id]); text != "" && !seen[text] && len(f.values) < mostValues {
				seen[text] = true
				f.values = append(f.values, text)
			}
		}
		slices.Sort(f.values)
		f.near = funcs.NewNameList(f.values)
	})
}

// gap is a stretch of rows that are blank across the sheet.
type gap struct{ first, last int }

// columnFacts looks through a column, unless that was done before.
func (sh *sheet) columnFacts(col, first, last int) *columnFacts {
	sh.facts.mu.Lock()
	defer sh.facts.mu.Unlock()
	return sh.columnFactsLocked(col, first, last)
}

// columnFactsLocked is columnFacts for a caller that holds the lock.
func (sh *sheet) columnFactsLocked(col, first, last int) *columnFacts {
	key := rowsOfColumn{col, first, last}
	if f, ok := sh.facts.columns[key]; ok {
		return f
	}
	f := &columnFacts{counts: make([]int32, len(sh.frame.texts))}
	c := sh.frame.column(col)
	note := func(at *int, row int) {
		if *at == 0 {
			*at = row
		}
	}
	for row := first; row <= last; row++ {
		kind, flags := c.kind(row)
		switch kind {
		case Text:
			id := c.text(row)
			if f.counts[id] == 0 {
				f.texts = append(f.texts, id)
			}
			f.counts[id]++
		case Bool:
			f.isTrue = f.isTrue || flags&isTrue != 0
			f.isFalse = f.isFalse || flags&isTrue == 0
		case Duration:
			note(&f.durations, row)
		}
		if flags&isCovered != 0 {
			note(&f.covered, row)
		}
		if flags&IsUnsaved != 0 {
			note(&f.unsaved, row)
		}
	}
	if sh.facts.columns == nil {
		sh.facts.columns = map[rowsOfColumn]*columnFacts{}
	}
	sh.facts.columns[key] = f
	return f
}

// gaps lists the stretches of blank rows between two rows.
func (sh *sheet) gaps(first, last int) []gap {
	sh.facts.mu.Lock()
	defer sh.facts.mu.Unlock()
	key := [2]int{first, last}
	if g, ok := sh.facts.gaps[key]; ok {
		return g
	}
	var gaps []gap
	for row := first; row <= last; row++ {
		if sh.frame.Row(row)&RowFilled != 0 {
			continue
		}
		if n := len(gaps); n > 0 && gaps[n-1].last == row-1 {
			gaps[n-1].last = row
		} else {
			gaps = append(gaps, gap{row, row})
		}
	}
	if sh.facts.gaps == nil {
		sh.facts.gaps = map[[2]int][]gap{}
	}
	sh.facts.gaps[key] = gaps
	return gaps
}

// repeatedHeaders lists the rows below a header in which every column of the
// query reads as in the header.
func (b *bound) repeatedHeaders() []int {
	if len(b.cols) == 0 {
		return nil
	}
	sh := b.at.sheet
	sh.facts.mu.Lock()
	defer sh.facts.mu.Unlock()
	key := ""
	for _, n := range append([]int{b.header, b.last}, b.cols...) {
		key += decimal(n) + " "
	}
	if rows, ok := sh.facts.repeated[key]; ok {
		return rows
	}
	lead := sh.frame.column(b.cols[0])
	head := headerForm(headerText(sh.frame.At(b.header, b.cols[0])))
	same := make([]uint8, len(sh.frame.texts)) // 1: reads as the header, 2: does not
	var rows []int
	for row := b.first; row <= b.last; row++ {
		if kind, _ := lead.kind(row); kind != Text {
			continue
		}
		id := lead.text(row)
		if same[id] == 0 {
			same[id] = 2
			if headerForm(sh.frame.texts[id]) == head {
				same[id] = 1
			}
		}
		if same[id] == 1 && !slices.ContainsFunc(b.cols, func(col int) bool {
			return headerForm(headerText(sh.frame.At(row, col))) != headerForm(headerText(sh.frame.At(b.header, col)))
		}) {
			rows = append(rows, row)
		}
	}
	if sh.facts.repeated == nil {
		sh.facts.repeated = map[string][]int{}
	}
	sh.facts.repeated[key] = rows
	return rows
}

// index lists the rows of each text of a column, and those of all cells that
// are neither text nor blank.
type index struct {
	rows   [][]int32 // by text
	others []int32
}

// indexFrom is the number of rows from which an index pays.
const indexFrom = 20_000

// index makes the index of a column, unless that was done before.
func (sh *sheet) index(col, first, last int) *index {
	sh.facts.mu.Lock()
	defer sh.facts.mu.Unlock()
	key := rowsOfColumn{col, first, last}
	if x, ok := sh.facts.indexes[key]; ok {
		return x
	}
	x := &index{rows: make([][]int32, len(sh.frame.texts))}
	c := sh.frame.column(col)
	counts := sh.columnFactsLocked(col, first, last).counts
	for row := first; row <= last; row++ {
		switch kind, _ := c.kind(row); kind {
		case Blank:
		case Text:
			id := c.text(row)
			if x.rows[id] == nil {
				x.rows[id] = make([]int32, 0, counts[id])
			}
			x.rows[id] = append(x.rows[id], int32(row))
		default:
			x.others = append(x.others, int32(row))
		}
	}
	if sh.facts.indexes == nil {
		sh.facts.indexes = map[rowsOfColumn]*index{}
	}
	sh.facts.indexes[key] = x
	return x
}

// candidates lists the rows that a condition for equal texts may meet or leave
// undecided, in order. It is false where looking through all rows is as quick.
func (g *gathering) candidates() ([]int32, bool) {
	if g.last-g.first < indexFrom {
		return nil, false
	}
	sh := g.at.sheet
	for i, t := range g.tests {
		if op := t.condition.Op; op != Equal && op != IsOneOf || len(t.words) == 0 || t.column == nil {
			continue
		}
		x := sh.index(t.column.col, g.first, g.last)
		lists := [][]int32{x.others}
		n := len(x.others)
		for _, id := range sh.columnFacts(t.column.col, g.first, g.last).texts {
			if t.onText(sh.frame.texts[id]) == meets {
				lists = append(lists, x.rows[id])
				n += len(x.rows[id])
			}
		}
		if n > (g.last-g.first)/2 {
			continue
		}
		if len(lists) == 2 && len(x.others) == 0 {
			g.tests = slices.Delete(g.tests, i, i+1) // all these rows meet it
			return lists[1], true
		}
		rows := slices.Concat(lists...)
		slices.Sort(rows)
		return rows, true
	}
	return nil, false
}
