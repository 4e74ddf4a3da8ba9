package report

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

//go:embed paper.html
var paperText string

var paper = template.Must(template.New("paper").Parse(paperText))

// Colours, chosen apart in lightness as well as in hue; every mark has a shape or a text of its own too.
const (
	lightColours = "--ink:#1d2733;--soft:#5b6b7a;--line:#d9e0e6;--page:#ffffff;--panel:#f4f6f8;--main:#0b6e75;--warm:#b4531a;--pale:#b9d7da;--quiet:#7a8894;"
	darkColours  = "--ink:#e6ebef;--soft:#a3b0bc;--line:#3a4650;--page:#14191e;--panel:#1d242b;--main:#5cc3ca;--warm:#f0a06a;--pale:#2c5a5e;--quiet:#8d9aa6;"
)

// pictureStyle colours the marks of every picture.
const pictureStyle = `.grid{stroke:var(--line);stroke-width:1}.tick{fill:var(--soft);font-size:12px}.axis{fill:var(--soft);font-size:13px}
.label{fill:var(--ink);font-size:13px;paint-order:stroke;stroke:var(--page);stroke-width:4px;stroke-linejoin:round}.leader{stroke:var(--quiet);stroke-width:1}.period{fill:var(--soft);font-size:11px}.period-mark{stroke:var(--quiet);stroke-width:1.5}
polyline{fill:none;stroke-width:2}.front{stroke:var(--main)}.front-point{fill:var(--main)}.own{stroke:var(--warm);stroke-dasharray:6 5}
.diagonal{stroke:var(--quiet);stroke-dasharray:2 4}.gross{stroke:var(--quiet);stroke-dasharray:7 4}.start-line{stroke:var(--warm);stroke-dasharray:2 3}.best-line{stroke:var(--main)}
.best{fill:var(--main)}.none{fill:none;stroke:var(--ink);stroke-width:2}.start{fill:var(--warm)}.other{fill:var(--quiet)}
.quote{fill:var(--warm)}.span{stroke:var(--warm);stroke-width:1.5;opacity:.6}
.block{fill:var(--pale);stroke:var(--main);stroke-width:1.5}.unplaced{fill:none;stroke:var(--quiet);stroke-dasharray:3 3}`

// paperTable is a table of text.
type paperTable struct {
	Title string
	Head  []string
	Rows  [][]string // an empty row is a rule
}

// paperView is what the template fills in.
type paperView struct {
	Title, Subtitle, Recommendation string
	Style                           template.CSS
	Figures                         paperTable
	Towers, Frontier, Exceedance    template.HTML
	Curves                          []template.HTML
	Treaties                        []paperTable
	FrontierTable                   paperTable
	Keep                            []string
	Warnings, Notes, LeftOut        []string
	Caution                         string
	Run                             [][2]string
	Inputs                          []study.Input
}

// Paper writes the result of a search as one self-contained HTML page.
func Paper(w io.Writer, s study.Searched) error {
	columns := []optimize.Appraisal{s.NoCover}
	towers := []optimize.Appraisal{}
	if s.Start.Programme.Name != s.NoCover.Programme.Name {
		columns, towers = append(columns, s.Start), append(towers, s.Start)
	}
	columns, towers = append(columns, s.Result.Best), append(towers, s.Result.Best)
	v := paperView{
		Title: s.Title, Subtitle: fmt.Sprintf("%s a year unless said otherwise, %s simulated years", s.Currency, thousands(s.Years)),
		Recommendation: Recommendation(s),
		// All of these are built by this package from escaped parts.
		Style:      template.CSS(":root{" + lightColours + "}@media (prefers-color-scheme:dark){:root{" + darkColours + "}}@media print{:root{" + lightColours + "}}" + pictureStyle),
		Towers:     template.HTML(towersPicture(s.Currency, s.Scales, towers...)),
		Frontier:   template.HTML(frontierPicture(s)),
		Exceedance: template.HTML(exceedancePicture(s)),
		Figures:    sideBySide(s.Appraised, columns),
		Keep:       keepWords(s.Keep), Warnings: s.Warnings, Notes: s.Notes, LeftOut: leftOut, Caution: Caution, Inputs: s.Inputs,
		FrontierTable: frontierTable(s),
	}
	for _, c := range s.Curves {
		v.Curves = append(v.Curves, template.HTML(curvePicture(c)))
	}
	for _, p := range towers {
		v.Treaties = append(v.Treaties, treatyTable(p))
	}
	polished := ""
	if s.Result.Polished {
		polished = "; no single move on the steps improves the best"
	}
	v.Run = [][2]string{
		{"search", fmt.Sprintf("%s; %s programmes appraised, %d generations, %s%s", s.Space, thousands(s.Result.Evaluations), s.Result.Generations, s.Result.Status, polished)},
		{"seeds", fmt.Sprintf("book %d, search %d", s.Head.Seed, s.Result.Seed)},
		{"capital", fmt.Sprintf("cost of capital %s a year, first standard %s", Percent(s.CostOfCapital), s.NoCover.Capital[0].Standard)},
		{"program", Version()},
	}
	return paper.Execute(w, v)
}

func sideBySide(a study.Appraised, columns []optimize.Appraisal) paperTable {
	t := paperTable{Head: []string{"figure"}, Rows: figureRows(a, columns)}
	for _, p := range columns {
		t.Head = append(t.Head, p.Programme.Name)
	}
	return t
}

func treatyTable(p optimize.Appraisal) paperTable {
	t := paperTable{Title: p.Programme.Name, Head: treatyHead}
	for _, f := range p.Treaties {
		t.Rows = append(t.Rows, treatyCells(f))
	}
	return t
}

func frontierTable(s study.Searched) paperTable {
	t := paperTable{Head: []string{"treaties", "relief", "ceded margin", "total cost", "rent", "ceded premium"}}
	for _, p := range s.Result.Frontier {
		var names []string
		for _, f := range p.Treaties {
			names = append(names, f.Terms.Describe(Money))
		}
		if len(names) == 0 {
			names = []string{"none"}
		}
		t.Rows = append(t.Rows, []string{strings.Join(names, " · "), Estimated(p.Capital[0].Relief), Estimated(p.CededMargin), Estimated(p.TotalCost), rent(p), Estimated(p.CededPremium)})
	}
	return t
}

// SearchFiles gives the files of a search beside result.json.
func SearchFiles(s study.Searched) ([]File, error) {
	return []File{
		{Name: "frontier.csv", Write: func(w io.Writer) error { return FrontierCSV(w, s) }},
		{Name: "report.html", Write: func(w io.Writer) error { return Paper(w, s) }},
	}, nil
}
