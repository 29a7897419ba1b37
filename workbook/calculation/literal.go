package calculation

import (
	"math"
	"strconv"
	"strings"
	"time"

	"halfwidth/funcs"
)

// parseNumber reads a number with `.` as decimal mark, perhaps with a percent
// sign, which makes it a share.
func parseNumber(s string) (float64, bool) {
	s = strings.Replace(s, "−", "-", 1)
	body, percent := strings.CutSuffix(s, "%")
	body = strings.TrimSpace(body)
	digits := false
	for i := 0; i < len(body); i++ {
		switch c := body[i]; {
		case '0' <= c && c <= '9':
			digits = true
		case c == '.':
		case c == '-' || c == '+':
			if i > 0 && body[i-1]|0x20 != 'e' {
				return 0, false
			}
		case c|0x20 == 'e' && digits:
		default:
			return 0, false
		}
	}
	x, err := strconv.ParseFloat(body, 64)
	if err != nil || math.IsInf(x, 0) {
		return 0, false
	}
	if percent {
		// The nearest double to the decimal that was written, not to a quotient.
		if y, err := strconv.ParseFloat(scaled(body, -2), 64); err == nil {
			return y, true
		}
		return x / 100, true
	}
	return x, digits
}

// scaled multiplies the decimal written by a power of ten.
func scaled(body string, power int) string {
	at := strings.IndexAny(body, "eE")
	if at < 0 {
		return body + "e" + strconv.Itoa(power)
	}
	exponent, err := strconv.Atoi(body[at+1:])
	if err != nil {
		return body
	}
	return body[:at] + "e" + strconv.Itoa(exponent+power)
}

// dayZero is the day whose serial number is 0.
var dayZero = time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC)

// parseDate reads 2024-03-01, or with a time 2024-03-01T08:00 or
// 2024-03-01T08:00:30, a space for the T.
func parseDate(s string) (days float64, day, ok bool) {
	s = strings.Replace(s, " ", "T", 1)
	for _, layout := range [...]string{"2006-01-02", "2006-01-02T15:04", "2006-01-02T15:04:05"} {
		if len(s) != len(layout) {
			continue
		}
		if t, err := time.Parse(layout, s); err == nil && t.Year() > 0 {
			seconds := t.Unix() - dayZero.Unix()
			return float64(seconds) / secondsPerDay, len(s) == 10, true
		}
	}
	return 0, false, false
}

const secondsPerDay = 86400

// dateText writes a date, with its time to the second where it has one.
func dateText(days float64, day bool) string {
	if math.IsNaN(days) || math.Abs(days) > 4e6 {
		return funcs.FormatNumber(days)
	}
	seconds := int64(math.Round(days * secondsPerDay))
	t := time.Unix(dayZero.Unix()+seconds, 0).UTC()
	if day {
		return t.Format("2006-01-02")
	}
	return t.Format("2006-01-02T15:04:05")
}

func decimal(n int) string { return strconv.Itoa(n) }
