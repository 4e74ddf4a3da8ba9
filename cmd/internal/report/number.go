package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"cedewright/optimize"
)

// Figures are shown no finer than their standard error tells: the last digit shown is that of the error's first digit, or its second when
// the first is 1. Simulated figures without an error are shown with three digits, terms of a contract with all they have.

// mostDigits is the most that a simulated figure is shown with, however small its error: a formula on a company's own inputs, or a sum over attritional
// losses, is known no better for being simulated well.
const mostDigits = 4

// unit is the power of ten in which money is shown.
type unit struct {
	factor float64
	suffix string
}

var moneyUnits = []unit{{1e9, "bn"}, {1e6, "m"}, {1e3, "k"}, {1, ""}}

// unitFor chooses the unit of one amount: the largest not above it once it is rounded to four digits, so that it reads with one to three
// digits before the point.
func unitFor(x float64) unit {
	for _, u := range moneyUnits {
		if math.Abs(x) >= 0.99995*u.factor {
			return u
		}
	}
	return moneyUnits[len(moneyUnits)-1]
}

// unitOf chooses one unit for amounts that are read beside each other: that of the largest, but billions only from ten on, since 1,003m
// beside 42m reads better than 1.003bn beside 0.042bn.
func unitOf(amounts ...float64) unit {
	largest := 0.0
	for _, x := range amounts {
		if finite(x) {
			largest = max(largest, math.Abs(x))
		}
	}
	if u := unitFor(largest); u.factor < 1e9 || largest >= 10e9 {
		return u
	}
	return moneyUnits[1]
}

// word names the unit before a currency: "million ".
func (u unit) word() string {
	return map[string]string{"bn": "billion ", "m": "million ", "k": "thousand ", "": ""}[u.suffix]
}

// amount gives money without an error, three digits or all that stand before the point.
func (u unit) amount(x float64) string {
	if !finite(x) {
		return "–"
	}
	if x == 0 {
		return "0"
	}
	return rounded(x/u.factor) + u.suffix
}

// estimate gives money with its error: 12.3m ± 0.4m.
func (u unit) estimate(e optimize.Estimate) string {
	if !finite(e.Value) {
		return "–"
	}
	if !known(e) {
		return u.amount(e.Value)
	}
	return scaled(e, u.factor) + u.suffix + plusMinus + errorOf(e, u.factor) + u.suffix
}

// plusMinus stands between a figure and its error; tables align it.
const plusMinus = " ± "

// known tells whether an estimate has an error worth showing.
func known(e optimize.Estimate) bool {
	return e.StandardError > 0 && !math.IsInf(e.StandardError, 0)
}

// decimals gives how many digits behind the point a figure with that error bears; 0 or less for none.
func decimals(standardError float64) int {
	power := int(math.Floor(math.Log10(standardError)))
	if standardError/math.Pow(10, float64(power)) < 1.95 { // 1.95 and more would be written 2.0
		power--
	}
	return -power
}

// fixed gives x with so many digits behind the point; fewer than none rounds to tens, hundreds and so on.
func fixed(x float64, places int) string {
	if !finite(x) {
		return "–"
	}
	if places < 0 {
		grain := math.Pow(10, float64(-places))
		x, places = math.Round(x/grain)*grain, 0
	}
	return minus(grouped(strconv.FormatFloat(x, 'f', min(places, 12), 64)))
}

// grouped puts commas between thousands from 10,000 on.
func grouped(s string) string {
	sign := ""
	if rest, ok := strings.CutPrefix(s, "-"); ok {
		sign, s = "-", rest
	}
	whole, fraction, point := strings.Cut(s, ".")
	if len(whole) > 4 {
		for i := len(whole) - 3; i > 0; i -= 3 {
			whole = whole[:i] + "," + whole[i:]
		}
	}
	if point {
		whole += "." + fraction
	}
	return sign + whole
}

// minus uses the true minus sign, and none before zero.
func minus(s string) string {
	rest, ok := strings.CutPrefix(s, "-")
	switch {
	case !ok:
		return s
	case strings.Trim(rest, "0.") == "":
		return rest
	}
	return "−" + rest
}

