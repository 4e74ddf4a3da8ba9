package report

import (
	"fmt"
	"math"
	"reflect"
	"runtime/debug"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// Caution stands under every result.
const Caution = "A model result, not a regulatory filing and not advice. Its figures are to be reviewed by the responsible actuary; " +
	"local regulation and the wording of the contracts prevail."

// Version names the program and the version from which it was built.
func Version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "cedewright"
	}
	version := info.Main.Version
	if version == "" || version == "(devel)" {
		version = "development version"
		for _, s := range info.Settings {
			if s.Key == "vcs.revision" && len(s.Value) >= 12 {
				version += " " + s.Value[:12]
			}
		}
	}
	return "cedewright " + version + ", " + info.GoVersion
}

// Recommendation says in two sentences what to buy and what it does.
func Recommendation(s study.Searched) string {
	if !s.Result.Feasible {
		return fmt.Sprintf("No programme of the space keeps every constraint; the one shown breaks them least. %s", shortfalls(s))
	}
	return whatToBuy(s) + " " + whatItCosts(s)
}

func whatToBuy(s study.Searched) string {
	best := s.Result.Best
	if len(best.Programme.Treaties) == 0 {
		return "Buy nothing: no programme that was appraised costs less than holding the capital for the whole risk."
	}
	verb, name := "Buy", best.Programme.Name
	if sameTreaties(best, s.Start) {
		verb, name = "Keep", s.Start.Programme.Name
	}
	text := fmt.Sprintf("%s “%s”: %s for %s %s of premium a year, which costs a margin of %s a year and frees %s of required capital (%s)",
		verb, name, Count(len(best.Programme.Treaties), "treaty", "treaties"), s.Currency, Estimated(best.CededPremium), Estimated(best.CededMargin),
		Estimated(best.Driving.Relief), driving(s.Appraised, false))
	if best.RentDefined {
		text += fmt.Sprintf(", a rent of %s against %s", EstimatedPercent(best.Rent), rentAgainst(s, best))
	}
	return clean(text) + "."
}

// whatItCosts compares total cost with the start and with no cover.
func whatItCosts(s study.Searched) string {
	best, start, none := s.Result.Best, s.Start, s.NoCover
	parts := "Margin and cost of capital together"
	switch {
	case s.Security != nil && s.Owners != "":
		parts = "Margin, unpaid recoveries and the owners' price of the risk kept together"
	case s.Security != nil:
		parts = "Margin, unpaid recoveries and cost of capital together"
	case s.Owners != "":
		parts = "Margin and the owners' price of the risk kept together"
	}
	text := fmt.Sprintf("%s are %s a year", parts, Estimated(best.TotalCost))
	switch {
	case len(best.Programme.Treaties) == 0:
		text = fmt.Sprintf("That costs %s a year", Estimated(best.TotalCost))
		if start.Programme.Name != none.Programme.Name {
			text += fmt.Sprintf(", against %s with “%s”%s", Estimated(start.TotalCost), start.Programme.Name, change(s))
		}
	case start.Programme.Name == none.Programme.Name:
		text += fmt.Sprintf(", against %s without cover%s", Estimated(none.TotalCost), change(s))
	case sameTreaties(best, start):
		text += fmt.Sprintf(", against %s without cover", Estimated(none.TotalCost))
	default:
		text += fmt.Sprintf(", against %s with “%s”%s and %s without cover", Estimated(start.TotalCost), start.Programme.Name, change(s), Estimated(none.TotalCost))
	}
	return clean(text) + "."
}

func sameTreaties(a, b optimize.Appraisal) bool {
	return len(a.Programme.Treaties) == len(b.Programme.Treaties) && reflect.DeepEqual(a.Programme.Treaties, b.Programme.Treaties)
}

// change gives the difference in total cost of the best with its error on common years.
func change(s study.Searched) string {
	d, ok := difference(s.Appraised, s.Result.Best.Programme.Name)
	if !ok {
		return ""
	}
	text := "a difference of " + Estimated(d.TotalCost)
	if d.TotalCost.StandardError > 0 && math.Abs(d.TotalCost.Value) < 2*d.TotalCost.StandardError {
		text += ", which the simulation cannot tell from none"
	}
	return " (" + text + ")"
}

// searchWords says what was searched, how long, and why it ended.
func searchWords(s study.Searched) string {
	text := fmt.Sprintf("Searched: %s; %s appraised in %s, seed %d; %s", s.Space, Count(s.Result.Evaluations, "programme", "programmes"),
		Count(s.Result.Generations, "generation", "generations"), s.Result.Seed, s.Result.Status)
	if s.Result.Polished && s.Result.Status != optimize.Proven {
		text += "; no single move on the steps improves the best"
	}
	return text + "."
}

// boundWords says how far from the best conceivable the best found can be, on the years it was chosen on.
func boundWords(s study.Searched) string {
	if s.Result.Status == optimize.Proven || !s.Result.Feasible {
		return ""
	}
	if !s.Bound.Known {
		return "No lower bound is known: " + clean(s.Bound.Reason) + "."
	}
	if !s.Bound.Certified {
		return "How far from the best possible it can be is not known: " + clean(s.Bound.Reason) + "."
	}
	return fmt.Sprintf("On the years it was chosen on, the best found costs %s more than %s, below which %s.",
		Money(s.Result.Best.TotalCost.Value-s.Bound.TotalCost), Money(s.Bound.TotalCost), clean(s.Bound.Reason))
}

func shortfalls(s study.Searched) string {
	var parts []string
	for _, f := range s.Result.Shortfalls {
		text := fmt.Sprintf("%s is %s, ", keepName(f.Keep), figureOf(f.Keep, f.Value))
		if f.Keep.AtMost.Given && f.Value > f.Keep.AtMost.Value {
			text += fmt.Sprintf("at most %s is asked", figureOf(f.Keep, f.Keep.AtMost.Value))
		} else {
			text += fmt.Sprintf("at least %s is asked", figureOf(f.Keep, f.Keep.AtLeast.Value))
		}
		parts = append(parts, text)
	}
	return "In the way: " + clean(strings.Join(parts, "; ")) + "."
}

// keepWords writes constraints in words.
func keepWords(keep []optimize.Keep) []string {
	var list []string
	for _, k := range keep {
		text := keepName(k)
		if k.AtLeast.Given {
			text += " at least " + figureOf(k, k.AtLeast.Value)
		}
		if k.AtMost.Given {
			text += " at most " + figureOf(k, k.AtMost.Value)
		}
		list = append(list, clean(text))
	}
	return list
}

func keepName(k optimize.Keep) string {
	if k.Standard != "" {
		return k.Measure + " under " + k.Standard
	}
	return k.Measure
}

// figureOf writes a figure of a measure: ratios are fractions, all others money.
func figureOf(k optimize.Keep, x float64) string {
	if strings.HasSuffix(k.Measure, "ratio") {
		return Percent(x)
	}
	return Money(x)
}
