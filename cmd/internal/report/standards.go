package report

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
)

// bindingMark stands before the requirement that no other standard exceeds; a word beside the table says so.
const bindingMark = "▸ "

// driving names what drives: "one-year", or "the worst of one-year and tail". Each name is put into quotes if asked.
func driving(a study.Appraised, quoted bool) string {
	names := slices.Clone(a.Drive)
	if len(names) == 0 && len(a.Programmes) > 0 {
		names = []string{a.Programmes[0].Driving.Standard}
	}
	for i, name := range names {
		if quoted {
			names[i] = "“" + name + "”"
		}
	}
	if len(names) == 1 {
		return clean(names[0])
	}
	return clean("the worst of " + joined(names))
}

// capitalGroups gives required capital, relief and own funds ratio of programmes: under one standard as one group, under several as a group for each
// figure, so that standards are read beside each other.
func capitalGroups(a study.Appraised, all []optimize.Appraisal, u unit) []figureGroup {
	standards := all[0].Capital
	if len(standards) == 1 {
		g := figureGroup{name: "Capital under the standard “" + standards[0].Standard + "”"}
		for _, f := range capitalFigures(a, standards) {
			r := f.row(all, u, 0)
			r.name = f.alone
			g.rows = append(g.rows, r)
		}
		return []figureGroup{g}
	}
	var groups []figureGroup
	for _, f := range capitalFigures(a, standards) {
		g := figureGroup{name: f.every}
		for i, c := range standards {
			if !f.has(c) {
				continue
			}
			r := f.row(all, u, i)
			r.name = c.Standard
			if slices.Contains(a.Drive, c.Standard) {
				r.name += " (drives)"
			}
			g.rows = append(g.rows, r)
		}
		groups = append(groups, g)
	}
	return groups
}

// capitalFigure is one figure that every standard has.
type capitalFigure struct {
	alone string // its name under a single standard
	every string // the name of the group of all standards
	has   func(optimize.CapitalFigure) bool
	cell  func(p optimize.Appraisal, standard int, u unit) string
}

func (f capitalFigure) row(all []optimize.Appraisal, u unit, standard int) figureRow {
	var r figureRow
	for _, p := range all {
		r.cells = append(r.cells, f.cell(p, standard, u))
	}
	return r
}

// capitalFigures lists the figures that there are to show; with a rest of the company, those of the book alone stand first.
func capitalFigures(a study.Appraised, standards []optimize.CapitalFigure) []capitalFigure {
	always := func(optimize.CapitalFigure) bool { return true }
	before := func(c optimize.CapitalFigure) bool { return c.Alone != nil }
	const binding = " (" + bindingMark + "binding: none asks more)"
	whole := capitalFigure{"required capital", "Required capital under every standard" + binding, always, func(p optimize.Appraisal, i int, u unit) string {
		text := u.estimate(p.Capital[i].Net)
		if p.Capital[i].Binding && len(p.Capital) > 1 {
			text = bindingMark + text
		}
		return text
	}}
	relief := capitalFigure{"capital relief", "Capital relief", always, func(p optimize.Appraisal, i int, u unit) string {
		return u.estimate(p.Capital[i].Relief)
	}}
	list := []capitalFigure{whole, relief}
	if slices.ContainsFunc(standards, before) {
		list[0].alone, list[0].every = "required capital, diversified", "Required capital after diversification"+binding
		list[1].alone, list[1].every = "capital relief, diversified", "Capital relief after diversification"
		of := func(read func(optimize.Alone) optimize.Estimate) func(optimize.Appraisal, int, unit) string {
			return func(p optimize.Appraisal, i int, u unit) string {
				if p.Capital[i].Alone == nil {
					return "–"
				}
				return u.estimate(read(*p.Capital[i].Alone))
			}
		}
		net := of(func(x optimize.Alone) optimize.Estimate { return x.Net })
		freed := of(func(x optimize.Alone) optimize.Estimate { return x.Relief })
		list = []capitalFigure{
			{"required capital, book alone", "Required capital of the book alone, before diversification", before, net}, list[0],
			{"capital relief, book alone", "Capital relief of the book alone, before diversification", before, freed}, list[1],
		}
	}
	if a.OwnFunds > 0 {
		list = append(list, capitalFigure{"own funds ratio", "Own funds ratio (own funds " + Terms(a.OwnFunds) + ")", always, func(p optimize.Appraisal, i int, _ unit) string {
			if i >= len(p.OwnFundsRatio) {
				return "–"
			}
			return EstimatedPercent(p.OwnFundsRatio[i])
		}})
	}
	return list
}

