package ooxml

import (
	"math"
	"testing"
)

// Serial numbers as ECMA-376 part 1, 18.17.4.1 gives or implies them; 45356 and
// 43894 are 2024-03-05 counted by hand: 124 years of 365 days and 31 leap days
// from 1900 (one of them the day that never was), then 31 + 29 + 5.
func TestSerialNumbersOfDates(t *testing.T) {
	for _, test := range []struct {
		year, month, day int
		date1904         bool
		want             float64
	}{
		{1900, 1, 1, false, 1}, {1900, 2, 28, false, 59}, {1900, 2, 29, false, 60}, {1900, 3, 1, false, 61}, {1899, 12, 31, false, 0},
		{2024, 3, 5, false, 45356}, {9999, 12, 31, false, 2958465}, {1904, 1, 1, true, 0}, {1904, 1, 2, true, 1}, {2024, 3, 5, true, 43894},
	} {
		if got := Serial(test.year, test.month, test.day, test.date1904); got != test.want {
			t.Errorf("%d-%d-%d has the serial number %v, want %v", test.year, test.month, test.day, got, test.want)
		}
		y, m, d, seconds, ok := DateOf(test.want+0.25, test.date1904)
		if y != test.year || m != test.month || d != test.day || seconds != 21600 || !ok {
			t.Errorf("%v is %d-%d-%d %vs %v, want %d-%d-%d at 6:00", test.want+0.25, y, m, d, seconds, ok, test.year, test.month, test.day)
		}
	}
	for serial := 0.0; serial < lastSerial; serial += 13 {
		y, m, d, _, ok := DateOf(serial, false)
		if got := Serial(y, m, d, false); got != serial || !ok {
			t.Fatalf("%v is %d-%d-%d, which has the serial number %v", serial, y, m, d, got)
		}
	}
}

func TestDatesOfNoSerialNumber(t *testing.T) {
	for _, serial := range []float64{-1, -1e-9, 2958466, 1e300, math.Inf(1), math.Inf(-1), math.NaN()} {
		if _, _, _, _, ok := DateOf(serial, false); ok {
			t.Errorf("%v has a date", serial)
		}
	}
	if _, _, _, _, ok := DateOf(2958465, true); ok {
		t.Error("a day after the year 9999 has a date")
	}
}

// A time of day that is stored as the double nearest to midnight is midnight.
func TestTimesRoundToMicroseconds(t *testing.T) {
	_, _, day, seconds, _ := DateOf(math.Nextafter(2, 0), false)
	if day != 2 || seconds != 0 {
		t.Errorf("day %d, %v seconds; want day 2 at 0:00", day, seconds)
	}
	_, _, _, seconds, _ = DateOf(45356+29700.0/86400, false)
	if seconds != 29700 {
		t.Errorf("%v seconds, want 29700", seconds)
	}
}

func TestISODates(t *testing.T) {
	for text, want := range map[string]float64{"2024-03-05": 45356, "2024-03-05T12:00:00": 45356.5, "2024-03-05T12:00": 45356.5, "2024-03-05T12:00:00.5": 45356.5 + 0.5/86400,
		"2024-03-05T12:00:00Z": 45356.5, "2024-03-05T12:00:00+02:00": 45356.5, "06:00:00": 0.25, "06:00": 0.25, "1900-01-01": 1} {
		if got, clock, ok := parseDate([]byte(text), false); !ok || math.Abs(got-want) > 1e-9 || clock != (text[2] == ':') {
			t.Errorf("%s is %v (%v), want %v", text, got, ok, want)
		}
	}
	for _, text := range []string{"", "2024", "2024-13-01", "2024-02-30", "1899-01-01", "25:00:00", "5 March 2024"} {
		if got, _, ok := parseDate([]byte(text), false); ok {
			t.Errorf("%q is %v, want no date", text, got)
		}
	}
}
