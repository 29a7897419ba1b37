package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// StudentizedRanges are the laws of the range of one number of groups with many
// different degrees of freedom. They share the integrals over the position of the
// variables, so that each further probability takes some 20 microseconds, each
// further quantile some 70, or less than 1 by UpperQuantiles. To 1e-12 they are
// those of StudentizedRange. Several goroutines may use them.
type StudentizedRanges struct {
	groups int
	table  tailTable
}

// NewStudentizedRanges gives the laws for so many groups.
func NewStudentizedRanges(groups int) *StudentizedRanges {
	k := normalRange(groups)
	return &StudentizedRanges{groups: groups, table: tailTable{tail: k.tail, bound: k.bound}}
}

// Law is the law with df degrees of freedom.
func (r *StudentizedRanges) Law(df float64) StudentizedRange {
	return StudentizedRange{r.groups, df, &r.table}
}

// UpperQuantiles gives the value with upper tail p as a function of the degrees of
// freedom: its logarithm is interpolated over the logarithm of df.
func (r *StudentizedRanges) UpperQuantiles(p float64) func(df float64) float64 {
	panels := make([]panel, 24) // df from 1 to 1e10
	return func(df float64) float64 {
		u := num.Log(df)
		number := math.Floor(u)
		if !(number >= 0 && number < float64(len(panels))) {
			return r.Law(df).UpperQuantile(p)
		}
		quantile := &panels[int(number)]
		quantile.fill.Do(func() {
			quantile.fit(number, number+1, false, func(u float64) float64 { return num.Log(r.Law(num.Exp(u)).UpperQuantile(p)) })
		})
		if !quantile.good {
			return r.Law(df).UpperQuantile(p)
		}
		return num.Exp(quantile.value(2*(u-number) - 1))
	}
}
