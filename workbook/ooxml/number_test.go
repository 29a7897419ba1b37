package ooxml

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// The values are those of strconv, which rounds correctly.
func TestNumbersReadAsTheNearestDouble(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 11))
	check := func(s string) {
		t.Helper()
		want, err := strconv.ParseFloat(s, 64)
		got, ok := parseNumber([]byte(s))
		if ok != (err == nil) || ok && math.Float64bits(got) != math.Float64bits(want) {
			t.Errorf("%s reads as %v (%v), want %v (%v)", s, got, ok, want, err)
		}
	}
	for range 200000 {
		bits := math.Float64frombits(random.Uint64())
		if !math.IsNaN(bits) && !math.IsInf(bits, 0) {
			check(strconv.FormatFloat(bits, 'g', -1, 64))
		}
		digits := random.IntN(20) + 1
		s := ""
		for range digits {
			s += string(rune('0' + random.IntN(10)))
		}
		if point := random.IntN(digits + 1); point < digits {
			s = s[:point] + "." + s[point:]
		}
		if random.IntN(2) == 0 {
			s = "-" + s
		}
		if random.IntN(3) == 0 {
			s += "E" + strconv.Itoa(random.IntN(60)-30)
		}
		check(s)
	}
	for _, s := range []string{"0", "-0", "00", "9007199254740992", "9007199254740993", "9007199254740992e22", "1e22", "1e23", "123456789012345e-22", "9999999999999999999", "0.1e1", "1E+5", "4.9e-324", "1e-400", "1e309", "1e99999999999"} {
		check(s)
	}
}

func TestWhatIsNoNumber(t *testing.T) {
	for _, s := range []string{"", "-", ".", "e5", "1e", "1e+", "--1", "1.2.3", "1 ", " 1", "1,5", "0x1", "inf", "NaN", "1_000", "+-1", "1e5.5"} {
		if x, ok := parseNumber([]byte(s)); ok {
			t.Errorf("%q reads as %v", s, x)
		}
	}
}

func TestNumbersAreWrittenShortAndExact(t *testing.T) {
	for _, test := range []struct {
		x    float64
		want string
	}{
		{0, "0"}, {math.Copysign(0, -1), "0"}, {1, "1"}, {-12.5, "-12.5"}, {0.1, "0.1"}, {1.0 / 3, "0.3333333333333333"}, {0.30000000000000004, "0.30000000000000004"},
		{1e14, "100000000000000"}, {1e15, "1E+15"}, {123456789012345, "123456789012345"}, {1e-5, "0.00001"}, {9.5e-6, "9.5E-06"}, {5e-324, "5E-324"}, {math.MaxFloat64, "1.7976931348623157E+308"},
	} {
		if got := string(appendNumber(nil, test.x)); got != test.want {
			t.Errorf("%v is written %s, want %s", test.x, got, test.want)
		}
	}
	random := rand.New(rand.NewPCG(3, 5))
	for range 100000 {
		x := math.Float64frombits(random.Uint64())
		if math.IsNaN(x) || math.IsInf(x, 0) || x == 0 {
			continue
		}
		if got, ok := parseNumber(appendNumber(nil, x)); !ok || got != x {
			t.Fatalf("%v is written %s, which reads as %v", x, appendNumber(nil, x), got)
		}
	}
}
