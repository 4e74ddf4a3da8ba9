package settings

import (
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
)

// Bounds of a book: more years or events do not fit into the memory of an ordinary machine.
const (
	mostYears  = 10_000_000
	mostEvents = 500_000_000
)

func (c *checker) book() {
	b := c.s.Book
	if b.Years < 1 || b.Years > mostYears {
		c.add("book.years", fmt.Sprint(b.Years), "a whole number from 1 to 10,000,000")
	}
	if len(b.Classes) == 0 {
		c.add("book.classes", "no class", "at least one")
	}
	for i, class := range b.Classes {
		key := fmt.Sprintf("book.classes[%d]", i)
		c.money(key+".premium", class.Premium)
		c.fraction(key+".expenses", class.Expenses)
	}
	if len(b.Tables)+len(b.Models) == 0 && b.Attritional == nil {
		c.add("book", "no losses", "tables, models or attritional losses")
	}
	c.names("book.models", len(b.Models), func(i int) string { return b.Models[i].Name })
	for i, m := range b.Models {
		c.model(fmt.Sprintf("book.models[%d]", i), m)
	}
	if b.Attritional != nil {
		c.attritional(*b.Attritional)
	}
}

func (c *checker) model(key string, m Model) {
	switch {
	case m.History != nil && (m.Severity != nil || m.Split != nil):
		c.add(key+".history", "given beside severity or split", "a history, or severity and split")
	case m.History != nil:
		c.history(key+".history", *m.History, m.Frequency.Family == "fitted")
	case m.Severity == nil:
		c.add(key, "no severity", "severity and split, or a history")
	default:
		c.split(key+".split", m.Split)
		c.severity(key+".severity", *m.Severity)
	}
	if m.History == nil && m.Frequency.Family == "fitted" {
		c.add(key+".frequency.family", "fitted, but the model has no history", "poisson, negative-binomial or binomial")
		return
	}
	c.frequency(key+".frequency", m.Frequency)
}

func (c *checker) history(key string, h History, fitted bool) {
	if fitted && h.DateColumn == "" {
		c.add(key, "no date_column, but the frequency is fitted to yearly counts", "the name of the column of dates")
	}
	if len(h.Columns) == 0 {
		c.add(key+".columns", "no column", "at least one")
	}
	columns, classes := map[string]bool{}, map[string]bool{}
	for i, column := range h.Columns {
		at := fmt.Sprintf("%s.columns[%d]", key, i)
		c.once(at+".column", column.Column, columns)
		c.once(at+".class", column.Class, classes)
		c.known(at+".class", "class", column.Class, c.classes)
	}
	c.moneyAbove(key+".tail_threshold", h.TailThreshold)
	if h.Minimum != nil {
		c.money(key+".minimum", *h.Minimum)
	}
	if h.Scale != nil {
		c.within(key+".scale", float64(*h.Scale), 0, math.Inf(1), true, false, "money above 0 for one unit of the file")
	}
	if h.Ceiling != nil && *h.Ceiling <= h.TailThreshold {
		c.add(key+".ceiling", moneyText(float64(*h.Ceiling)), "money above the tail_threshold")
	}
}

func (c *checker) split(key string, split []Share) {
	sum, seen := 0.0, map[string]bool{}
	for i, s := range split {
		at := fmt.Sprintf("%s[%d]", key, i)
		c.known(at+".class", "class", s.Class, c.classes)
		c.once(at+".class", s.Class, seen)
		c.within(at+".share", float64(s.Share), 0, 1, true, false, "a fraction above 0 and at most 1")
		sum += float64(s.Share)
	}
	if math.Abs(sum-1) > 1e-9 { // as loss.Model.Validate has it
		c.add(key, fmt.Sprintf("shares that add up to %.6g", sum), "shares that add up to 1")
	}
}

// Keys that a family takes.
var (
	frequencyKeys = map[string][]string{
		"poisson": {"mean"}, "negative-binomial": {"mean", "variance_to_mean"}, "binomial": {"trials", "probability"}, "fitted": nil,
	}
	severityKeys = map[string][]string{
		"lognormal": {"mu", "sigma", "mean", "cv"}, "pareto": {"threshold", "alpha", "ceiling"},
		"generalised-pareto": {"threshold", "xi", "beta", "ceiling"}, "gamma": {"shape", "scale", "mean", "cv"},
		"weibull": {"shape", "scale"}, "exponential": {"mean"},
	}
)

