package report

import (
	"fmt"
	"runtime/debug"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// Caution stands under every result.
const Caution = "A model result, not a regulatory filing and not advice. Its figures are to be reviewed by the responsible actuary; " +
	"local regulation and the wording of the contracts prevail."

// leftOut says what the figures do not contain.
var leftOut = []string{
	"Required capital is a measure of one year's simulated net result: other risks, taxes, investment results, the run-off of old reserves and the rules of a full regulatory formula are not in it.",
	"Reinsurers are taken to pay in full and at once: neither default nor dispute nor delay is priced.",
	"Market prices come from a curve fitted to quotes, or from quotes in the study; capacity, relationships and the wordings behind them are not modelled.",
	"Reinstatement premiums are pro rata as to amount, without brokerage and without a time factor.",
	"Standard errors are those of the simulation alone. Whether the models of loss and the market curve are right they do not say.",
}

// Version names the program and the version from which it was built.
func Version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "cedewright"
	}
	version := info.Main.Version
	for _, s := range info.Settings {
		if s.Key == "vcs.revision" && len(s.Value) >= 12 {
			version += " " + s.Value[:12]
		}
	}
	if version == "" || version == "(devel)" {
		version = "development version"
	}
	return "cedewright " + version + ", " + info.GoVersion
}

// Recommendation says in two sentences what to buy and what it does.
func Recommendation(s study.Searched) string {
	best, start, none := s.Result.Best, s.Start, s.NoCover
	if !s.Result.Feasible {
		return fmt.Sprintf("No programme of the space keeps every constraint; the one shown breaks them least. %s", shortfalls(s))
	}
	first := fmt.Sprintf("Buy “%s”: %s for %s of premium a year, which costs a margin of %s and frees %s of required capital (%s), a rent of %s against a cost of capital of %s.",
		best.Programme.Name, count(len(best.Programme.Treaties), "treaty", "treaties"), Estimated(best.CededPremium), Estimated(best.CededMargin), Estimated(best.Capital[0].Relief),
		best.Capital[0].Standard, rent(best), Percent(s.CostOfCapital))
	if len(best.Programme.Treaties) == 0 {
		first = "Buy nothing: no programme of the space costs less than holding the capital for the whole risk."
	}
	second := fmt.Sprintf("Its total cost of margin and capital is %s a year, against %s for “%s” (%s) and %s without cover.",
		Estimated(best.TotalCost), Estimated(start.TotalCost), start.Programme.Name, change(s, best.Programme.Name), Estimated(none.TotalCost))
	if start.Programme.Name == none.Programme.Name {
		second = fmt.Sprintf("Its total cost of margin and capital is %s a year, against %s without cover (%s).", Estimated(best.TotalCost), Estimated(none.TotalCost), change(s, best.Programme.Name))
	}
	return first + " " + second
}

func count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

func rent(a optimize.Appraisal) string {
	if !a.RentDefined {
		return "no value (no relief)"
	}
	return EstimatedPercent(a.Rent)
}

// change gives the difference in total cost with its error on common years.
func change(s study.Searched, name string) string {
	for _, d := range s.Differences {
		if d.Programme == name {
			return "a difference of " + Estimated(d.TotalCost)
		}
	}
	return "the same programme"
}

func shortfalls(s study.Searched) string {
	text := "In the way:"
	for _, f := range s.Result.Shortfalls {
		text += fmt.Sprintf(" %s is %s,", f.Keep.Measure, anyFigure(f.Value))
		if f.Keep.AtMost.Given && f.Value > f.Keep.AtMost.Value {
			text += fmt.Sprintf(" at most %s is asked.", anyFigure(f.Keep.AtMost.Value))
		} else {
			text += fmt.Sprintf(" at least %s is asked.", anyFigure(f.Keep.AtLeast.Value))
		}
	}
	return text
}

// keepWords writes constraints in words.
func keepWords(keep []optimize.Keep) []string {
	var list []string
	for _, k := range keep {
		text := k.Measure
		if k.Standard != "" {
			text += " under " + k.Standard
		}
		if k.AtLeast.Given {
			text += " at least " + anyFigure(k.AtLeast.Value)
		}
		if k.AtMost.Given {
			text += " at most " + anyFigure(k.AtMost.Value)
		}
		list = append(list, text)
	}
	return list
}

// anyFigure writes a bound whose unit is money or a fraction.
func anyFigure(x float64) string {
	if x > -10 && x < 10 {
		return Percent(x)
	}
	return Money(x)
}
