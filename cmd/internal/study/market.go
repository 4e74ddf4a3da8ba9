package study

import (
	"fmt"
	"io"
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// loadMarket makes the curves: set by hand, or fitted to the quotes that bear their name.
func (s *Study) loadMarket() error {
	var faults fault.List
	own, err := s.ownQuotes()
	faults.AddError(err)
	names := make([]string, len(s.settings.Market.Curves))
	for i, c := range s.settings.Market.Curves {
		names[i] = c.Name
	}
	for i, c := range s.settings.Market.Curves {
		key := fmt.Sprintf("market.curves[%d]", i)
		curve := market.Curve{Name: c.Name, Brokerage: float64(c.Brokerage)}
		if c.MinimumRateOnLine != nil {
			curve.MinimumRateOnLine = float64(*c.MinimumRateOnLine)
		}
		if c.Family != "" {
			curve.Distortion, err = market.NewFamily(c.Family, float64(*c.Parameter))
			faults.AddError(err)
			s.curves = append(s.curves, CurveFit{Curve: curve})
			continue
		}
		quotes, err := s.quotes(key, c.Quotes, c.Name, names)
		if err != nil {
			faults.AddError(err)
			continue
		}
		quotes = append(quotes, own[c.Name]...)
		if len(quotes) == 0 {
			faults.Add(s.settings.At(fault.Fault{Key: key + ".quotes", Found: fmt.Sprintf("no quote for the curve %q", c.Name), Allowed: "at least one quote that names the curve"}))
			continue
		}
		fit, err := fitCurve(curve, quotes, c.Fit)
		if err != nil {
			for _, f := range fault.All(err) {
				f.Key = key + "." + f.Key
				faults.Add(s.settings.At(*f))
			}
			if len(fault.All(err)) == 0 {
				faults.Add(s.settings.At(fault.Fault{Key: key, Err: err}))
			}
			continue
		}
		for _, w := range fit.Chosen.Warnings {
			s.head.Warnings = append(s.head.Warnings, "Market curve "+c.Name+": "+w+".")
		}
		s.curves = append(s.curves, fit)
	}
	return faults.Err()
}

// quotes reads the quotes of one curve from a file; a quote for a curve that the study does not have is a fault.
func (s *Study) quotes(key, file, curve string, curves []string) ([]market.Quote, error) {
	if file == "" {
		return nil, nil
	}
	var all []market.Quote
	err := s.read(key+".quotes", file, func(r io.Reader, path string) (int, error) {
		var err error
		if all, err = market.ReadQuotes(r, path, s.settings.Currency); err != nil {
			return 0, err
		}
		var faults fault.List
		for _, q := range all {
			if !slices.Contains(curves, q.Curve) {
				faults.Add(fault.Fault{File: path, Line: q.Line, Key: "curve", Found: fmt.Sprintf("no curve of the study is named %q", q.Curve), Allowed: fmt.Sprintf("%q", curves), Nearest: fault.Nearest(q.Curve, curves)})
			}
		}
		return len(all), faults.Err()
	})
	return slices.DeleteFunc(all, func(q market.Quote) bool { return q.Curve != curve }), err
}

// ownQuotes prices nothing yet: it works out the recoveries of the quoted layers on the book, on their gross subject.
func (s *Study) ownQuotes() (map[string][]market.Quote, error) {
	quotes := map[string][]market.Quote{}
	for _, q := range s.settings.Market.OwnQuotes {
		terms := q.Terms()
		terms.After = nil
		outcome, err := treaty.Apply(s.book.Table, treaty.Programme{Treaties: []treaty.Treaty{terms}})
		if err != nil {
			return nil, err
		}
		quote := market.Quote{Curve: q.Curve, Name: q.Name, RateOnLine: float64(q.RateOnLine), Weight: 1, Terms: &terms, Years: s.head.Years}
		if q.Weight != nil {
			quote.Weight = float64(*q.Weight)
		}
		for _, r := range outcome.Treaties[0].Recovery {
			if r > 0 {
				quote.Recoveries = append(quote.Recoveries, r)
			}
		}
		slices.SortFunc(quote.Recoveries, func(a, b float64) int {
			if a > b {
				return -1
			}
			if a < b {
				return 1
			}
			return 0
		})
		quote.Attachment, quote.Exhaustion = outcome.Treaties[0].AttachmentProbability, outcome.Treaties[0].ExhaustionProbability
		quotes[q.Curve] = append(quotes[q.Curve], quote)
	}
	return quotes, nil
}

// fitCurve fits all families and the free curve, for comparison, and chooses the one that the study asks for.
func fitCurve(curve market.Curve, quotes []market.Quote, choice string) (CurveFit, error) {
	result := CurveFit{Curve: curve}
	for _, family := range market.FamilyNames() {
		fit, err := market.FitFamily(family, quotes, curve.Brokerage)
		if err != nil {
			return result, err
		}
		result.Candidates = append(result.Candidates, fit)
	}
	free, err := market.FitFree(quotes, curve.Brokerage, market.FreeOptions{})
	if err != nil {
		return result, err
	}
	result.Candidates = append(result.Candidates, free)
	for _, fit := range result.Candidates {
		switch {
		case choice == fit.Family, choice == "" && fit.Family == market.FamilyFree:
			result.Chosen = fit
		case choice == "best" && (result.Chosen == nil || score(fit) < score(result.Chosen)):
			result.Chosen = fit
		}
	}
	if result.Chosen == nil {
		return result, fmt.Errorf("study: no way to fit is named %q", choice)
	}
	result.Curve.Distortion, result.Curve.Fit = result.Chosen.Distortion, result.Chosen
	return result, result.Curve.Validate()
}

// score is the leave-one-out error, or the in-sample error when there are too few quotes for it.
func score(f *market.Fit) float64 {
	if math.IsNaN(f.LeaveOneOut) {
		return f.InSample
	}
	return f.LeaveOneOut
}
