package settings

import (
	"fmt"
	"math"

	"cedewright/market"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

func (c *checker) market() {
	quoted := map[string]bool{}
	for _, q := range c.s.Market.OwnQuotes {
		quoted[q.Curve] = true
	}
	for i, curve := range c.s.Market.Curves {
		c.curve(fmt.Sprintf("market.curves[%d]", i), curve, quoted[curve.Name])
	}
	c.names("market.own_quotes", len(c.s.Market.OwnQuotes), func(i int) string { return c.s.Market.OwnQuotes[i].Name })
	for i, q := range c.s.Market.OwnQuotes {
		c.ownQuote(fmt.Sprintf("market.own_quotes[%d]", i), q)
	}
}

// curve checks one curve; own tells whether a quote for a layer of the cedant's own speaks for it.
func (c *checker) curve(key string, curve Curve, own bool) {
	c.within(key+".brokerage", float64(curve.Brokerage), 0, 1, false, true, "a fraction from 0 to below 1")
	if m := curve.MinimumRateOnLine; m != nil {
		c.fraction(key+".minimum_rate_on_line", *m)
	}
	fitted := curve.Quotes != "" || own && !c.broken("market.own_quotes")
	switch {
	case curve.Family != "" && (fitted || curve.Fit != ""):
		c.add(key, "both a family with its parameter and a fit to quotes", "family and parameter, or quotes and fit")
	case curve.Family != "":
		c.family(key, curve)
	case !fitted:
		c.add(key, "neither a family nor quotes", "family and parameter, or quotes and fit")
	case curve.Parameter != nil:
		c.add(key+".parameter", "given for a curve that is fitted", "no parameter, or a family")
	default:
		c.word(key+".fit", "way to fit", fitName(curve.Fit), FitNames())
	}
}

func (c *checker) family(key string, curve Curve) {
	if curve.Parameter == nil {
		c.word(key+".family", "family of distortions", curve.Family, market.FamilyNames())
		c.add(key+".parameter", "the key is missing", "the family's parameter")
		return
	}
	_, err := market.NewFamily(curve.Family, float64(*curve.Parameter))
	for _, f := range fault.All(err) {
		f.Key = key + "." + f.Key
		c.take(*f)
	}
}

func (c *checker) ownQuote(key string, q OwnQuote) {
	c.treaty(key, q.Treaty)
	if q.Curve == "" {
		c.add(key+".curve", "the key is missing", "the curve that the quote speaks for")
	}
	c.known(key+".curve", "curve", q.Curve, c.curves)
	c.subject(key, q.Treaty)
	c.within(key+".rate_on_line", float64(q.RateOnLine), 0, 1, true, false, "a fraction above 0 and at most 1: base premium over limit")
	if q.Weight != nil {
		c.within(key+".weight", float64(*q.Weight), 0, math.Inf(1), false, false, "a number of at least 0")
	}
	if q.Limit != nil && q.Limit.Unlimited {
		c.add(key+".limit", "unlimited", "a limit, to which the rate on line refers")
	}
	if q.Kind == treaty.QuotaShare.String() {
		c.add(key+".kind", q.Kind, "an excess cover: a quota share has no rate on line")
	}
	if q.Premium != nil {
		c.add(key+".premium", "given beside rate_on_line", "rate_on_line alone")
	}
	if len(q.After) > 0 {
		c.add(key+".after", "given for a quote", "no treaty: the quoted layer is looked at on the gross losses")
	}
}

// FitNames lists the ways in which a curve can be fitted: the free curve, the best family by leave-one-out error, or one family.
func FitNames() []string {
	return append([]string{market.FamilyFree, "best"}, market.FamilyNames()...)
}

// fitName gives the way to fit, free when the study names none.
func fitName(name string) string {
	if name == "" {
		return market.FamilyFree
	}
	return name
}
