package funcs

import (
	"fmt"
	"math"
	"math/big"
	"strconv"
	"strings"
)

// percent words a level: 0.95 is "95%".
func percent(level float64) string {
	return strconv.FormatFloat(level*100, 'g', 12, 64) + "%"
}

// lastPlace is the decimal place (a power of ten) of the second significant
// digit of x; the place of the 15th of scale where x is 0.
func lastPlace(x, scale float64) int {
	digits := 2
	if x == 0 || math.IsInf(x, 0) || math.IsNaN(x) {
		x, digits = scale, 15
	}
	if x == 0 {
		return 0
	}
	text := strconv.FormatFloat(math.Abs(x), 'e', digits-1, 64)
	exponent, _ := strconv.Atoi(text[strings.IndexByte(text, 'e')+1:])
	return exponent - (digits - 1)
}

// toPlace writes x rounded to the decimal place, ties to even on the exact
// decimal that the double stands for.
func toPlace(x float64, place int) string {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return strconv.FormatFloat(x, 'g', -1, 64)
	}
	if place <= 0 {
		text := strconv.FormatFloat(x, 'f', -place, 64)
		if strings.Trim(text, "-0.") == "" {
			text = strings.TrimPrefix(text, "-")
		}
		return text
	}
	unit := new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(place)), nil))
	scaled := new(big.Rat).Quo(new(big.Rat).SetFloat64(x), unit)
	whole, rest := new(big.Int).DivMod(scaled.Num(), scaled.Denom(), new(big.Int))
	switch twice := new(big.Int).Lsh(rest, 1); twice.Cmp(scaled.Denom()) {
	case 1:
		whole.Add(whole, big.NewInt(1))
	case 0:
		whole.Add(whole, big.NewInt(int64(whole.Bit(0))))
	}
	return whole.Mul(whole, unit.Num()).String()
}

// brief writes a number for a sentence where no half-width sets its last
// place: 4 significant digits, whole numbers in full.
func brief(x float64) string {
	if x == math.Trunc(x) && math.Abs(x) < 1e15 {
		return strconv.FormatFloat(x, 'f', -1, 64)
	}
	if a := math.Abs(x); a >= 1000 && a < 1e15 {
		return strconv.FormatFloat(x, 'f', 0, 64)
	}
	return strconv.FormatFloat(x, 'g', 4, 64)
}

// pText words a p-value: "p = 0.0231", "p < 1e-300".
func pText(p float64) string {
	if p < 1e-300 {
		return "p < 1e-300"
	}
	return "p = " + strconv.FormatFloat(p, 'g', 3, 64)
}

// nText words how many values there were.
func nText(n int) string { return "n = " + strconv.Itoa(n) }

// withUnit puts the unit of the sample after a number.
func (c *Call) withUnit(text string, u Unit) string {
	unit := c.unit()
	if unit == "" || u == NoUnit {
		return text
	}
	if u == SquaredUnit {
		return text + " " + unit + " squared"
	}
	return text + " " + unit
}

// unit is the unit written in the header of the first sample that has one.
func (c *Call) unit() string {
	for _, in := range c.Function.Inputs {
		if u := c.origin(in.Name).Unit; u != "" && in.Unit == SameUnit {
			return u
		}
	}
	return ""
}

// statement is what the sentence of an interval says.
type statement struct {
	what     string // "mean", "difference of means (first - second)"
	estimate float64
	limits   limits
	unit     Unit
	counts   string // "n = 25", "n = 25 and 31"
}

// say composes the sentence: estimate, limits, level, direction, n and method.
func (c *Call) say(s statement) { c.sayAt(confidence.Of(c), s) }

// sayAt is say for an interval whose confidence is no input.
func (c *Call) sayAt(confidence float64, s statement) {
	place := lastPlace(s.limits.halfWidth(s.estimate), s.estimate)
	level := percent(confidence)
	var b strings.Builder
	fmt.Fprintf(&b, "The %s is %s", s.what, c.withUnit(toPlace(s.estimate, place), s.unit))
	switch direction := direction.Of(c); {
	case s.limits.hasLower && s.limits.hasUpper:
		fmt.Fprintf(&b, ", %s interval %s to %s (half-width %s", level, toPlace(s.limits.lower, place),
			toPlace(s.limits.upper, place), toPlace(s.limits.halfWidth(s.estimate), place))
		if direction != "" { // a function without the input has no direction to name
			fmt.Fprintf(&b, ", %s direction", direction)
		}
	case s.limits.hasLower:
		fmt.Fprintf(&b, ", at least %s with %s confidence (half-width %s, direction %s", toPlace(s.limits.lower, place), level,
			toPlace(s.limits.halfWidth(s.estimate), place), direction)
	default:
		fmt.Fprintf(&b, ", at most %s with %s confidence (half-width %s, direction %s", toPlace(s.limits.upper, place), level,
			toPlace(s.limits.halfWidth(s.estimate), place), direction)
	}
	if s.counts != "" {
		b.WriteString(", " + s.counts)
	}
	b.WriteString("; " + c.method + ").")
	c.sentence = b.String()
}

// setTest gives a statistic against the reference with its p-value, and adds the
// comparison to the sentence.
func (c *Call) setTest(reference float64, u Unit, statistic string, value, p float64) {
	c.set(statistic, value)
	c.set("p-value", p)
	c.sayTest(reference, u, statistic, value, p)
}

// sayTest adds the comparison with the reference to the sentence.
func (c *Call) sayTest(reference float64, u Unit, statistic string, value, p float64) {
	c.sentence += fmt.Sprintf(" Against the reference %s: %s = %s, %s%s.", c.withUnit(FormatNumber(reference), u), statistic, brief(value),
		sided(direction.Of(c)), pText(p))
}

// setExactTest is setTest for a p-value that comes from no statistic.
func (c *Call) setExactTest(reference, p float64) {
	c.set("p-value", p)
	c.sentence += fmt.Sprintf(" Against the reference %s: exact %s%s.", FormatNumber(reference), sided(direction.Of(c)), pText(p))
}

// sided words which tails a p-value counts.
func sided(direction string) string {
	if direction == either {
		return "two-sided "
	}
	return "one-sided (" + direction + ") "
}

// plural words a count: "1 value", "3 values".
func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return strconv.Itoa(n) + " " + noun + "s"
}

// degrees words degrees of freedom: "1 degree of freedom", "17.62 degrees of
// freedom".
func degrees(df float64) string {
	if df == 1 {
		return "1 degree of freedom"
	}
	return dfText(df) + " degrees of freedom"
}

// dfText words the number alone.
func dfText(df float64) string {
	if isInfinite(df) {
		return Infinite
	}
	return brief(df)
}

// lowerFirst lowers the first letter of a phrase for use inside a sentence.
func lowerFirst(s string) string { return strings.ToLower(s[:1]) + s[1:] }
