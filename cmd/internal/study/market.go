package study

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"

	"cedewright/cmd/internal/settings"
	"cedewright/market"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"

	"golang.org/x/sync/errgroup"
)

// loadMarket makes the curves: set by hand, fitted to the quotes that bear their name, or leaning on another curve; those come last.
func (s *Study) loadMarket() error {
	var faults fault.List
	own, err := s.ownQuotes()
	faults.AddError(err)
	made := map[string]CurveFit{}
	for _, leaning := range []bool{false, true} {
		for i, c := range s.settings.Market.Curves {
			if (c.Like != "") != leaning {
				continue
			}
			key := fmt.Sprintf("market.curves[%d]", i)
			fit, err := s.makeCurve(key, c, own[c.Name], made[c.Like].Curve.Distortion)
			if err != nil {
				faults.AddError(s.keyed(key, err))
				continue
			}
			made[c.Name] = fit
		}
	}
	if err := faults.Err(); err != nil {
		return err
	}
	for _, c := range s.settings.Market.Curves {
		fit := made[c.Name]
		if fit.Chosen != nil {
			for _, w := range fit.Chosen.Warnings {
				s.head.Warnings = append(s.head.Warnings, "Market curve "+c.Name+": "+w+".")
			}
		}
		s.curves = append(s.curves, fit)
	}
	return s.turnMarket()
}

// keyed gives faults of the market package the place of the curve in the study.
func (s *Study) keyed(key string, err error) error {
	var faults fault.List
	for _, f := range fault.All(err) {
		if f.File == "" {
			f.Key = key + "." + f.Key
			*f = s.settings.At(*f)
		}
		faults.Add(*f)
	}
	if faults.Len() == 0 {
		faults.Add(s.settings.At(fault.Fault{Key: key, Err: err}))
	}
	return faults.Err()
}

// makeCurve makes one curve; other is the distortion that it leans on, if any.
func (s *Study) makeCurve(key string, c settings.Curve, own []market.Quote, other market.Distortion) (CurveFit, error) {
	curve := market.Curve{Name: c.Name, Brokerage: float64(c.Brokerage)}
	if c.MinimumRateOnLine != nil {
		curve.MinimumRateOnLine = float64(*c.MinimumRateOnLine)
	}
	if c.Family != "" {
		var err error
		curve.Distortion, err = market.NewFamily(c.Family, float64(*c.Parameter))
		return CurveFit{Curve: curve}, err
	}
	quotes, err := s.quotes(key, c.Quotes, c.Name)
	if err != nil {
		return CurveFit{}, err
	}
	today := market.Today{Brokerage: curve.Brokerage}
	if s.settings.Market.AsOf != nil {
		today.Date = s.settings.Market.AsOf.Time
	}
	if c.HalfLife != nil {
		today.HalfLife = float64(*c.HalfLife)
	}
	if quotes, err = today.Current(append(quotes, own...)); err != nil {
		return CurveFit{}, err
	}
	options := market.FreeOptions{Absolute: c.Error == "absolute"}
	if c.Like != "" {
		loaded := market.Loaded{Of: other}
		if c.Loading != nil {
			loaded.Loading = float64(*c.Loading)
		}
		options.Toward, options.Name = loaded, "curve "+c.Like
		if len(quotes) == 0 { // nothing of its own: it is the other curve
			curve.Distortion = loaded
			return CurveFit{Curve: curve}, curve.Validate()
		}
	}
	if len(quotes) == 0 {
		return CurveFit{}, &fault.Fault{Key: "quotes", Found: fmt.Sprintf("no quote for the curve %q", c.Name), Allowed: "at least one quote that names the curve"}
	}
	fit, err := fitCurve(curve, quotes, c.Fit, options)
	if err != nil {
		return CurveFit{}, err
	}
	fit.Curve.Replicates, err = market.Resample(fit.Curve, replicates, s.head.Seed)
	return fit, err
}

// replicates is the count of resamples of the quotes of each curve: their spread is known to 1/√(2·200) = 5 %.
const replicates = 200

// turnMarket applies the scenario of the run, if one is named.
func (s *Study) turnMarket() error {
	if s.options.Scenario == "" {
		return nil
	}
	var names []string
	for _, set := range s.settings.Market.Scenarios {
		names = append(names, set.Name)
		if set.Name != s.options.Scenario {
			continue
		}
		scenario := set.Turn()
		s.head.Notes = append(s.head.Notes, "Under the scenario "+scenario.String()+".")
		for i := range s.curves {
			var err error
			if s.curves[i].Curve, err = scenario.Turn(s.curves[i].Curve); err != nil {
				return err
			}
		}
		return nil
	}
	at := s.settings.At(fault.Fault{Key: "market.scenarios", Found: fmt.Sprintf("no scenario is named %q", s.options.Scenario), Allowed: fmt.Sprintf("%q", names), Nearest: fault.Nearest(s.options.Scenario, names)})
	return &at
}