// unused reports keys that the family of a law does not take: they would be passed over. It tells whether there are none.
func (c *checker) unused(key, family string, law any, takes map[string][]string) bool {
	keys, ok := takes[family]
	clean := true
	v := reflect.ValueOf(law)
	for _, f := range fieldsOf(v.Type()) {
		value := v.FieldByIndex(f.index)
		if ok && value.Kind() == reflect.Pointer && !value.IsNil() && !slices.Contains(keys, f.name) {
			clean = false
			allowed := "no key but family"
			if len(keys) > 0 {
				allowed = "keys " + strings.Join(keys, ", ")
			}
			c.add(key+"."+f.name, "given for the family "+family, allowed)
		}
	}
	return clean
}

func (c *checker) frequency(key string, f Frequency) {
	if !c.unused(key, f.Family, f, frequencyKeys) || f.Family == "fitted" {
		return
	}
	law, err := f.law()
	if err != nil {
		c.law(key, err)
		return
	}
	if events := law.Mean() * float64(c.s.Book.Years); events > mostEvents {
		c.add(key, fmt.Sprintf("about %.2g events in %d years", events, c.s.Book.Years), "at most 500,000,000 events")
	}
}

func (c *checker) severity(key string, s Severity) {
	switch {
	case !c.unused(key, s.Family, s, severityKeys):
		return
	case (s.Mean != nil || s.CV != nil) && (s.Mu != nil || s.Sigma != nil || s.Shape != nil || s.Scale != nil):
		c.add(key, "two sets of parameters", "mean and cv, or the other two")
		return
	}
	law, err := s.law()
	if err != nil {
		c.law(key, err)
		return
	}
	if mean := law.Mean(); math.IsInf(mean, 0) || math.IsNaN(mean) {
		c.add(key, "a law whose mean does not exist or is too large", "a ceiling, or other parameters (alpha above 1, xi below 1)")
	}
}

// law reports what the constructor of a law says.
func (c *checker) law(key string, err error) {
	all := fault.All(err)
	for _, f := range all {
		f.Key = key + ".family"
		c.take(*f)
	}
	if len(all) == 0 {
		c.add(key, strings.TrimPrefix(err.Error(), "loss: "), "")
	}
}

func (c *checker) attritional(a Attritional) {
	const key = "book.attritional"
	c.word(key+".family", "family", a.Family, []string{"lognormal", "gamma"})
	if len(a.Losses) == 0 {
		c.add(key+".losses", "no class", "at least one")
	}
	classes := names{has: map[string]bool{}, broken: c.broken(key + ".losses")}
	for i, l := range a.Losses {
		at := fmt.Sprintf("%s.losses[%d]", key, i)
		c.known(at+".class", "class", l.Class, c.classes)
		c.once(at+".class", l.Class, classes.has)
		classes.list = append(classes.list, l.Class)
		c.moneyAbove(at+".mean", l.Mean)
		c.within(at+".cv", float64(l.CV), 0, math.Inf(1), true, false, "a fraction above 0")
	}
	correlation := func(key string, x Fraction) {
		c.within(key, float64(x), -1, 1, false, false, "a correlation from -1 to 1")
	}
	if a.Correlation != nil {
		correlation(key+".correlation", *a.Correlation)
	}
	pairs := map[string]bool{}
	for i, r := range a.Correlations {
		at := fmt.Sprintf("%s.correlations[%d]", key, i)
		correlation(at+".correlation", r.Correlation)
		if len(r.Between) != 2 || r.Between[0] == r.Between[1] {
			c.add(at+".between", fmt.Sprintf("%q", r.Between), "two different classes")
			continue
		}
		for j, class := range r.Between {
			c.known(fmt.Sprintf("%s.between[%d]", at, j), "class of the attritional losses", class, classes)
		}
		c.once(at+".between", min(r.Between[0], r.Between[1])+" and "+max(r.Between[0], r.Between[1]), pairs)
	}
}

// perils gives the perils that the book has; known is false when only its tables can say.
func (s Study) perils() (perils []string, known bool) {
	if len(s.Book.Tables) > 0 {
		return nil, false
	}
	seen := map[string]bool{}
	add := func(name string) {
		if !seen[name] {
			seen[name], perils = true, append(perils, name)
		}
	}
	for _, m := range s.Book.Models {
		add(m.Peril)
	}
	if s.Book.Attritional != nil {
		add(loss.AttritionalPeril)
	}
	return perils, true
}