// standardAt gives the standard of a place among the capital figures; one without any content when it is not known.
func standardAt(a study.Appraised, i int) capital.Standard {
	if i < len(a.Standards) {
		return a.Standards[i]
	}
	return capital.Standard{}
}

// partsTables shows, for every standard that has them, what its requirement is made of under each programme. Parts do not add up, unless weighted.
func partsTables(a study.Appraised, all []optimize.Appraisal) []textTable {
	var tables []textTable
	if len(all) == 0 {
		return nil
	}
	u := unitOfProgrammes(all)
	for i, c := range all[0].Capital {
		k := standardAt(a, i)
		parts := partsOf(all, i)
		if len(parts) == 0 {
			continue
		}
		t := textTable{Title: fmt.Sprintf("What the requirement under “%s” is made of", clean(c.Standard)), Head: []string{"part"}}
		if slices.ContainsFunc(all, func(p optimize.Appraisal) bool {
			return slices.ContainsFunc(p.Capital[i].Parts, func(x optimize.CapitalPart) bool { return x.Sets })
		}) {
			t.Title += " (" + bindingMark + "sets it)"
		}
		for _, p := range all {
			t.Head = append(t.Head, clean(p.Programme.Name))
		}
		if !k.Simulated() && wholeLast(all, i, len(parts)) {
			parts = parts[:len(parts)-1] // it stands below, with its error
		}
		for n, part := range parts {
			row := []string{clean(partName(k, n, part.Name))}
			for _, p := range all {
				row = append(row, partCell(p.Capital[i], n, u))
			}
			t.Rows = append(t.Rows, row)
		}
		t.Rows = append(t.Rows, combinedRows(a, all, i, u)...)
		tables = append(tables, t)
	}
	return tables
}

// partsWords stands below the tables of parts.
const partsWords = "Parts do not add up, unless they are weighted: the standard says how they are combined."

// partsOf gives the parts of the first programme that has them.
func partsOf(all []optimize.Appraisal, standard int) []optimize.CapitalPart {
	for _, p := range all {
		if parts := p.Capital[standard].Parts; len(parts) > 0 {
			return parts
		}
	}
	return nil
}

// wholeLast tells whether the last of so many parts is the whole requirement.
func wholeLast(all []optimize.Appraisal, standard, count int) bool {
	return !slices.ContainsFunc(all, func(p optimize.Appraisal) bool {
		c := p.Capital[standard]
		return len(c.Parts) == count && c.Parts[count-1].Amount != c.Net.Value
	})
}

// partCell writes a part, whose error is not known, with three digits, or fewer where the error of the whole requirement is coarser.
func partCell(c optimize.CapitalFigure, n int, u unit) string {
	if n >= len(c.Parts) {
		return "–"
	}
	part := c.Parts[n]
	text := u.amount(part.Amount)
	if x := part.Amount / u.factor; x != 0 && finite(x) && known(c.Net) {
		if places := decimals(c.Net.StandardError / u.factor); places < 2-int(math.Floor(math.Log10(math.Abs(x)))) { // coarser than three digits
			text = fixed(x, places) + u.suffix
		}
	}
	if part.Sets {
		text = bindingMark + text
	}
	return text
}