// significant gives x with so many digits, without an exponent and without zeros at the end.
func significant(x float64, digits int) string {
	switch {
	case !finite(x):
		return "–"
	case x == 0:
		return "0"
	}
	value, err := strconv.ParseFloat(strconv.FormatFloat(x, 'g', digits, 64), 64)
	if err != nil {
		value = x
	}
	s := strconv.FormatFloat(value, 'f', -1, 64)
	return minus(grouped(s))
}

// rounded gives x with three digits, or all that stand before the point.
func rounded(x float64) string {
	digits := 3
	if math.Abs(x) >= 1 && finite(x) {
		digits = max(3, int(math.Log10(math.Abs(x)))+1)
	}
	return significant(x, digits)
}

// scaled gives an estimate in units of factor, to the digits that its error allows.
func scaled(e optimize.Estimate, factor float64) string {
	if !finite(e.Value) {
		return "–"
	}
	if !known(e) {
		return rounded(e.Value / factor)
	}
	x := e.Value / factor
	places := decimals(e.StandardError / factor)
	if x != 0 {
		places = min(places, mostDigits-1-int(math.Floor(math.Log10(math.Abs(x)))))
	}
	return fixed(x, places)
}

// errorOf gives a known error in units of factor, with the same last digit as scaled but where that has the most digits that a figure is shown with.
func errorOf(e optimize.Estimate, factor float64) string {
	return fixed(e.StandardError/factor, decimals(e.StandardError/factor))
}

// written gives an amount in its natural unit with so many digits.
func written(x float64, digits int) string {
	switch {
	case math.IsInf(x, 1):
		return "unlimited"
	case !finite(x):
		return "–"
	}
	u := unitFor(x)
	return significant(x/u.factor, digits) + u.suffix
}

// Money gives an amount without an error in its natural unit, to four digits: 12.35m.
func Money(x float64) string {
	return written(x, 4)
}

// Terms gives an amount that stands in a contract, in its natural unit, with every digit that it has up to twelve.
func Terms(x float64) string {
	return written(x, 12)
}

// Estimated gives an amount with its error, in its natural unit: 12.3m ± 0.4m.
func Estimated(e optimize.Estimate) string {
	if !finite(e.Value) {
		return "–"
	}
	if !known(e) {
		return Money(e.Value)
	}
	return unitFor(max(math.Abs(e.Value), e.StandardError)).estimate(e)
}

// Number gives a plain number with its error: 0.50 ± 0.14.
func Number(e optimize.Estimate) string { return unit{factor: 1}.estimate(e) }

// Percent gives a fraction without an error: 12.3 %.
func Percent(x float64) string {
	if !finite(x) {
		return "–"
	}
	return rounded(100*x) + " %"
}

// percentTo gives a fraction with so many digits behind the point of its percentage; signed ones bear a plus.
func percentTo(x float64, places int, signed bool) string {
	if !finite(x) {
		return "–"
	}
	text := fixed(100*x, places) + " %"
	if signed && x > 0 {
		return "+" + text
	}
	return text
}

// EstimatedPercent gives a fraction with its error: 12.3 % ± 0.4 %.
func EstimatedPercent(e optimize.Estimate) string {
	if !finite(e.Value) {
		return "–"
	}
	if !known(e) {
		return Percent(e.Value)
	}
	return scaled(e, 0.01) + " %" + plusMinus + errorOf(e, 0.01) + " %"
}

// ReturnPeriod gives a yearly probability as a return period: "1 in 37".
func ReturnPeriod(p float64) string {
	switch {
	case math.IsNaN(p):
		return "–"
	case !(p > 0):
		return "never"
	case p >= 1:
		return "every year"
	}
	return "1 in " + rounded(1/p)
}

// estimatedPeriod does so with the digits that the probability's error allows, three at most.
func estimatedPeriod(e optimize.Estimate) string {
	if !(e.Value > 0 && e.Value < 1) || !known(e) {
		return ReturnPeriod(e.Value)
	}
	period := optimize.Estimate{Value: 1 / e.Value, StandardError: e.StandardError / (e.Value * e.Value)} // delta method
	places := min(decimals(period.StandardError), 2-int(math.Floor(math.Log10(period.Value))))
	if places <= 0 {
		return "1 in " + fixed(period.Value, min(places, 0))
	}
	return "1 in " + fixed(period.Value, places)
}

// Count gives "1 treaty" and "3 treaties".
func Count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%s %s", thousands(n), many)
}

func thousands(n int) string { return grouped(strconv.Itoa(n)) }

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
