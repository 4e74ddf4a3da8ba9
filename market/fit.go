package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
)

// FittedQuote is a quote and what a fit makes of it.
type FittedQuote struct {
	Quote
	Fitted     float64 // rate on line that the fitted curve asks, brokerage included
	Residual   float64 // fitted over quoted, less 1
	LeftOut    float64 // rate on line asked by the curve fitted without this quote; NaN when it was not tried
	Multiple   float64 // quoted rate on line over expected loss
	BelowRange bool    // its price rests on probabilities below those of every other quote
}

// Fit is a distortion fitted to quotes.
type Fit struct {
	Curve         string
	Family        string
	Parameter     float64 // of a family with one parameter
	StandardError float64 // of the parameter; 0 for a single quote and for the free curve
	Distortion    Distortion
	Brokerage     float64 // fraction of the quoted rates, as given to the fit
	Quotes        []FittedQuote
	Objective     float64 // weighted sum of squared relative errors
	InSample      float64 // root mean square relative error, weighted
	LeaveOneOut   float64 // the same for each quote priced by the fit to the others; NaN with fewer than three quotes
	Pull          float64 // free curve: how many quotes' worth of pull towards Toward it has
	Toward        string  // free curve: the family towards which it is pulled where no quote speaks
	LowestTail    float64 // smallest probability that a quote speaks for; prices beyond it are extrapolated
	HighestTail   float64
	Warnings      []string

	options FreeOptions // of a free curve
}

// checkQuotes gives every fault of the quotes, and those of weight above 0.
func checkQuotes(quotes []Quote) ([]Quote, error) {
	var faults fault.List
	var used []Quote
	for _, q := range quotes {
		for _, f := range q.problems() {
			if q.Name != "" {
				f.Key = q.Name + "." + f.Key
			}
			faults.Add(f)
		}
		if q.Weight > 0 {
			used = append(used, q)
		}
	}
	if len(used) == 0 && faults.Len() == 0 {
		faults.Add(fault.Fault{Key: "quotes", Found: "no quote with a weight above 0", Allowed: "at least one"})
	}
	return used, faults.Err()
}

// FitFamily fits a family with one parameter to quotes by weighted least squares of relative errors, Σ w·(fitted/quoted − 1)², over the
// whole range of the parameter. Quoted rates include the brokerage given. The standard error of the parameter is that of non-linear
// least squares; it needs two quotes.
func FitFamily(family string, quotes []Quote, brokerage float64) (*Fit, error) {
	used, err := checkQuotes(quotes)
	if err != nil {
		return nil, err
	}
	table, err := newRateTable(family, used, brokerage)
	if err != nil {
		return nil, err
	}
	weights := weightsOf(used)
	member := func(weights []float64) (float64, Distortion, error) {
		parameter, _, err := table.fit(weights)
		if err != nil {
			return 0, nil, err
		}
		d, err := NewFamily(family, parameter)
		return parameter, d, err
	}
	parameter, d, err := member(weights)
	if err != nil {
		return nil, err
	}
	f := &Fit{Family: family, Parameter: parameter, Distortion: d, Brokerage: brokerage}
	f.StandardError = parameterError(family, parameter, used, brokerage)
	f.describe(quotes)
	err = f.leaveOneOut(func(left int) (Distortion, error) {
		_, d, err := member(less(weights, left))
		return d, err
	})
	if err != nil {
		return nil, err
	}
	return f, nil
}

// objective is the weighted sum of squared relative errors.
func objective(d Distortion, quotes []Quote, brokerage float64) float64 {
	sum, p := 0.0, newPricer(d, brokerage)
	for _, q := range quotes {
		e := p.rate(q)/q.RateOnLine - 1
		sum += float64(q.Weight * e * e)
	}
	return sum
}

// fitParameter gives the parameter alone.
func fitParameter(family string, quotes []Quote, brokerage float64) (float64, error) {
	table, err := newRateTable(family, quotes, brokerage)
	if err != nil {
		return 0, err
	}
	parameter, _, err := table.fit(weightsOf(quotes))
	return parameter, err
}

