package report

import (
	"fmt"
	"math"
	"slices"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// allocationsOf gives the allocations of a programme's capital, that of the standard that drives first; none when they were not worked out.
func allocationsOf(a study.Appraised, name string) []optimize.Allocation {
	for i, p := range a.Programmes {
		if p.Programme.Name == name && i < len(a.Allocations) {
			list := slices.Clone(a.Allocations[i])
			slices.SortStableFunc(list, func(x, y optimize.Allocation) int {
				switch {
				case x.Drives == y.Drives:
					return 0
				case x.Drives:
					return -1
				}
				return 1
			})
			return list
		}
	}
	return nil
}

// drivingAllocation gives the allocation under the standard that drives at a programme; false when it was not worked out.
func drivingAllocation(a study.Appraised, name string) (optimize.Allocation, bool) {
	if list := allocationsOf(a, name); len(list) > 0 && list[0].Drives {
		return list[0], true
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

// flatRate gives the flat cost of capital; 0 when the owners have a price of risk of their own.
func flatRate(a study.Appraised) float64 {
	if a.Owners != "" {
		return 0
	}
	return a.CostOfCapital
}

// cost writes the part of what the owners ask that goes with a part of capital. At a flat rate its error is the rate times that of the capital; at a price of
// the owners' own its error is not known, and it is shown as finely as the capital.
func (u unit) cost(x float64, capital optimize.Estimate, rate float64) string {
	if rate > 0 {
		return u.estimate(optimize.Estimate{Value: x, StandardError: rate * capital.StandardError})
	}
	like := optimize.Estimate{Value: x, StandardError: math.Abs(x/capital.Value) * capital.StandardError}
	if !known(like) || !finite(like.Value) {
		return u.amount(x)
	}
	return scaled(like, u.factor) + u.suffix
}

// classCapitalTable shows which classes need the capital, before and after the programme, what they earn on it, what of the owners' cost falls on them, and
// what belongs to no class.
func classCapitalTable(a optimize.Allocation, rate float64) textTable {
	u := unitOfAllocation(a)
	costs := slices.ContainsFunc(a.Classes, func(k optimize.ClassCapital) bool { return k.GrossCost != 0 || k.NetCost != 0 })
	// side gives the cells of one side of the programme.
	side := func(capital string, result, rate, cost string) []string {
		if costs {
			return []string{capital, result, rate, cost}
		}
		return []string{capital, result, rate}
	}
	row := func(name string, gross, net []string) []string {
		return append(append([]string{name}, gross...), net...)
	}
	result := "expected result"
	if costs {
		result = "result" // room for the cost
	}
	t := textTable{
		Title: fmt.Sprintf("Where the capital of “%s” comes from", clean(a.Standard)),
		Head:  row("class", side("gross capital", result, "return", "cost"), side("net capital", result, "return", "cost")),
	}
	var all optimize.ClassCapital
	for _, k := range a.Classes {
		t.Rows = append(t.Rows, row(clean(k.Name),
			side(u.estimate(k.Gross), u.amount(k.GrossMean), returnOn(k.GrossMean, k.Gross), u.cost(k.GrossCost, k.Gross, rate)),
			side(u.estimate(k.Net), u.amount(k.NetMean), returnOn(k.NetMean, k.Net), u.cost(k.NetCost, k.Net, rate))))
		all.GrossMean, all.NetMean = all.GrossMean+k.GrossMean, all.NetMean+k.NetMean
		all.GrossCost, all.NetCost = all.GrossCost+k.GrossCost, all.NetCost+k.NetCost
	}
	grossPart, netPart := a.Gross, a.Net
	for _, o := range a.Others {
		grossPart, netPart = grossPart-o.Gross, netPart-o.Net
	}
	t.Rows = append(t.Rows, row("all classes",
		side(u.amount(grossPart), u.amount(all.GrossMean), returnOn(all.GrossMean, optimize.Estimate{Value: grossPart}), u.amount(all.GrossCost)),
		side(u.amount(netPart), u.amount(all.NetMean), returnOn(all.NetMean, optimize.Estimate{Value: netPart}), u.amount(all.NetCost))))
	for _, o := range a.Others {
		if o.Gross != 0 || o.Net != 0 {
			t.Rows = append(t.Rows, row(clean(o.Name), side(u.amount(o.Gross), "–", "–", u.amount(o.GrossCost)), side(u.amount(o.Net), "–", "–", u.amount(o.NetCost))))
		}
		all.GrossCost, all.NetCost = all.GrossCost+o.GrossCost, all.NetCost+o.NetCost
	}
	if len(a.Others) > 0 {
		t.Rows = append(t.Rows, row("together", side(u.amount(a.Gross), "–", "–", u.amount(all.GrossCost)), side(u.amount(a.Net), "–", "–", u.amount(all.NetCost))))
	}
	return t
}

// perilCapitalTable shows which perils' losses set the capital.
func perilCapitalTable(a optimize.Allocation) textTable {
	u := unitOfAllocation(a)
	t := textTable{Head: []string{"peril", "losses in the gross capital", "losses in the years that set the net capital"}}
	for _, k := range a.Perils {
		t.Rows = append(t.Rows, []string{clean(k.Name), u.estimate(k.Gross), u.estimate(k.Net)})
	}
	if a.Certain != 0 {
		t.Rows = append(t.Rows, []string{"expenses less premiums", u.amount(a.Certain), "–"})
	}
	return t
}

// chargeTable shows what perils and given charges bear of a covariance, which knows no classes.
func chargeTable(a optimize.Allocation) textTable {
	u := unitOfAllocation(a)
	t := textTable{Title: fmt.Sprintf("Where the capital of “%s” comes from", clean(a.Standard)), Head: []string{"peril, charge", "gross capital", "net capital"}}
	for _, k := range a.Perils {
		t.Rows = append(t.Rows, []string{clean(k.Name), u.estimate(k.Gross), u.estimate(k.Net)})
	}
	for _, o := range a.Others {
		if o.Gross != 0 || o.Net != 0 {
			t.Rows = append(t.Rows, []string{clean(o.Name), u.amount(o.Gross), u.amount(o.Net)})
		}
	}
	return textTable{Title: t.Title, Head: t.Head, Rows: append(t.Rows, []string{"together", u.amount(a.Gross), u.amount(a.Net)})}
}

// treatyCapitalTable shows what each treaty frees, seen in three ways, and by how much it lowers what the owners ask.
func treatyCapitalTable(a optimize.Allocation, rate float64) textTable {
	u := unitOfAllocation(a)
	costs := slices.ContainsFunc(a.Treaties, func(k optimize.TreatyCapital) bool { return k.Cost != 0 })
	t := textTable{Head: []string{"treaty frees", "alone", "last in", "by natural allocation"}}
	if costs {
		t.Head = append(t.Head, "cost a year")
	}
	for _, k := range a.Treaties {
		row := []string{clean(k.Name), u.amount(k.StandAlone), u.amount(k.LastIn), u.estimate(k.Natural)}
		if costs {
			row = append(row, u.cost(k.Cost, k.Natural, rate))
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}

// allocationWords says how to read the tables of allocations.
func allocationWords(list ...optimize.Allocation) string {
	text := "Parts are averaged over the years that set the capital (natural allocation), so they add up. "
	if slices.ContainsFunc(list, withoutYears) {
		text += "Under a formula or a covariance of charges a part is its size times its slope, which adds up too. "
	}
	text += "Alone: against no cover. Last in: against the programme without the treaty. "
	if slices.ContainsFunc(list, func(k optimize.Allocation) bool { return k.Drives && len(k.Classes) > 0 }) {
		text += "Result: expected, a year. Cost: the part of what the owners ask for the risk kept, a year. "
	}
	return text + "A negative figure: the treaty's price and the profit given away outweigh what it pays in those years."
}

// withoutYears tells an allocation under a formula or a covariance, which no simulated year sets.
func withoutYears(k optimize.Allocation) bool { return len(k.Classes) == 0 || len(k.Perils) == 0 }

// allocationTables gives the tables of an allocation that have something to show; rate is the flat cost of capital, 0 when the owners have a price of risk of
// their own.
func allocationTables(a optimize.Allocation, rate float64) []textTable {
	var tables []textTable
	switch {
	case len(a.Classes) > 0:
		tables = append(tables, classCapitalTable(a, rate))
		if len(a.Perils) > 0 {
			tables = append(tables, perilCapitalTable(a))
		}
	case len(a.Perils)+len(a.Others) > 0:
		tables = append(tables, chargeTable(a))
	}
	if len(a.Treaties) > 0 {
		tables = append(tables, treatyCapitalTable(a, rate))
	}
	return tables
}

// allocationsJSON writes the allocations of all programmes, one object for each programme and standard.
func allocationsJSON(a study.Appraised) []object {
	list := []object{}
	for i, all := range a.Allocations {
		for _, k := range all {
			list = append(list, allocationJSON(a.Programmes[i].Programme.Name, k))
		}
	}
	return list
}

func allocationJSON(programme string, k optimize.Allocation) object {
	return object{
		{"programme", programme}, {"standard", k.Standard}, {"drives", k.Drives}, {"gross", number(k.Gross)}, {"net", number(k.Net)},
		{"classes", objects(k.Classes, func(c optimize.ClassCapital) object {
			return object{
				{"name", c.Name}, {"gross", estimate(c.Gross)}, {"net", estimate(c.Net)}, {"gross_result", number(c.GrossMean)}, {"net_result", number(c.NetMean)},
				{"gross_cost", number(c.GrossCost)}, {"net_cost", number(c.NetCost)},
			}
		})},
		{"perils", objects(k.Perils, func(p optimize.PerilCapital) object {
			return object{{"name", p.Name}, {"gross", estimate(p.Gross)}, {"net", estimate(p.Net)}}
		})},
		{"expenses_less_premiums", number(k.Certain)},
		{"others", objects(k.Others, func(o optimize.OtherCapital) object {
			return object{{"name", o.Name}, {"gross", number(o.Gross)}, {"net", number(o.Net)}, {"gross_cost", number(o.GrossCost)}, {"net_cost", number(o.NetCost)}}
		})},
		{"treaties", objects(k.Treaties, func(t optimize.TreatyCapital) object {
			return object{{"name", t.Name}, {"stand_alone", number(t.StandAlone)}, {"last_in", number(t.LastIn)}, {"natural", estimate(t.Natural)}, {"cost", number(t.Cost)}}
		})},
	}
}