// quotes reads the quotes of one curve from a file; a quote for a curve that the study does not have is a fault.
func (s *Study) quotes(key, file, curve string) ([]market.Quote, error) {
	if file == "" {
		return nil, nil
	}
	curves := make([]string, len(s.settings.Market.Curves))
	for i, c := range s.settings.Market.Curves {
		curves[i] = c.Name
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
		quote := q.Quote()
		quote.Terms, quote.Years = &terms, s.head.Years
		if terms.Kind == treaty.QuotaShare { // its limit is its subject premium: the rate is a part of it
			terms.Limit = s.premiumOf(terms)
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

// premiumOf gives the premium of a treaty's classes, money per year.
func (s *Study) premiumOf(terms treaty.Treaty) float64 {
	names, premiums := make([]string, len(s.book.Classes)), make([]float64, len(s.book.Classes))
	for i, c := range s.book.Classes {
		names[i], premiums[i] = c.Name, c.Premium
	}
	return treaty.Programme{Treaties: []treaty.Treaty{terms}}.SubjectPremium(0, names, premiums)
}

// fitCurve fits all families and the free curve, for comparison, and chooses the one that the study asks for.
func fitCurve(curve market.Curve, quotes []market.Quote, choice string, o market.FreeOptions) (CurveFit, error) {
	result := CurveFit{Curve: curve}
	for _, family := range market.FamilyNames() {
		fit, err := market.FitFamily(family, quotes, curve.Brokerage)
		if err != nil {
			return result, err
		}
		result.Candidates = append(result.Candidates, fit)
	}
	free, err := market.FitFree(quotes, curve.Brokerage, o)
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
	result.Recommended, result.Reason = recommend(result.Candidates)
	result.Curve.Distortion, result.Curve.Fit = result.Chosen.Distortion, result.Chosen
	return result, result.Curve.Validate()
}

// simplerWithin is how much worse, relatively, a family with one parameter may price the quotes that it did not see and still be preferred to the free
// curve: it has less to go wrong with.
const simplerWithin = 0.1

// recommend names the way to fit that the quotes speak for, and says why.
func recommend(candidates []*market.Fit) (*market.Fit, string) {
	var best, family *market.Fit
	for _, f := range candidates {
		if best == nil || score(f) < score(best) {
			best = f
		}
		if f.Family != market.FamilyFree && (family == nil || score(f) < score(family)) {
			family = f
		}
	}
	switch {
	case math.IsNaN(best.LeaveOneOut):
		return best, "it fits the quotes best, but they are too few to try it on quotes that it did not see"
	case best.Family == market.FamilyFree && score(family) <= score(best)*(1+simplerWithin):
		return family, fmt.Sprintf("it prices quotes that it did not see to %.2g %%, all but as well as the free curve (%.2g %%), with one parameter", 100*score(family), 100*score(best))
	case best.Family == market.FamilyFree:
		return best, fmt.Sprintf("it prices quotes that it did not see to %.2g %%, the best family (%s) to %.2g %%", 100*score(best), family.Family, 100*score(family))
	}
	return best, fmt.Sprintf("it prices quotes that it did not see to %.2g %%, better than any other", 100*score(best))
}

// deepen adds to the curves what takes longer: whether their quotes are consistent, and the bands of the curve.
func (s *Study) deepen(ctx context.Context) error {
	var group errgroup.Group
	group.SetLimit(s.options.Workers)
	for i := range s.curves {
		group.Go(func() error { return deepenCurve(ctx, &s.curves[i]) })
	}
	return group.Wait()
}

func deepenCurve(ctx context.Context, c *CurveFit) error {
	if c.Chosen == nil || c.Band != nil || ctx.Err() != nil {
		return ctx.Err()
	}
	quotes := make([]market.Quote, len(c.Chosen.Quotes))
	for i, q := range c.Chosen.Quotes {
		quotes[i] = q.Quote
	}
	low := math.Max(c.Chosen.LowestTail/4, 1e-5)
	for i := range bandPoints {
		c.BandAt = append(c.BandAt, low*math.Pow(1/low, float64(i)/(bandPoints-1)))
	}
	if c.Curve.Replicates != nil {
		c.Resampled = c.Curve.Replicates.Band(c.BandAt, bandShare)
	}
	consistency, err := market.CheckConsistency(quotes, c.Curve.Brokerage)
	if errors.Is(err, market.ErrTooManyQuotes) {
		return nil
	}
	if err != nil {
		return err
	}
	c.Consistency = &consistency
	c.Band, c.Opened, err = market.Band(quotes, c.Curve.Brokerage, c.BandAt)
	return err
}

// The bands of a curve: at how many probabilities, and what share of the resampled curves they hold.
const (
	bandPoints = 33
	bandShare  = 0.9
)

// score is the leave-one-out error, or the in-sample error when there are too few quotes for it.
func score(f *market.Fit) float64 {
	if math.IsNaN(f.LeaveOneOut) {
		return f.InSample
	}
	return f.LeaveOneOut
}
