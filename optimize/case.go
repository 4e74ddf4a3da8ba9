package optimize

import (
	"fmt"
	"math"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/security"
)

// Case is what stays the same while programmes are compared: the book, the market, the capital standards and what capital costs.
type Case struct {
	Book          loss.Book
	Curves        []market.Curve     // names are unique
	Standards     []capital.Standard // at least one
	Drive         []int              // places of the standards of which the one that asks the most drives the search; none = the first
	CostOfCapital float64            // per year, as a fraction of required capital, ≥ 0; unused when Owners is given
	Owners        market.Distortion  // the owners' own price of the risk they keep; nil = the flat CostOfCapital
	OwnFunds      float64            // money; 0 = not given
	Rest          *capital.Rest      // what else the company stands for; nil = nothing. Only simulated standards look at it
	Security      *security.Register // reinsurers behind the treaties; nil = none that can fail
}

// Drivers gives the places of the standards that drive.
func (c Case) Drivers() []int {
	if len(c.Drive) == 0 {
		return []int{0}
	}
	return c.Drive
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
	reinsurers := 0
	if c.Security != nil {
		reinsurers = len(c.Security.Reinsurers)
		faults.AddError(c.Security.Validate())
	}
	for i, s := range c.Standards {
		faults.AddError(s.Validate())
		var err error
		switch {
		case s.Formula != nil:
			err = s.Formula.Validate(c.Book.Table.Classes(), reinsurers)
		case s.Covariance != nil:
			err = s.Covariance.Validate()
		}
		for _, f := range fault.All(err) {
			f.Key = fmt.Sprintf("capital.standards[%d].%s", i, f.Key)
			faults.Add(*f)
		}
	}
	for _, i := range c.Drive {
		if i < 0 || i >= len(c.Standards) {
			faults.Add(fault.Fault{Key: "capital.drive", Found: fmt.Sprintf("standard %d", i), Allowed: "standards of the case"})
		}
	}
	if c.Rest != nil {
		faults.AddError(c.Rest.Validate())
		if c.Owners != nil && c.Rest.Quantile == nil {
			faults.Add(fault.Fault{Key: "capital.owners", Found: "a price of risk beside a rest of the company that is a capital figure", Allowed: "a loss distribution for the rest, or a flat cost of capital"})
		}
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
