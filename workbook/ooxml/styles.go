package ooxml

// Format says what a cell's number format shows its number as.
type Format uint8

const (
	FormatNumber  Format = iota // a plain number, also General
	FormatPercent               // a percentage: 0.95 is shown as 95%
	FormatDate                  // a date, with or without a time of day
	FormatTime                  // a time of day without a date
	FormatElapsed               // an elapsed time, such as [h]:mm or mm:ss
	FormatText                  // text, also for numbers
)

// Format gives the format of a style, as in Cell.Style. Times of day and
// elapsed times are both durations, as fractions of a day.
func (b *Book) Format(style int) Format { return FormatNumber }