// parameterError is the standard error of non-linear least squares: the residual variance over the curvature.
func parameterError(family string, parameter float64, quotes []Quote, brokerage float64) float64 {
	if len(quotes) < 2 {
		return 0
	}
	bounds := parameterRanges[family]
	step := 1e-5 * max(parameter-bounds.Low, 1e-3)
	low, errLow := NewFamily(family, max(parameter-step, bounds.Low))
	high, errHigh := NewFamily(family, min(parameter+step, bounds.High))
	centre, err := NewFamily(family, parameter)
	if errLow != nil || errHigh != nil || err != nil {
		return 0
	}
	width := min(parameter+step, bounds.High) - max(parameter-step, bounds.Low)
	curvature, weights := 0.0, 0.0
	above, below := newPricer(high, brokerage), newPricer(low, brokerage)
	for _, q := range quotes {
		slope := (above.rate(q) - below.rate(q)) / width / q.RateOnLine
		curvature += float64(q.Weight * slope * slope)
		weights += q.Weight
	}
	variance := objective(centre, quotes, brokerage) / weights * float64(len(quotes)) / float64(len(quotes)-1)
	return math.Sqrt(variance * weights / float64(len(quotes)) / curvature)
}

// fewQuotes is the count below which a fit says that it rests on few.
const fewQuotes = 5

// describe prices every quote and fills what the fit says of itself.
func (f *Fit) describe(quotes []Quote) {
	f.LowestTail, f.HighestTail, f.LeaveOneOut = 1, 0, math.NaN()
	fitted, mean := newPricer(f.Distortion, f.Brokerage), newPricer(ProportionalHazard{1}, f.Brokerage)
	count, weights := 0, 0.0
	for _, q := range quotes {
		p := FittedQuote{Quote: q, Fitted: fitted.rate(q), LeftOut: math.NaN(), Multiple: math.NaN()}
		p.Residual = p.Fitted/q.RateOnLine - 1
		if e := q.expected(); e > 0 {
			p.Multiple = q.RateOnLine / e
			// Reinstatement premiums count: the least rate is that of the mean, not the expected loss.
			if least := mean.rate(q); q.Weight > 0 && q.RateOnLine < least*(1-1e-12) {
				f.Warnings = append(f.Warnings, fmt.Sprintf("quote %s: rate on line %.4g is below its expected loss with brokerage, %.4g: no distortion can price it", q.Name, q.RateOnLine, least))
			}
		} else if q.Weight > 0 {
			f.Warnings = append(f.Warnings, fmt.Sprintf("quote %s: its layer is never hit on the book, so it says nothing of the curve", q.Name))
		}
		f.Curve = q.Curve
		f.Quotes = append(f.Quotes, p)
		f.Objective += float64(q.Weight * p.Residual * p.Residual)
		weights += q.Weight
		if q.Weight > 0 {
			count++
			low, high := q.tails()
			f.LowestTail, f.HighestTail = min(f.LowestTail, low), max(f.HighestTail, high)
		}
	}
	f.InSample = math.Sqrt(f.Objective / weights)
	if count < fewQuotes {
		f.Warnings = append(f.Warnings, fmt.Sprintf("curve %s rests on %d %s", f.Curve, count, map[bool]string{true: "quote", false: "quotes"}[count == 1]))
	}
	f.markBelowRange()
}

// markBelowRange marks the quotes of weight that alone speak for the smallest probabilities.
func (f *Fit) markBelowRange() {
	lowest, second, at := math.Inf(1), math.Inf(1), -1
	for k, q := range f.Quotes {
		if q.Weight == 0 {
			continue
		}
		switch low, _ := q.tails(); {
		case low < lowest:
			lowest, second, at = low, lowest, k
		case low < second:
			second = low
		}
	}
	if at >= 0 && lowest < second {
		f.Quotes[at].BelowRange = true
	}
}

// tails gives the range of probabilities that a quote speaks for.
func (q Quote) tails() (low, high float64) {
	if !q.Own() {
		return max(q.Exhaustion, q.ExpectedLoss/1e3), q.Attachment
	}
	full := 0
	for _, r := range q.Recoveries {
		if r < q.Recoveries[0] {
			break
		}
		full++
	}
	return float64(full) / float64(q.Years), float64(len(q.Recoveries)) / float64(q.Years)
}

// leaveOneOut prices each quote of weight by the fit to the others; left counts the quotes of weight.
func (f *Fit) leaveOneOut(fit func(left int) (Distortion, error)) error {
	var used []*FittedQuote
	for k := range f.Quotes {
		if f.Quotes[k].Weight > 0 {
			used = append(used, &f.Quotes[k])
		}
	}
	if len(used) < 3 {
		return nil
	}
	sum, weights := 0.0, 0.0
	for left, q := range used {
		d, err := fit(left)
		if err != nil {
			return err
		}
		q.LeftOut = q.rate(d, f.Brokerage)
		e := q.LeftOut/q.RateOnLine - 1
		sum += float64(q.Weight * e * e)
		weights += q.Weight
	}
	f.LeaveOneOut = math.Sqrt(sum / weights)
	return nil
}
