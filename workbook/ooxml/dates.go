package ooxml

import (
	"math"
	"time"
)

const (
	daySeconds = 86400
	// The serial number after the last day of the year 9999, in the 1900 system.
	lastSerial = 2958466
	// Days from the 1900 system's day 0 to the 1904 system's.
	days1904 = 1462
)

// dayZero is the day before serial number 1 would be the 1st of January 1900 if
// that year had had a 29th of February, as the 1900 system has it.
var dayZero = time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC).Unix() / daySeconds

// Serial gives the serial number of a date in the 1900 system, or the 1904
// system: whole days, to which a time of day adds its fraction. In the 1900
// system day 60 is the 29th of February 1900, which never was (ECMA-376 part 1,
// 18.17.4.1).
func Serial(year, month, day int, date1904 bool) float64 {
	if year == 1900 && month == 2 && day == 29 && !date1904 {
		return 60
	}
	days := time.Date(year, time.Month(month), day, 0, 0, 0, 0, time.UTC).Unix()/daySeconds - dayZero
	switch {
	case date1904:
		days -= days1904
	case days <= 60:
		days--
	}
	return float64(days)
}

// DateOf gives the date of a serial number, and the seconds into its day to the
// nearest microsecond. It is false for numbers that no date belongs to: those
// below 0, and those after the year 9999. Day 0 of the 1900 system is the 31st
// of December 1899.
func DateOf(serial float64, date1904 bool) (year, month, day int, seconds float64, ok bool) {
	if !(serial >= 0 && serial < lastSerial) {
		return 0, 0, 0, 0, false
	}
	whole, fraction := math.Modf(serial)
	days := int64(whole)
	seconds = math.Round(float64(fraction*daySeconds)*1e6) / 1e6
	if seconds >= daySeconds {
		seconds -= daySeconds
		days++
	}
	switch {
	case date1904:
		days += days1904
	case days == 60:
		return 1900, 2, 29, seconds, true
	case days < 60:
		days++
	}
	if days >= lastSerial {
		return 0, 0, 0, 0, false
	}
	t := time.Unix((days+dayZero)*daySeconds, 0).UTC()
	return t.Year(), int(t.Month()), t.Day(), seconds, true
}

// parseDate reads the date, time of day, or both that a cell of the type d holds
// (ISO 8601, as ECMA-376 part 1, 18.18.11 has it) as a serial number, and tells
// whether it is a time of day alone. A zone is passed over: the cell means the
// time that it shows. The 30th of December 1899, from which strict books count
// (18.17.4.1), is day 0 like the day after it.
func parseDate(text []byte, date1904 bool) (serial float64, clock, ok bool) {
	s := string(text)
	for _, layout := range [...]string{"2006-01-02", "2006-01-02T15:04:05", "2006-01-02T15:04:05Z07:00", "2006-01-02 15:04:05",
		"2006-01-02T15:04", "2006-01-02T15:04Z07:00", "15:04:05", "15:04"} {
		t, err := time.Parse(layout, s)
		if err != nil {
			continue
		}
		since := time.Duration(t.Hour())*time.Hour + time.Duration(t.Minute())*time.Minute + time.Duration(t.Second())*time.Second + time.Duration(t.Nanosecond())
		part := since.Seconds() / daySeconds
		if layout[0] == '1' {
			return part, true, true
		}
		serial = Serial(t.Year(), int(t.Month()), t.Day(), date1904) + part
		if year, month, day := t.Date(); year == 1899 && month == time.December && day == 30 && !date1904 {
			serial = part
		}
		return serial, false, serial >= 0 && serial < lastSerial
	}
	return 0, false, false
}
