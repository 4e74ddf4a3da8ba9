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
	c.names("market.scenarios", len(c.s.Market.Scenarios), func(i int) string { return c.s.Market.Scenarios[i].Name })
	for i, s := range c.s.Market.Scenarios {
		for _, f := range fault.All(s.Turn().Validate(c.curves.list)) {
			f.Key = fmt.Sprintf("market.scenarios[%d].%s", i, f.Key)
			c.take(*f)
		}
	}
}

// curve checks one curve; own tells whether a quote for a layer of the cedant's own speaks for it.
func (c *checker) curve(key string, curve Curve, own bool) {
	c.within(key+".brokerage", float64(curve.Brokerage), 0, 1, false, true, "a fraction from 0 to below 1")
	if m := curve.MinimumRateOnLine; m != nil {
		c.fraction(key+".minimum_rate_on_line", *m)
	}
	if curve.HalfLife != nil {
		c.within(key+".half_life", float64(*curve.HalfLife), 0, math.Inf(1), true, false, "a number of years above 0")
		if c.s.Market.AsOf == nil {
			c.add(key+".half_life", "given without market.as_of", "the day of the study, from which ages count")
		}
	}
	if curve.Error != "" {
		c.word(key+".error", "kind of error", curve.Error, ErrorNames())
	}
	if curve.Loading != nil {
		c.within(key+".loading", float64(*curve.Loading), 0, math.Inf(1), false, false, "a fraction of at least 0")
	}
	fitted := curve.Quotes != "" || own && !c.broken("market.own_quotes")
	if curve.Like != "" {
		c.like(key, curve, fitted)
		return
	}
	if curve.Loading != nil {
		c.add(key+".loading", "given without like", "the curve to lean on")
	}
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

// like checks a curve that leans on another: its own quotes, if any, are fitted freely, and where they are silent it is the other, loaded.
func (c *checker) like(key string, curve Curve, fitted bool) {
	c.known(key+".like", "curve", curve.Like, c.curves)
	if curve.Family != "" || curve.Parameter != nil {
		c.add(key, "both a family and a curve to lean on", "one of the two")
	}
	if fitted && curve.Fit != "" && curve.Fit != market.FamilyFree {
		c.add(key+".fit", fmt.Sprintf("%q, but the curve leans on another", curve.Fit), "free, or no fit")
	}
	for _, other := range c.s.Market.Curves {
		if other.Name == curve.Like && other.Like != "" {
			c.add(key+".like", fmt.Sprintf("%q, which leans on another itself", curve.Like), "a curve with quotes or a family of its own")
		}
	}
}

// ErrorNames lists what a fit can minimise.
func ErrorNames() []string { return []string{"relative", "absolute"} }

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
	if q.Weight != nil {
		c.within(key+".weight", float64(*q.Weight), 0, math.Inf(1), false, false, "a number of at least 0")
	}
	if q.Limit != nil && q.Limit.Unlimited {
		c.add(key+".limit", "unlimited", "a limit, to which the rate on line refers")
	}
	switch {
	case q.Kind == treaty.QuotaShare.String():
		if q.Commission == nil {
			c.add(key+".commission", "the key is missing", "the commission that was quoted")
		}
		if q.RateOnLine != nil || q.Bid != nil || q.Offer != nil {
			c.add(key, "a rate on line for a quota share", "its commission")
		}
	case q.RateOnLine == nil:
		c.add(key+".rate_on_line", "the key is missing", "")
	default:
		c.within(key+".rate_on_line", float64(*q.RateOnLine), 0, 1, true, false, "a fraction above 0 and at most 1: base premium over limit")
	}
	if q.Premium != nil {
		c.add(key+".premium", "given beside rate_on_line", "rate_on_line alone")
	}
	if q.Brokerage != "" {
		c.word(key+".brokerage", "word for it", q.Brokerage, []string{"included", "excluded"})
	}
	if q.Line != "" {
		c.word(key+".line", "kind of line", q.Line, []string{"lead", "following"})
	}
	if q.Panel != nil {
		c.add(key+".panel", "given for a quote", "a panel of treaties: a quote is for the layer, whoever writes it")
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
