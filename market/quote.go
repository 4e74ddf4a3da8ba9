package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// Quote is one price that the market named: either a market-wide point, described by probabilities alone, or a layer of the cedant's own,
// described by its terms and its recoveries on the book.
type Quote struct {
	Curve      string  // the curve that it speaks for
	Name       string  // what a person calls it: the treaty's name, or "row 7"
	RateOnLine float64 // base premium over limit, brokerage included, above 0, at most 1
	Bid, Offer float64 // rates on line between which the market would deal; 0 = RateOnLine itself
	Weight     float64 // ≥ 0; 0 leaves it out of the fit
	Line       int     // line of the file that it came from; 0 = none
	Arrival

	// A market-wide layer, without reinstatements: its loss, as a fraction of the limit, is above 0 with probability Attachment and total
	// with probability Exhaustion, and ExpectedLoss on average.
	Attachment, Exhaustion, ExpectedLoss float64

	// A layer of the cedant's own, or a quota share, whose recoveries are its subject losses, whose limit is its subject premium and whose rate is
	// 1 − commission; Attachment, Exhaustion and ExpectedLoss are then read off the book.
	Terms      *treaty.Treaty
	Recoveries []float64 // positive annual recoveries at 100 %, largest first
	Years      int       // of the book
}

// Own tells whether the quote is for a layer of the cedant's own.
func (q Quote) Own() bool { return q.Terms != nil }

// problems lists what is wrong with a quote.
func (q Quote) problems() []fault.Fault {
	var list []fault.Fault
	add := func(key, found, allowed string) {
		list = append(list, fault.Fault{Line: q.Line, Key: key, Found: found, Allowed: allowed})
	}
	if !(q.RateOnLine > 0 && q.RateOnLine <= 1) {
		add("rate_on_line", fmt.Sprint(q.RateOnLine), "above 0 and at most 1: base premium over limit")
	}
	if !(q.Weight >= 0) || math.IsInf(q.Weight, 0) {
		add("weight", fmt.Sprint(q.Weight), "a number of at least 0")
	}
	if q.Bid != 0 && !(q.Bid > 0 && q.Bid <= q.RateOnLine) {
		add("bid", fmt.Sprint(q.Bid), fmt.Sprintf("above 0 and at most the rate on line %v", q.RateOnLine))
	}
	if q.Offer != 0 && !(q.Offer >= q.RateOnLine && q.Offer <= 1) {
		add("offer", fmt.Sprint(q.Offer), fmt.Sprintf("at least the rate on line %v and at most 1", q.RateOnLine))
	}
	if q.Own() {
		if q.Years < 1 || len(q.Recoveries) > q.Years {
			add("recoveries", fmt.Sprintf("%d recoveries for %d years", len(q.Recoveries), q.Years), "at most one a year")
		}
		return list
	}
	for _, p := range []struct {
		key string
		at  float64
	}{{"attachment_probability", q.Attachment}, {"exhaustion_probability", q.Exhaustion}, {"expected_loss", q.ExpectedLoss}} {
		if !(p.at >= 0 && p.at <= 1) || (p.at == 0 && p.key != "exhaustion_probability") {
			add(p.key, fmt.Sprint(p.at), "a fraction above 0 and at most 1")
			return list
		}
	}
	switch {
	case q.Exhaustion > q.Attachment:
		add("exhaustion_probability", fmt.Sprintf("%v, above the attachment probability %v", q.Exhaustion, q.Attachment), "at most the attachment probability")
	case q.ExpectedLoss < q.Exhaustion || q.ExpectedLoss > q.Attachment:
		add("expected_loss", fmt.Sprint(q.ExpectedLoss), fmt.Sprintf("between exhaustion probability %v and attachment probability %v", q.Exhaustion, q.Attachment))
	case q.Exhaustion < q.Attachment && (q.ExpectedLoss == q.Exhaustion || q.ExpectedLoss == q.Attachment):
		add("expected_loss", fmt.Sprint(q.ExpectedLoss), "strictly between two different probabilities")
	}
	return list
}

// expected gives the expected loss as a fraction of the limit.
func (q Quote) expected() float64 {
	if !q.Own() {
		return q.ExpectedLoss
	}
	sum := 0.0
	for _, r := range q.Recoveries {
		sum += r
	}
	return sum / float64(q.Years) / q.Terms.Limit
}

// A market-wide layer's loss has survival probabilities that fall from attachment a to exhaustion e with mean m; they are taken along the
// power curve S(u) = e + (a−e)·(1−u)^c, 0 ≤ u ≤ 1, with the c that gives the mean, c = (a−e)/(m−e) − 1.
func shapePower(a, e, m float64) float64 { return (a-e)/(m-e) - 1 }

// distortedShape gives ∫₀¹ g(S(u)) du.
func distortedShape(d Distortion, a, e, m float64) float64 {
	if a == e {
		return d.At(a)
	}
	switch g := d.(type) {
	case TailValueAtRisk:
		return tailShape(1-g.P, a, e, m)
	case Mixture:
		sum := g.Supremum
		for _, k := range g.Knots {
			sum += float64(k.Weight * tailShape(k.Tail, a, e, m))
		}
		return sum
	case ConstantCostOfCapital:
		return (m + g.Iota) / (1 + g.Iota)
	}
	c := shapePower(a, e, m)
	if h, ok := d.(ProportionalHazard); ok && e == 0 { // exact: the power of a power
		return math.Pow(a, 1/h.Rho) / (c/h.Rho + 1)
	}
	return integrateUnit(func(x float64) float64 { return d.At(e + (a-e)*math.Pow(x, c)) })
}

// tailShape gives the tail value at risk of the layer, ∫ min(S(u)/t, 1) du with t = 1 − p.
func tailShape(t, a, e, m float64) float64 {
	if a == e {
		return min(a/t, 1)
	}
	if t <= e {
		return 1
	}
	c := shapePower(a, e, m)
	x := 1.0 // 1 − u at which S falls below t
	if t < a {
		x = math.Pow((t-e)/(a-e), 1/c)
	}
	return (1 - x) + (float64(e*x)+(a-e)*math.Pow(x, c+1)/(c+1))/t
}
