package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
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
	Quotes        []FittedQuote
	Objective     float64 // weighted sum of squared relative errors
	InSample      float64 // root mean square relative error, weighted
	LeaveOneOut   float64 // the same for each quote priced by the fit to the others; NaN with fewer than three quotes
	Pull          float64 // free curve: how many quotes' worth of pull towards Toward it has
	Toward        string  // free curve: the family towards which it is pulled where no quote speaks
	LowestTail    float64 // smallest probability that a quote speaks for; prices beyond it are extrapolated
	HighestTail   float64
	Warnings      []string

	anchor   Distortion // of a free curve's pull
	absolute bool       // the free curve minimises absolute errors
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
	parameter, err := fitParameter(family, used, brokerage)
	if err != nil {
		return nil, err
	}
	d, err := NewFamily(family, parameter)
	if err != nil {
		return nil, err
	}
	f := &Fit{Family: family, Parameter: parameter, Distortion: d}
	f.StandardError = parameterError(family, parameter, used, brokerage)
	f.describe(quotes, brokerage)
	if err := f.leaveOneOut(used, func(rest []Quote, _ int) (Distortion, error) {
		p, err := refitParameter(family, parameter, rest, brokerage)
		if err != nil {
			return nil, err
		}
		return NewFamily(family, p)
	}, brokerage); err != nil {
		return nil, err
	}
	return f, nil
}

// objective is the weighted sum of squared relative errors.
func objective(d Distortion, quotes []Quote, brokerage float64) float64 {
	sum := 0.0
	for _, q := range quotes {
		e := q.rate(d, brokerage)/q.RateOnLine - 1
		sum += float64(q.Weight * e * e)
	}
	return sum
}

// A parameter is searched over z in 0 to 1, even in the logarithm of its distance from the neutral parameter.
const leastDistance = 1e-4

func (r ParameterRange) at(z float64) float64 {
	return min(r.Low+(r.High-r.Low)*(math.Pow(1/leastDistance, z)-1)/(1/leastDistance-1), r.High)
}

func (r ParameterRange) place(parameter float64) float64 {
	return math.Log1p((parameter-r.Low)/(r.High-r.Low)*(1/leastDistance-1)) / math.Log(1/leastDistance)
}

// parameterSteps is the count of grid steps on which the neighbourhood of the best parameter is looked for.
const parameterSteps = 32

// fitParameter looks on a grid and refines the best place by golden section.
func fitParameter(family string, quotes []Quote, brokerage float64) (float64, error) {
	bounds, ok := parameterRanges[family]
	if !ok {
		_, err := NewFamily(family, 0)
		return 0, err
	}
	value := valueOf(family, bounds, quotes, brokerage)
	best, least := 0, math.Inf(1)
	for i := range parameterSteps + 1 {
		if v := value(float64(i) / parameterSteps); v < least {
			best, least = i, v
		}
	}
	if math.IsInf(least, 1) {
		return 0, fmt.Errorf("market: fit of the family %s: no parameter prices the quotes", family)
	}
	z := goldenSection(value, max(float64(best-1)/parameterSteps, 0), min(float64(best+1)/parameterSteps, 1))
	if value(z) > least {
		z = float64(best) / parameterSteps
	}
	return bounds.at(z), nil
}

// refitParameter does the same for quotes that differ little from those to which a parameter was fitted: it looks near that parameter first,
// and everywhere only when the best place is not inside.
func refitParameter(family string, fitted float64, quotes []Quote, brokerage float64) (float64, error) {
	bounds := parameterRanges[family]
	value := valueOf(family, bounds, quotes, brokerage)
	const near = 0.5 / parameterSteps
	low, high := max(bounds.place(fitted)-near, 0), min(bounds.place(fitted)+near, 1)
	z := goldenSection(value, low, high)
	if z-low < 1e-6 && low > 0 || high-z < 1e-6 && high < 1 {
		return fitParameter(family, quotes, brokerage)
	}
	return bounds.at(z), nil
}

