package optimize

import (
	"fmt"
	"math"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
)

// Case is what stays the same while programmes are compared: the book, the market, the capital standards and what capital costs.
type Case struct {
	Book          loss.Book
	Curves        []market.Curve     // names are unique
	Standards     []capital.Standard // at least one; the first drives the search
	CostOfCapital float64            // per year, as a fraction of required capital, ≥ 0
	OwnFunds      float64            // money; 0 = not given
}

// Validate reports every fault of the case at once.
func (c Case) Validate() error {
	var faults fault.List
	if c.Book.Table == nil || c.Book.Table.Years() == 0 {
		faults.Add(fault.Fault{Key: "book", Found: "no simulated year", Allowed: "at least one year"})
		return faults.Err()
	}
	if len(c.Book.Classes) != len(c.Book.Table.Classes()) {
		faults.Add(fault.Fault{Key: "book.classes", Found: fmt.Sprintf("%d classes, but the loss table has %d", len(c.Book.Classes), len(c.Book.Table.Classes()))})
	}
	for i, class := range c.Book.Classes {
		if i < len(c.Book.Table.Classes()) && class.Name != c.Book.Table.Classes()[i] {
			faults.Add(fault.Fault{Key: "book.classes", Found: fmt.Sprintf("class %d is %q, but %q in the loss table", i+1, class.Name, c.Book.Table.Classes()[i])})
		}
		if !(class.Premium >= 0) || math.IsInf(class.Premium, 0) {
			faults.Add(fault.Fault{Key: "book.classes." + class.Name + ".premium", Found: fmt.Sprint(class.Premium), Allowed: "money of at least 0"})
		}
		if !(class.Expenses >= 0 && class.Expenses <= 1) {
			faults.Add(fault.Fault{Key: "book.classes." + class.Name + ".expenses", Found: fmt.Sprint(class.Expenses), Allowed: "a fraction from 0 to 1"})
		}
	}
	if len(c.Standards) == 0 {
		faults.Add(fault.Fault{Key: "capital.standards", Found: "no standard", Allowed: "at least one"})
	}
	for _, s := range c.Standards {
		faults.AddError(s.Validate())
	}
	if !(c.CostOfCapital >= 0) || math.IsInf(c.CostOfCapital, 0) {
		faults.Add(fault.Fault{Key: "capital.cost", Found: fmt.Sprint(c.CostOfCapital), Allowed: "a rate of at least 0 per year"})
	}
	if !(c.OwnFunds >= 0) || math.IsInf(c.OwnFunds, 0) {
		faults.Add(fault.Fault{Key: "capital.own_funds", Found: fmt.Sprint(c.OwnFunds), Allowed: "money of at least 0"})
	}
	seen := map[string]bool{}
	for _, curve := range c.Curves {
		if seen[curve.Name] {
			faults.Add(fault.Fault{Key: "market.curves", Found: fmt.Sprintf("two curves named %q", curve.Name), Allowed: "one curve of a name"})
		}
		seen[curve.Name] = true
	}
	return faults.Err()
}
