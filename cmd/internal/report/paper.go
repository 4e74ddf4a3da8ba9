package report

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

//go:embed paper.html
var paperText string

var paper = template.Must(template.New("paper").Funcs(template.FuncMap{
	"clean":  clean,
	"figure": func(cell string) string { figure, _ := split(clean(cell)); return figure },
	"error":  func(cell string) string { _, err := split(cell); return strings.TrimSpace(err) },
	"inc":    func(i int) int { return i + 1 },
}).Parse(paperText))

// Setting is one effective setting of a run and where its value came from.
type Setting struct{ Name, Value, Origin string }

// tile is a figure worth a large type.
type tile struct{ Name, Value, Beside string }

// paperGroup is rows of a table under a name.
type paperGroup struct {
	Name string
	Rows []paperRow
}

type paperRow struct {
	Name  string
	Cells []string
	Total bool
}

// treatyList is the treaties of a programme, each with its terms below its figures.
type treatyList struct {
	Name  string
	Head  []string
	Rows  [][]string
	Terms []string
}

// curveSection is what is said about one market curve.
type curveSection struct {
	Name, Words, Note  string
	Picture            template.HTML
	Quotes, Candidates textTable
	Choice             []string
}

// paperView is what the template fills in.
type paperView struct {
	Title, Subtitle, Recommendation, Interrupted string
	Style                                        template.CSS
	Tiles                                        []tile
	Programmes                                   []string
	Best                                         int // column of the best
	Groups                                       []paperGroup
	Towers, Frontier, Exceedance, Capital        template.HTML
	QuotaShares                                  []string
	Treaties                                     []treatyList
	FrontierTable                                textTable
	FrontierCount                                string
	Prices                                       textTable
	PricePictures                                template.HTML
	Allocation                                   []textTable
	AllocationWords                              string
	Relief                                       string // what a treaty's relief is
	OwnCapital                                   bool   // the frontier shows what own capital costs
	Parts                                        []textTable
	PartsWords                                   string
	Standards                                    []string
	Reinsurers                                   []textTable
	Security                                     string
	Curves                                       []curveSection
	Keep, Warnings, Notes, LeftOut               []string
	Caution                                      string
	Run                                          [][2]string
	Settings                                     []Setting
	Inputs                                       []study.Input
}

// Paper writes the result of a search as one self-contained HTML page, for the screen and for A4. run lists the settings that bear on it.
func Paper(w io.Writer, s study.Searched, run []Setting) error {
	named := shownProgrammes(s)
	towers := []optimize.Appraisal{s.Start, s.Result.Best}
	scales := s.Scales
	if s.Start.Programme.Name == s.NoCover.Programme.Name {
		towers, scales = towers[1:], scales[min(1, len(scales)):]
	}
	v := paperView{
		Title: clean(s.Title), Subtitle: fmt.Sprintf("Renewal of reinsurance: the programme to buy. All money in %s; %s.", clean(s.Currency), Count(s.Years, "simulated year", "simulated years")),
		Recommendation: unbroken(Recommendation(s)), Tiles: tiles(s), Best: len(named),
		// These are built by this package from escaped parts.
		Style:      template.CSS(colours(":root") + pictureStyle),
		Towers:     template.HTML(towersPicture(s.Currency, scales, towers...)),
		Frontier:   template.HTML(frontierPicture(s)),
		Exceedance: template.HTML(exceedancePicture(s)),
		Capital:    template.HTML(capitalPicture(s)),

		FrontierTable: frontierTable(s), FrontierCount: Count(len(s.Result.Frontier), "programme", "programmes"),
		QuotaShares: quotaShares(towers), Relief: reliefWords(s.Appraised), OwnCapital: s.CostOfCapital > 0,
		Keep: keepWords(s.Keep), Warnings: s.Warnings, Notes: s.Notes, LeftOut: leftOut(s.Appraised), Caution: Caution, Inputs: s.Inputs, Settings: run,
	}
	if s.Result.Status == optimize.Interrupted {
		v.Interrupted = "The search was interrupted. What follows is the best that it had found until then."
	}
	for _, p := range named {
		v.Programmes = append(v.Programmes, clean(p.Programme.Name))
	}
	for _, g := range figureGroups(s.Appraised, named) {
		group := paperGroup{Name: clean(g.name)}
		for _, r := range g.rows {
			group.Rows = append(group.Rows, paperRow{clean(r.name), r.cells, r.total})
		}
		v.Groups = append(v.Groups, group)
	}
	prices := pricesOf(s.Appraised, s.Result.Best.Programme.Name)
	v.Prices, v.PricePictures = priceTable(prices), pricePanels(prices, s.Currency)
	if list := allocationsOf(s.Appraised, s.Result.Best.Programme.Name); len(list) > 0 {
		v.AllocationWords = allocationWords(list...)
		for _, k := range list {
			v.Allocation = append(v.Allocation, allocationTables(k, flatRate(s.Appraised))...)
		}
	}
	v.Parts, v.PartsWords, v.Standards = partsTables(s.Appraised, named), partsWords, standardsWords(s.Appraised)
	if v.Reinsurers = reinsurerTables(s.Appraised, named); len(v.Reinsurers) > 0 {
		v.Security = securityWords(s.Appraised)
	}
	for _, c := range s.Curves {
		v.Curves = append(v.Curves, curveOf(c))
	}
	for k := len(towers) - 1; k >= 0; k-- {
		v.Treaties = append(v.Treaties, treatiesOf(towers[k]))
	}
	v.Run = [][2]string{
		{"Search", strings.TrimPrefix(searchWords(s), "Searched: ") + " " + boundWords(s)},
		{"Seeds", fmt.Sprintf("book %d, search %d", s.Head.Seed, s.Result.Seed)},
		costSetting(s.Appraised),
		{"Program", Version()},
	}
	return paper.Execute(w, v)
}

