package report

import (
	"fmt"
	"io"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

func printHead(w io.Writer, s Style, h study.Head, what string) {
	fmt.Fprintln(w, s.in(bold, clean(h.Title)))
	fmt.Fprintf(w, "%s; %s, %s, seed of the book %d\n\n", what, clean(h.Currency), Count(h.Years, "simulated year", "simulated years"), h.Seed)
}

func printFoot(w io.Writer, s Style, h study.Head) {
	for _, n := range h.Notes {
		bullet(w, s, n)
	}
	for _, n := range h.Warnings {
		mind(w, s, n)
	}
	if len(h.Notes)+len(h.Warnings) > 0 {
		fmt.Fprintln(w)
	}
	wrapped(w, Caution, "", s.width())
}

// PrintAppraised writes the answer of appraise for a terminal.
func PrintAppraised(w io.Writer, a study.Appraised, s Style) {
	printHead(w, s, a.Head, "Programmes side by side")
	printSideBySide(w, s, a, a.Programmes, 0)
	printStandards(w, s, a, a.Programmes)
	printReinsurers(w, s, a, a.Programmes)
	for i, p := range a.Programmes {
		printTreaties(w, s, a, p)
		if i < len(a.Prices) && len(a.Prices[i]) > 0 {
			printTable(w, s, priceTable(a.Prices[i]))
		}
		if k, ok := drivingAllocation(a, p.Programme.Name); ok && len(k.Treaties) > 0 {
			printAllocation(w, s, k, flatRate(a))
		}
	}
	printFoot(w, s, a.Head)
}

// printSideBySide writes one row a figure and one column a programme.
func printSideBySide(w io.Writer, s Style, a study.Appraised, all []optimize.Appraisal, best int) {
	if len(all) == 0 {
		return
	}
	g := newGrid("", "")
	g.best = best
	for _, p := range all {
		g.head = append(g.head, p.Programme.Name)
	}
	for _, group := range figureGroups(a, all) {
		g.rows = append(g.rows, gridRow{name: group.name})
		for _, r := range group.rows {
			g.rows = append(g.rows, gridRow{cells: append([]string{r.name}, r.cells...), total: r.total})
		}
	}
	g.print(w, s)
}

func printTreaties(w io.Writer, s Style, a study.Appraised, p optimize.Appraisal) {
	if len(p.Treaties) == 0 {
		return
	}
	g := newGrid(fmt.Sprintf("Treaties of “%s”, as placed", clean(p.Programme.Name)), treatyHead...)
	u := unitOfTreaties(p)
	for _, f := range p.Treaties {
		g.add(treatyCells(f, u)...)
	}
	g.print(w, s)
	for _, f := range p.Treaties {
		bullet(w, s, f.Terms.Name+": "+termsOf(f))
	}
	wrapped(w, "Rates are for 100 % of a treaty. "+reliefWords(a), "", s.width())
	fmt.Fprintln(w)
}

// reliefWords says what a treaty's relief is.
func reliefWords(a study.Appraised) string {
	return "Relief is last in: required capital without the treaty less with it, under " + driving(a, true) + "."
}

func printAllocation(w io.Writer, s Style, a optimize.Allocation, rate float64) {
	for _, t := range allocationTables(a, rate) {
		printTable(w, s, t)
	}
	wrapped(w, allocationWords(a), "", s.width())
	fmt.Fprintln(w)
}

// PrintSearched writes the answer of search for a terminal.
func PrintSearched(w io.Writer, found study.Searched, s Style) {
	printHead(w, s, found.Head, "The recommended programme")
	wrapped(w, Recommendation(found), "", s.width())
	fmt.Fprintln(w)
	columns := shownProgrammes(found)
	printSideBySide(w, s, found.Appraised, columns, len(columns))
	printStandards(w, s, found.Appraised, columns)
	printReinsurers(w, s, found.Appraised, columns)
	printTreaties(w, s, found.Appraised, found.Result.Best)
	printFrontier(w, s, found)
	wrapped(w, searchWords(found), "", s.width())
	if text := boundWords(found); text != "" {
		wrapped(w, text, "", s.width())
	}
	for _, k := range keepWords(found.Keep) {
		wrapped(w, "Kept: "+k+".", "", s.width())
	}
	fmt.Fprintln(w, "\n"+s.in(bold, "What the figures leave out"))
	for _, text := range leftOut(found.Appraised) {
		bullet(w, s, text)
	}
	fmt.Fprintln(w)
	printFoot(w, s, found.Head)
}

// shownProgrammes gives no cover, the start, the other programmes of the study, and last the best found.
func shownProgrammes(found study.Searched) []optimize.Appraisal {
	all := []optimize.Appraisal{found.NoCover}
	if found.Start.Programme.Name != found.NoCover.Programme.Name {
		all = append(all, found.Start)
	}
	for _, p := range found.Programmes {
		switch p.Programme.Name {
		case found.NoCover.Programme.Name, found.Start.Programme.Name, found.Result.Best.Programme.Name:
		default:
			all = append(all, p)
		}
	}
	return append(all, found.Result.Best)
}

// frontierShown is about how many programmes of the frontier are shown in tables; frontier.csv has all.
const frontierShown = 10

// excerpt gives places of a list, evenly spread, both ends among them.
func excerpt(n, most int) []int {
	var list []int
	if n <= most {
		for i := range n {
			list = append(list, i)
		}
		return list
	}
	for k := range most {
		list = append(list, (k*(n-1)+(most-1)/2)/(most-1))
	}
	return list
}

var frontierHead = []string{"relief", "ceded margin", "total cost", "rent", "ceded premium", "treaties"}

// frontierCells gives the figures of frontierHead.
func frontierCells(p optimize.Appraisal, u unit) []string {
	return []string{u.estimate(p.Driving.Relief), u.estimate(p.CededMargin), u.estimate(p.TotalCost), rent(p), u.estimate(p.CededPremium), fmt.Sprint(len(p.Treaties))}
}

func printFrontier(w io.Writer, s Style, found study.Searched) {
	front := found.Result.Frontier
	if len(front) == 0 {
		return
	}
	places := excerpt(len(front), frontierShown)
	g := newGrid(fmt.Sprintf("Frontier: the least ceded margin for each capital relief, %d of %s", len(places), Count(len(front), "programme", "programmes")), frontierHead...)
	g.left[0] = false
	u := unitOfProgrammes(front)
	for _, i := range places {
		g.add(frontierCells(front[i], u)...)
	}
	g.print(w, s)
	wrapped(w, "Relief is that of required capital under "+driving(found.Appraised, true)+".", "", s.width())
	fmt.Fprintln(w)
}
