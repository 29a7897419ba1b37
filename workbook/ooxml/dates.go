package ooxml

// Serial gives the serial number of a date in the 1900 system, or the 1904
// system: whole days, to which a time of day adds its fraction. In the 1900
// system day 60 is the 29th of February 1900, which never was.
func Serial(year, month, day int, date1904 bool) float64 { return 0 }

// DateOf gives the date of a serial number, and the seconds into its day.
// It is false for numbers that no date belongs to.
func DateOf(serial float64, date1904 bool) (year, month, day int, seconds float64, ok bool) {
	return 0, 0, 0, 0, false
}
