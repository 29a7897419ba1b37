package ooxml

// Limits bound what one workbook may cost. A zero field stands for its default,
// so that the zero Limits is the safe choice.
type Limits struct {
	PartBytes  int64 // inflated bytes of one part; default 4 GiB
	TotalBytes int64 // inflated bytes of all parts that are read; default 8 GiB
	HeldBytes  int64 // inflated bytes of a part kept in memory (shared strings, styles, workbook); default 1 GiB
	Ratio      int64 // inflated to compressed size of a part, and of all parts read to the file's size; default 200
	RatioFrom  int64 // inflated bytes over which Ratio counts; default 16 MiB
	Entries    int   // entries of the zip file; default 10,000
	Names      int   // defined names; default 200,000
	Relations  int   // relationships of one part; default 200,000
	Rows       int   // highest row number; default 1,048,576
	Columns    int   // highest column number; default 16,384
	Depth      int   // nesting of XML elements; default 256
	TextLength int   // characters of one cell's text, as UTF-16 units; default 32,767
	TokenBytes int   // bytes of one XML tag or stretch of text; default 16 MiB
}

// The greatest sheet of the format (ECMA-376 part 1, 18.3.1.73 and 18.3.1.4,
// and the sizes that all spreadsheet programs agree on).
const (
	maxRows    = 1048576
	maxColumns = 16384
)

// WithDefaults gives the limits with each zero field set to its default, and
// with rows, columns and text no larger than the format has them.
func (l Limits) WithDefaults() Limits {
	set64 := func(field *int64, standard int64) {
		if *field <= 0 {
			*field = standard
		}
	}
	set := func(field *int, standard int) {
		if *field <= 0 {
			*field = standard
		}
	}
	set64(&l.PartBytes, 4<<30)
	set64(&l.TotalBytes, 8<<30)
	set64(&l.HeldBytes, 1<<30)
	set64(&l.Ratio, 200)
	set64(&l.RatioFrom, 16<<20)
	set(&l.Entries, 10000)
	set(&l.Names, 200000)
	set(&l.Relations, 200000)
	set(&l.Rows, maxRows)
	set(&l.Columns, maxColumns)
	set(&l.Depth, 256)
	set(&l.TextLength, 32767)
	set(&l.TokenBytes, 16<<20)
	l.Rows = min(l.Rows, maxRows)
	l.Columns = min(l.Columns, maxColumns)
	return l
}
