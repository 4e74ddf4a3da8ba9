package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"cedewright/optimize"
)

// Figures are shown no finer than their standard error tells: the last digit shown is that of the error's first digit, or its second when
// the first is 1. Figures without an error are shown with four digits.

// unit is the power of ten in which money of a table is shown.
type unit struct {
	factor float64
	suffix string
}

var moneyUnits = []unit{{1e9, "bn"}, {1e6, "m"}, {1e3, "k"}, {1, ""}}

// unitFor chooses the unit of an amount: the largest not above it once it is rounded to four digits, so that it reads with one to three
// digits before the point.
func unitFor(x float64) unit {
	for _, u := range moneyUnits {
		if math.Abs(x) >= 0.99995*u.factor {
			return u
		}
	}
	return moneyUnits[len(moneyUnits)-1]
}

// decimals gives how many digits behind the point a figure with that error bears; 0 or less for none.
func decimals(standardError float64) int {
	if !(standardError > 0) || math.IsInf(standardError, 0) {
		return 0
	}
	power := int(math.Floor(math.Log10(standardError)))
	if standardError/math.Pow(10, float64(power)) < 2 {
		power--
	}
	return -power
}

// significant gives x with so many digits, without an exponent for the sizes that occur.
func significant(x float64, digits int) string {
	if x == 0 {
		return "0"
	}
	places := digits - 1 - int(math.Floor(math.Log10(math.Abs(x))))
	rounded := strconv.FormatFloat(x, 'g', digits, 64)
	if value, err := strconv.ParseFloat(rounded, 64); err == nil {
		x = value
	}
	return tidy(strconv.FormatFloat(x, 'f', min(max(places, 0), 12), 64))
}

// tidy cuts zeros behind the point and uses the true minus sign.
func tidy(s string) string {
	if strings.Contains(s, ".") {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return minus(s)
}

func minus(s string) string {
	if s == "-0" {
		return "0"
	}
	if rest, ok := strings.CutPrefix(s, "-"); ok {
		if strings.Trim(rest, "0.") == "" {
			return rest
		}
		return "−" + rest
	}
	return s
}

// Money gives an amount without an error in its natural unit: 12.3m.
func Money(x float64) string {
	if math.IsInf(x, 0) {
		return "unlimited"
	}
	u := unitFor(x)
	return significant(x/u.factor, 4) + u.suffix
}

// scaled gives an estimate in units of factor, to the digits that its error allows.
func scaled(e optimize.Estimate, factor float64) string {
	if !finite(e.Value) {
		return "–"
	}
	if !(e.StandardError > 0) {
		return significant(e.Value/factor, 4)
	}
	places := decimals(e.StandardError / factor)
	if places < 0 {
		grain := math.Pow(10, float64(-places))
		return minus(strconv.FormatFloat(math.Round(e.Value/factor/grain)*grain, 'f', 0, 64))
	}
	return minus(strconv.FormatFloat(e.Value/factor, 'f', min(places, 9), 64))
}

// errorOf gives the error in units of factor, with the same last digit as scaled.
func errorOf(e optimize.Estimate, factor float64) string {
	if !(e.StandardError > 0) {
		return ""
	}
	places := decimals(e.StandardError / factor)
	return strconv.FormatFloat(e.StandardError/factor, 'f', min(max(places, 0), 9), 64)
}

// Estimated gives an amount with its error: 12.3m ± 0.4m.
func Estimated(e optimize.Estimate) string {
	if !finite(e.Value) {
		return "–"
	}
	u := unitFor(max(math.Abs(e.Value), e.StandardError))
	text := scaled(e, u.factor) + u.suffix
	if e.StandardError > 0 {
		text += " ± " + errorOf(e, u.factor) + u.suffix
	}
	return text
}

// Percent gives a fraction without an error: 12.3 %.
func Percent(x float64) string {
	if !finite(x) {
		return "–"
	}
	return significant(100*x, 3) + " %"
}

// EstimatedPercent gives a fraction with its error: 12.3 % ± 0.4 %.
func EstimatedPercent(e optimize.Estimate) string {
	if !finite(e.Value) {
		return "–"
	}
	text := scaled(e, 0.01) + " %"
	if e.StandardError > 0 {
		text += " ± " + errorOf(e, 0.01) + " %"
	}
	return text
}

// ReturnPeriod gives a yearly probability as a return period: "1 in 37".
func ReturnPeriod(p float64) string {
	switch {
	case !(p > 0):
		return "never"
	case p >= 1:
		return "every year"
	}
	return fmt.Sprintf("1 in %s", significant(1/p, 3))
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
