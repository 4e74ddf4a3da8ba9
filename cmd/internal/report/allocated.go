package report

import (
	"fmt"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// allocationOf gives the allocation of a programme's capital; false when it was not worked out.
func allocationOf(a study.Appraised, name string) (optimize.Allocation, bool) {
	for i, p := range a.Programmes {
		if p.Programme.Name == name && i < len(a.Allocations) {
			return a.Allocations[i], true
		}
	}
	return optimize.Allocation{}, false
}

// unitOfAllocation gives the unit for an allocation's money.
func unitOfAllocation(a optimize.Allocation) unit { return unitOf(a.Gross, a.Net) }

// returnOn writes a class's expected result over its capital.
func returnOn(mean float64, capital optimize.Estimate) string {
	if r := optimize.Return(mean, capital.Value); finite(r) && capital.Value > capital.StandardError {
		return percentTo(r, 0, false)
	}
	return "–"
}

// classCapitalTable shows which classes need the capital, before and after the programme, and what they earn on it.
func classCapitalTable(a optimize.Allocation) textTable {
	u := unitOfAllocation(a)
	t := textTable{
		Title: fmt.Sprintf("Where the capital of “%s” comes from", clean(a.Standard)),
		Head:  []string{"class", "gross capital", "expected result", "return", "net capital", "expected result", "return"},
	}
	gross, net := 0.0, 0.0
	for _, k := range a.Classes {
		t.Rows = append(t.Rows, []string{clean(k.Name), u.estimate(k.Gross), u.amount(k.GrossMean), returnOn(k.GrossMean, k.Gross), u.estimate(k.Net), u.amount(k.NetMean), returnOn(k.NetMean, k.Net)})
		gross += k.GrossMean
		net += k.NetMean
	}
	return textTable{Title: t.Title, Head: t.Head, Rows: append(t.Rows, []string{"all classes", u.amount(a.Gross), u.amount(gross),
		returnOn(gross, optimize.Estimate{Value: a.Gross}), u.amount(a.Net), u.amount(net), returnOn(net, optimize.Estimate{Value: a.Net})})}
}

// perilCapitalTable shows which perils' losses set the capital.
func perilCapitalTable(a optimize.Allocation) textTable {
	u := unitOfAllocation(a)
	t := textTable{Head: []string{"peril", "losses in the gross capital", "losses in the years that set the net capital"}}
	for _, k := range a.Perils {
		t.Rows = append(t.Rows, []string{clean(k.Name), u.estimate(k.Gross), u.estimate(k.Net)})
	}
	return textTable{Title: t.Title, Head: t.Head, Rows: append(t.Rows, []string{"expenses less premiums", u.amount(a.Certain), "–"})}
}

// treatyCapitalTable shows what each treaty frees, seen in three ways.
func treatyCapitalTable(a optimize.Allocation) textTable {
	u := unitOfAllocation(a)
	t := textTable{Head: []string{"treaty frees", "alone", "last in", "by natural allocation"}}
	for _, k := range a.Treaties {
		t.Rows = append(t.Rows, []string{clean(k.Name), u.amount(k.StandAlone), u.amount(k.LastIn), u.estimate(k.Natural)})
	}
	return t
}

// allocationWords says how to read the tables.
const allocationWords = "Parts are averaged over the years that set the capital (natural allocation), so they add up. Alone: against no cover. Last in: against the programme without the treaty. " +
	"A negative figure: the treaty's price and the profit given away outweigh what it pays in those years."

// allocationTables gives the tables of an allocation that has something to show.
func allocationTables(a optimize.Allocation) []textTable {
	tables := []textTable{classCapitalTable(a), perilCapitalTable(a)}
	if len(a.Treaties) > 0 {
		tables = append(tables, treatyCapitalTable(a))
	}
	return tables
}

// allocationsJSON writes the allocations of all programmes.
func allocationsJSON(a study.Appraised) []object {
	list := []object{}
	for i, k := range a.Allocations {
		list = append(list, object{
			{"programme", a.Programmes[i].Programme.Name}, {"standard", k.Standard}, {"gross", number(k.Gross)}, {"net", number(k.Net)},
			{"classes", objects(k.Classes, func(c optimize.ClassCapital) object {
				return object{{"name", c.Name}, {"gross", estimate(c.Gross)}, {"net", estimate(c.Net)}, {"gross_result", number(c.GrossMean)}, {"net_result", number(c.NetMean)}}
			})},
			{"perils", objects(k.Perils, func(p optimize.PerilCapital) object {
				return object{{"name", p.Name}, {"gross", estimate(p.Gross)}, {"net", estimate(p.Net)}}
			})},
			{"expenses_less_premiums", number(k.Certain)},
			{"treaties", objects(k.Treaties, func(t optimize.TreatyCapital) object {
				return object{{"name", t.Name}, {"stand_alone", number(t.StandAlone)}, {"last_in", number(t.LastIn)}, {"natural", estimate(t.Natural)}}
			})},
		})
	}
	return list
}