// tiles picks the four figures on which a decision turns.
func tiles(s study.Searched) []tile {
	best, start := s.Result.Best, s.Start
	against := func(figure string) string {
		if start.Programme.Name == s.NoCover.Programme.Name {
			return ""
		}
		return fmt.Sprintf("%s with “%s”", figure, start.Programme.Name)
	}
	cost := tile{"Total cost a year", Estimated(best.TotalCost), against(Estimated(start.TotalCost))}
	if d, ok := difference(s.Appraised, best.Programme.Name); ok {
		cost.Beside = fmt.Sprintf("%s against “%s”", Estimated(d.TotalCost), d.Against)
	}
	list := []tile{
		cost,
		{"Capital freed", Estimated(best.Driving.Relief), against(Estimated(start.Driving.Relief))},
		{"Margin given a year", Estimated(best.CededMargin), against(Estimated(start.CededMargin))},
		{"Rent of that capital", rent(best), ownCapitalCosts(s)},
	}
	for i := range list {
		list[i].Beside = unbroken(clean(list[i].Beside))
	}
	return list
}

// quotaShares tells the quota shares of programmes, which no picture of layers shows.
func quotaShares(all []optimize.Appraisal) []string {
	var list []string
	for _, a := range all {
		var shares []string
		for _, f := range a.Treaties {
			if t := f.Terms; t.Kind == treaty.QuotaShare && t.Placed() > 0 {
				shares = append(shares, fmt.Sprintf("%s of %s (%s)", percentOf(t.Cession), subject(t), t.Name))
			}
		}
		if len(shares) > 0 {
			list = append(list, clean(a.Programme.Name+": "+joined(shares)))
		}
	}
	return list
}

func treatiesOf(p optimize.Appraisal) treatyList {
	t := treatyList{Name: clean(p.Programme.Name), Head: treatyHead}
	u := unitOfTreaties(p)
	for _, f := range p.Treaties {
		t.Rows, t.Terms = append(t.Rows, treatyCells(f, u)), append(t.Terms, unbroken(termsOf(f)))
	}
	return t
}

func curveOf(c study.CurveFit) curveSection {
	section := curveSection{Name: clean(c.Curve.Name), Words: clean(sentence(curveWords(c))), Picture: template.HTML(curvePicture(c)),
		Note: "Set by hand in the study; no quote stands behind it."}
	if c.Chosen != nil {
		section.Quotes, section.Candidates, section.Note = quoteTable(c.Chosen), candidateTable(c), quoteWords(c.Chosen)
		section.Choice = choiceWords(c)
	}
	return section
}

func frontierTable(s study.Searched) textTable {
	front := s.Result.Frontier
	t := textTable{Head: append(append([]string{}, frontierHead...), "layers"), Remark: true}
	u := unitOfProgrammes(front)
	for _, i := range excerpt(len(front), frontierShown) {
		var terms []string
		for _, f := range front[i].Treaties {
			terms = append(terms, briefly(f.Terms))
		}
		t.Rows = append(t.Rows, append(frontierCells(front[i], u), clean(strings.Join(terms, "; "))))
	}
	return t
}

// briefly names a treaty by its money and share alone.
func briefly(t treaty.Treaty) string {
	if t.Kind == treaty.QuotaShare {
		return t.Name + " " + percentOf(t.Cession)
	}
	text := Terms(t.Limit) + " xs " + Terms(t.Retention)
	if t.Share < 1 {
		text += " (" + percentOf(t.Share) + ")"
	}
	return text
}

// SearchFiles gives the files of a search beside result.json.
func SearchFiles(s study.Searched, run []Setting) []File {
	return []File{
		{Name: "frontier.csv", Write: func(w io.Writer) error { return FrontierCSV(w, s) }},
		{Name: "report.html", Write: func(w io.Writer) error { return Paper(w, s, run) }},
	}
}
