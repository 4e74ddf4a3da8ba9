package treaty

import (
	"fmt"
	"math"
	"strings"
)

// Describe tells the terms in one line, such as "60m xs 40m per event, 100 % placed, 1 reinstatement at 100 %". Money is written by the
// function given.
func (t Treaty) Describe(money func(float64) string) string {
	percent := func(x float64) string { return fmt.Sprintf("%.4g %%", 100*x) }
	if t.Kind == QuotaShare {
		return percent(t.Cession) + " of every loss"
	}
	var b strings.Builder
	if math.IsInf(t.Limit, 1) {
		b.WriteString("unlimited xs " + money(t.Retention))
	} else {
		b.WriteString(money(t.Limit) + " xs " + money(t.Retention))
	}
	b.WriteString(map[Kind]string{EventExcess: " per event", RiskExcess: " per risk", AggregateExcess: " of the year's losses"}[t.Kind])
	b.WriteString(", " + percent(t.Share) + " placed")
	if t.AnnualDeductible > 0 {
		b.WriteString(", annual deductible " + money(t.AnnualDeductible))
	}
	if t.EventLimit > 0 {
		b.WriteString(", at most " + money(t.EventLimit) + " per event")
	}
	switch {
	case t.AnnualLimit > 0:
		b.WriteString(", annual limit " + money(t.AnnualLimit))
	case t.Reinstatements != nil:
		b.WriteString(", " + reinstatements(t.Reinstatements, percent))
	case t.Kind != AggregateExcess:
		b.WriteString(", unlimited free reinstatements")
	}
	return b.String()
}

func reinstatements(charges []float64, percent func(float64) string) string {
	noun := "reinstatements"
	switch len(charges) {
	case 0:
		return "no reinstatement"
	case 1:
		noun = "reinstatement"
	}
	same := true
	parts := make([]string, len(charges))
	for i, c := range charges {
		parts[i] = percent(c)
		same = same && c == charges[0]
	}
	if same {
		parts = parts[:1]
	}
	return fmt.Sprintf("%d %s at %s", len(charges), noun, strings.Join(parts, ", "))
}
