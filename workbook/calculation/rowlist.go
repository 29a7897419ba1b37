package calculation

// rowList is the rows that the values of a sample stand in. Rows one below the
// other, as of a whole column, are kept as the first of them alone.
type rowList struct {
	n     int
	first int
	list  []int32 // nil while each row is the one below the row before, unless there is room for them
	lent  bool    // list belongs to an index of the sheet, and holds all rows to come
}

// add adds a row.
func (l *rowList) add(row int) {
	switch {
	case l.lent:
	case l.list != nil:
		l.list = append(l.list, int32(row))
	case l.n == 0:
		l.first = row
	case row != l.first+l.n:
		l.list = make([]int32, l.n, 2*l.n)
		for i := range l.list {
			l.list[i] = int32(l.first + i)
		}
		l.list = append(l.list, int32(row))
	}
	l.n++
}

// at gives the row of value i.
func (l *rowList) at(i int) int {
	if l.list != nil {
		return int(l.list[i])
	}
	return l.first + i
}