// partName adds the weight of a criterion to its name.
func partName(k capital.Standard, n int, name string) string {
	if k.Combination == capital.Weighted && n < len(k.Criteria) {
		return name + ", weight " + percentOf(k.Criteria[n].Weight)
	}
	return name
}

// combinedRows gives what parts come to; with the rest of the company as a capital figure they speak of the book alone.
func combinedRows(a study.Appraised, all []optimize.Appraisal, standard int, u unit) [][]string {
	var rows [][]string
	if a.Rest != nil && a.Rest.Quantile == nil && all[0].Capital[standard].Alone != nil {
		row := []string{"together, book alone"}
		for _, p := range all {
			cell := "–"
			if alone := p.Capital[standard].Alone; alone != nil {
				cell = u.estimate(alone.Net)
			}
			row = append(row, cell)
		}
		rows = append(rows, row)
	}
	row := []string{"required capital"}
	for _, p := range all {
		row = append(row, u.estimate(p.Capital[standard].Net))
	}
	return append(rows, row)
}

// formulaCaution stands wherever a standard formula or a covariance is shown.
const formulaCaution = "The factors and matrices of a standard formula and the charges of a covariance are data of a file or of the study, to be checked against the law " +
	"in force by the responsible actuary; scenario losses, reserves and the capital of other modules are the company's own inputs."

// givenRules tells whether some standard is a formula or a covariance.
func givenRules(a study.Appraised) bool {
	return slices.ContainsFunc(a.Standards, func(k capital.Standard) bool { return k.Formula != nil || k.Covariance != nil })
}

// standardsWords says of every standard what it measures and where it is from, then what is known of the rest of the company, and the caution that formulas
// need.
func standardsWords(a study.Appraised) []string {
	var list []string
	for _, k := range a.Standards {
		text := k.Name
		if slices.Contains(a.Drive, k.Name) {
			text += ", which drives"
		}
		text += ": " + standardRule(k)
		if k.Source != "" {
			text += "; source: " + k.Source
		}
		list = append(list, clean(text)+".")
	}
	if a.Rest != nil {
		list = append(list, "Rest of the company: "+clean(restWords(a.Rest))+".")
	}
	if givenRules(a) {
		list = append(list, formulaCaution)
	}
	return list
}

// standardRule says what a standard measures.
func standardRule(k capital.Standard) string {
	switch {
	case k.Formula != nil:
		return "the standard formula"
	case k.Covariance != nil:
		return fmt.Sprintf("a covariance of charges, with the losses of %s each at %s", joined(k.Covariance.Perils), k.Covariance.Level)
	}
	var criteria []string
	for i, c := range k.Criteria {
		criteria = append(criteria, partName(k, i, fmt.Sprintf("%s on basis %s", c, c.Basis)))
	}
	switch {
	case len(criteria) < 2:
		return strings.Join(criteria, "")
	case k.Combination == capital.Weighted:
		return "the sum of " + joined(criteria)
	}
	return "the worst of " + joined(criteria)
}

func restWords(r *capital.Rest) string {
	if r.Quantile != nil || r.Law != "" {
		return fmt.Sprintf("a yearly loss, %s, rank correlation %s with the book's gross losses", r.Law, written(r.RankCorrelation, 4))
	}
	return fmt.Sprintf("required capital of %s, correlation %s with that of the book; simulated standards alone take it in", Terms(r.Capital), written(r.Correlation, 4))
}

// printStandards writes what requirements are made of, and what the standards are.
func printStandards(w io.Writer, s Style, a study.Appraised, all []optimize.Appraisal) {
	if tables := partsTables(a, all); len(tables) > 0 {
		for _, t := range tables {
			printTable(w, s, t)
		}
		wrapped(w, partsWords, "", s.width())
		fmt.Fprintln(w)
	}
	words := standardsWords(a)
	if len(words) == 0 {
		return
	}
	fmt.Fprintln(w, s.in(bold, "The standards"))
	for _, text := range words {
		bullet(w, s, text)
	}
	fmt.Fprintln(w)
}