// valueOf gives the objective as a function of z; infinite where the family has no member.
func valueOf(family string, bounds ParameterRange, quotes []Quote, brokerage float64) func(z float64) float64 {
	return func(z float64) float64 {
		d, err := NewFamily(family, bounds.at(z))
		if err != nil {
			return math.Inf(1)
		}
		return objective(d, quotes, brokerage)
	}
}

// goldenSection narrows a bracket of one minimum (Kiefer 1953) until its ends differ by 1e-9, near where rounding of values hides the rest.
func goldenSection(f func(float64) float64, low, high float64) float64 {
	const ratio = 0.6180339887498949
	a, b := high-ratio*(high-low), low+ratio*(high-low)
	fa, fb := f(a), f(b)
	for high-low > 1e-9 {
		if fa <= fb {
			high, b, fb = b, a, fa
			a = high - ratio*(high-low)
			fa = f(a)
		} else {
			low, a, fa = a, b, fb
			b = low + ratio*(high-low)
			fb = f(b)
		}
	}
	return (low + high) / 2
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
	for _, q := range quotes {
		slope := (q.rate(high, brokerage) - q.rate(low, brokerage)) / width / q.RateOnLine
		curvature += float64(q.Weight * slope * slope)
		weights += q.Weight
	}
	variance := objective(centre, quotes, brokerage) / weights * float64(len(quotes)) / float64(len(quotes)-1)
	return math.Sqrt(variance * weights / float64(len(quotes)) / curvature)
}

// describe prices every quote and fills what the fit says of itself.
func (f *Fit) describe(quotes []Quote, brokerage float64) {
	f.LowestTail, f.HighestTail, f.LeaveOneOut = 1, 0, math.NaN()
	weights := 0.0
	for _, q := range quotes {
		p := FittedQuote{Quote: q, Fitted: q.rate(f.Distortion, brokerage), LeftOut: math.NaN(), Multiple: math.NaN()}
		p.Residual = p.Fitted/q.RateOnLine - 1
		if e := q.expected(); e > 0 {
			p.Multiple = q.RateOnLine / e
			if q.Weight > 0 && q.asked(brokerage) < e {
				f.Warnings = append(f.Warnings, fmt.Sprintf("quote %s: rate on line %.4g after brokerage is below its expected loss %.4g: no distortion can price it", q.Name, q.asked(brokerage), e))
			}
		}
		f.Curve = q.Curve
		f.Quotes = append(f.Quotes, p)
		f.Objective += float64(q.Weight * p.Residual * p.Residual)
		weights += q.Weight
		if q.Weight > 0 {
			low, high := q.tails()
			f.LowestTail, f.HighestTail = min(f.LowestTail, low), max(f.HighestTail, high)
		}
	}
	f.InSample = math.Sqrt(f.Objective / weights)
	if n := len(quotes); n < 5 {
		f.Warnings = append(f.Warnings, fmt.Sprintf("curve %s rests on %d quotes", f.Curve, n))
	}
}

// asked gives what the market asks for the loss, as a fraction of the limit, after brokerage.
func (q Quote) asked(brokerage float64) float64 {
	if q.Own() && q.Terms.Kind == treaty.QuotaShare {
		return q.RateOnLine - brokerage
	}
	return q.RateOnLine * (1 - brokerage)
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

// without gives the quotes less one.
func without(quotes []Quote, i int) []Quote {
	return append(append(make([]Quote, 0, len(quotes)), quotes[:i]...), quotes[i+1:]...)
}

// leaveOneOut prices each quote of weight by the fit to the others.
func (f *Fit) leaveOneOut(used []Quote, fit func(rest []Quote, left int) (Distortion, error), brokerage float64) error {
	if len(used) < 3 {
		return nil
	}
	sum, weights, i := 0.0, 0.0, 0
	for k := range f.Quotes {
		if f.Quotes[k].Weight == 0 {
			continue
		}
		d, err := fit(without(used, i), i)
		i++
		if err != nil {
			return err
		}
		q := &f.Quotes[k]
		q.LeftOut = q.rate(d, brokerage)
		e := q.LeftOut/q.RateOnLine - 1
		sum += float64(q.Weight * e * e)
		weights += q.Weight
	}
	f.LeaveOneOut = math.Sqrt(sum / weights)
	return nil
}
