package study

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"cedewright/cmd/internal/settings"
	"cedewright/optimize"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// Look describes the data and the gross position.
func (s *Study) Look(context.Context) (Look, error) {
	gross, err := s.appraiser.Appraise(treaty.Programme{Name: settings.NoCover}, true)
	if err != nil {
		return Look{}, err
	}
	l := Look{Head: s.head, Gross: gross, Fits: s.fits}
	table := s.book.Table
	for i, c := range s.book.Classes {
		l.Classes = append(l.Classes, s.classLook(c, i))
	}
	total := loss.Class{Name: "all classes"}
	expenses := 0.0
	for _, c := range s.book.Classes {
		total.Premium += c.Premium
		expenses += c.Premium * c.Expenses
	}
	if total.Premium > 0 {
		total.Expenses = expenses / total.Premium
	}
	l.Total = s.classLook(total, -1)
	for i, name := range table.Perils() {
		annual, err := sample.New(table.Annual(-1, i))
		if err != nil {
			return Look{}, err
		}
		largest, err := sample.New(table.Largest(-1, i))
		if err != nil {
			return Look{}, err
		}
		p := PerilLook{
			Name: name, Events: float64(table.Events(-1, i)) / float64(s.head.Years),
			Loss:          optimize.Estimate{Value: annual.Mean(), StandardError: annual.MeanError()},
			LargestOfBook: largest.OrderStatistic(largest.Len()),
		}
		for _, period := range ReturnPeriods {
			p.LargestOneIn = append(p.LargestOneIn, quantile(largest, period))
			p.AnnualOneIn = append(p.AnnualOneIn, quantile(annual, period))
		}
		l.Perils = append(l.Perils, p)
	}
	return l, nil
}

// quantile gives the value exceeded once in a return period of years.
func quantile(s sample.Sample, period float64) float64 {
	level, err := sample.ParseLevel(fmt.Sprintf("1 in %v", period))
	if err != nil {
		panic("study: return period: " + err.Error()) // the periods are constants
	}
	return s.VaR(level)
}

func (s *Study) classLook(c loss.Class, index int) ClassLook {
	annual, err := sample.New(s.book.Table.Annual(index, -1))
	if err != nil {
		panic("study: a table without years: " + err.Error()) // checked on loading
	}
	return ClassLook{
		Name: c.Name, Premium: c.Premium, Expenses: c.Expenses,
		Loss: optimize.Estimate{Value: annual.Mean(), StandardError: annual.MeanError()}, SD: annual.StandardDeviation(),
		OneIn10: quantile(annual, 10), OneIn200: quantile(annual, 200),
		Events: float64(s.book.Table.Events(index, -1)) / float64(s.head.Years),
	}
}

// Fit gives the curves and how they were fitted.
func (s *Study) Fit(ctx context.Context) (Fitted, error) {
	if len(s.curves) == 0 {
		at := s.settings.At(fault.Fault{Key: "market.curves", Found: "no curve", Allowed: "at least one, to be fitted"})
		return Fitted{}, &at
	}
	if err := s.deepen(ctx); err != nil {
		return Fitted{}, err
	}
	return Fitted{Head: s.head, Curves: s.curves}, nil
}

// Appraise appraises no cover and every programme of the study.
func (s *Study) Appraise(context.Context) (Appraised, error) {
	programmes := append([]treaty.Programme{{Name: settings.NoCover}}, s.programmes...)
	all, err := optimize.AppraiseAll(s.appraiser, programmes, s.options.Workers, nil)
	if err != nil {
		return Appraised{}, s.placed(err)
	}
	return s.appraised(all)
}

// placed gives faults of pricing, whose key starts with a treaty's name, the place of that treaty in the study.
func (s *Study) placed(err error) error {
	var faults fault.List
	for _, f := range fault.All(err) {
		for i, p := range s.settings.Programmes {
			for j, t := range p.Treaties {
				if f.Key == t.Name || len(f.Key) > len(t.Name) && f.Key[:len(t.Name)+1] == t.Name+"." {
					f.Key = fmt.Sprintf("programmes[%d].treaties[%d]%s", i, j, f.Key[len(t.Name):])
				}
			}
		}
		faults.Add(s.settings.At(*f))
	}
	if faults.Len() == 0 {
		return err
	}
	return faults.Err()
}

func (s *Study) appraised(all []optimize.Appraisal) (Appraised, error) {
	none := all[0]
	c := s.appraiser.Case()
	a := Appraised{
		Head: s.head, CostOfCapital: c.CostOfCapital, OwnFunds: c.OwnFunds, Standards: c.Standards, Rest: c.Rest, Security: c.Security,
		Programmes: all, Gross: GrossFigures{Capital: none.Capital, Result: none.NetResult},
	}
	if c.Owners != nil {
		a.Owners = c.Owners.String()
		if set := s.settings.Capital.Owners; set.Curve != "" {
			a.Owners = "curve " + set.Curve
		}
	}
	for _, i := range c.Drivers() {
		a.Drive = append(a.Drive, c.Standards[i].Name)
	}
	for _, c := range s.book.Classes {
		a.Gross.Premium += c.Premium
		a.Gross.Expenses += c.Premium * c.Expenses
	}
	annual, err := sample.New(s.book.Table.Annual(-1, -1))
	if err != nil {
		panic("study: a table without years: " + err.Error()) // checked on loading
	}
	a.Gross.Loss = optimize.Estimate{Value: annual.Mean(), StandardError: annual.MeanError()}
	against := s.reference(all)
	for _, p := range all {
		if p.Programme.Name != against.Programme.Name {
			a.Differences = append(a.Differences, Difference{p.Programme.Name, against.Programme.Name, optimize.CompareCost(p, against), optimize.ComparePrices(p, against)})
		}
	}
	a.Warnings = slices.Clone(a.Warnings)
	for _, p := range all {
		if len(p.NoTaker) > 0 {
			a.Warnings = append(a.Warnings, fmt.Sprintf("Programme %s: the market has no capacity for %s; its figures take it as placed all the same.", p.Programme.Name, strings.Join(p.NoTaker, ", ")))
		}
		prices, err := s.appraiser.Explain(p.Programme)
		if err != nil {
			return Appraised{}, err
		}
		a.Prices = append(a.Prices, prices)
		allocation, err := s.appraiser.Allocate(p.Programme)
		if err != nil {
			return Appraised{}, err
		}
		a.Allocations = append(a.Allocations, allocation)
	}
	return a, nil
}

// reference gives the programme against which others are compared: the one that the search starts from, or the first of the study, or no
// cover.
func (s *Study) reference(all []optimize.Appraisal) optimize.Appraisal {
	if set := s.settings.Search; set != nil && set.From != "" {
		if i := slices.IndexFunc(all, func(a optimize.Appraisal) bool { return a.Programme.Name == set.From }); i >= 0 {
			return all[i]
		}
	}
	return all[min(1, len(all)-1)]
}

// SearchOptions are the budget of a search, as flags, environment and study make it; what is 0 or nil takes the default.
type SearchOptions struct {
	Seed        *uint64
	Population  int
	Generations int
	Evaluations int
	Patience    int
	Progress    func(optimize.Progress)
}

// Search looks for the best programme of the study's decision space. When the context ends, it gives the best so far.
func (s *Study) Search(ctx context.Context, o SearchOptions) (Searched, error) {
	set := s.settings.Search
	if set == nil {
		at := s.settings.At(fault.Fault{Key: "search", Found: "the study has no section search", Allowed: "what may vary, or a tower"})
		return Searched{}, &at
	}
	space, err := s.settings.Space()
	if err != nil {
		return Searched{}, err
	}
	result, err := optimize.Search(ctx, s.appraiser, space, s.searchSettings(*set, o))
	if err != nil {
		return Searched{}, s.placed(err)
	}
	if err := s.deepen(context.WithoutCancel(ctx)); err != nil {
		return Searched{}, err
	}
	programmes := append([]treaty.Programme{{Name: settings.NoCover}}, s.programmes...)
	all, err := optimize.AppraiseAll(s.appraiser, programmes, s.options.Workers, nil)
	if err != nil {
		return Searched{}, s.placed(err)
	}
	all = append(all, result.Best)
	figures, err := s.appraised(all)
	if err != nil {
		return Searched{}, err
	}
	found := Searched{Appraised: figures, Result: result, NoCover: all[0], Curves: s.curves}
	found.Start = s.reference(all)
	found.Notes = append(found.Notes, result.Notes...)
	found.Bound = s.appraiser.ThinLayerBound(space)
	found.Keep = space.Keep
	found.Space = describeSpace(space, result.SpaceSize)
	for _, p := range []optimize.Appraisal{found.Start, found.Result.Best} {
		scale, err := s.appraiser.SubjectReturnPeriods(p.Programme, ReturnPeriods)
		if err != nil {
			return Searched{}, err
		}
		found.Scales = append(found.Scales, scale)
	}
	found.Curve, err = s.exceedance(found)
	return found, err
}

// searchSettings takes the budget as the run has gathered it; what is 0 takes the default.
func (s *Study) searchSettings(set settings.Search, o SearchOptions) optimize.SearchSettings {
	so := optimize.SearchSettings{
		Population: o.Population, Generations: o.Generations, Evaluations: o.Evaluations, Patience: o.Patience,
		Workers: s.options.Workers, Progress: o.Progress,
	}
	if set.Seed != nil {
		so.Seed = uint64(*set.Seed)
	}
	if o.Seed != nil {
		so.Seed = *o.Seed
	}
	return so
}

// describeSpace says what may change.
func describeSpace(space optimize.Space, size float64) string {
	count := func(n int, one, many string) string {
		if n == 1 {
			return one
		}
		return fmt.Sprintf("%d %s", n, many)
	}
	var parts []string
	if n := len(space.Towers); n > 0 {
		parts = append(parts, count(n, "one tower", "towers")+" cut by the search")
	}
	if n := len(space.Vary); n > 0 {
		parts = append(parts, count(n, "one treaty", "treaties")+" varied")
	}
	return strings.Join(parts, " and ") + fmt.Sprintf(", about %.2g programmes", size)
}

// exceedance gives the annual loss at return periods, gross and net of the recoveries of the start programme and the best.
func (s *Study) exceedance(found Searched) (ExceedanceCurves, error) {
	curves := ExceedanceCurves{ReturnPeriods: ReturnPeriods}
	gross, err := sample.New(s.book.Table.Annual(-1, -1))
	if err != nil {
		return curves, err
	}
	for _, period := range ReturnPeriods {
		curves.Gross = append(curves.Gross, quantile(gross, period))
	}
	for _, a := range []optimize.Appraisal{found.Start, found.Result.Best} {
		losses, err := s.appraiser.NetLosses(a.Programme)
		if err != nil {
			return curves, err
		}
		net, err := sample.New(losses)
		if err != nil {
			return curves, err
		}
		var at []float64
		for _, period := range ReturnPeriods {
			at = append(at, quantile(net, period))
		}
		curves.Programmes, curves.Net = append(curves.Programmes, a.Programme.Name), append(curves.Net, at)
	}
	return curves, nil
}
