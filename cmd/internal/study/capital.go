package study

import (
	"fmt"
	"io"
	"slices"
	"strings"

	"cedewright/cmd/internal/settings"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/security"
)

// prepare puts the case together and measures the gross position.
func (s *Study) prepare() error {
	set := s.settings.Capital
	c := optimize.Case{Book: s.book}
	if set.Cost != nil {
		c.CostOfCapital = float64(*set.Cost)
	}
	if set.OwnFunds != nil {
		c.OwnFunds = float64(*set.OwnFunds)
	}
	for _, curve := range s.curves {
		c.Curves = append(c.Curves, curve.Curve)
	}
	if err := s.addOwners(&c); err != nil {
		return err
	}
	if err := s.addSecurity(&c); err != nil {
		return err
	}
	if err := s.addStandards(&c); err != nil {
		return err
	}
	for _, name := range set.Drive {
		c.Drive = append(c.Drive, slices.IndexFunc(s.standards, func(k capital.Standard) bool { return k.Name == name }))
	}
	if set.Rest != nil {
		rest, err := set.Rest.Rule()
		if err != nil {
			at := s.settings.At(fault.Fault{Key: "capital.rest", Err: err})
			return &at
		}
		if set.Rest.Seed == nil {
			rest.Seed = s.head.Seed
		}
		c.Rest = rest
	}
	var err error
	if s.appraiser, err = optimize.NewAppraiser(c); err != nil {
		return s.standardFaults(err)
	}
	s.warnOfFewYears(c)
	return nil
}

func (s *Study) addOwners(c *optimize.Case) error {
	set := s.settings.Capital.Owners
	if set == nil {
		return nil
	}
	if set.Curve != "" {
		for _, curve := range s.curves {
			if curve.Curve.Name == set.Curve {
				c.Owners = curve.Curve.Distortion
			}
		}
		return nil
	}
	distortion, err := set.Distortion()
	if err != nil {
		at := s.settings.At(fault.Fault{Key: "capital.owners", Err: err})
		return &at
	}
	c.Owners = distortion
	return nil
}

// addSecurity rates the reinsurers by the factors of the first formula of the study, or by those that ship.
func (s *Study) addSecurity(c *optimize.Case) error {
	if s.settings.Security == nil {
		return nil
	}
	key, name := "security", settings.DefaultFactors
	for i, k := range s.settings.Capital.Standards {
		if k.Formula != nil {
			key, name = fmt.Sprintf("capital.standards[%d].formula.factors", i), k.Formula.Factors
			break
		}
	}
	factors, err := s.factors(key, name)
	if err != nil {
		return err
	}
	c.Security = s.settings.Security.Register(factors, s.head.Seed)
	return nil
}

func (s *Study) addStandards(c *optimize.Case) error {
	var faults fault.List
	var reinsurers []security.Reinsurer
	if c.Security != nil {
		reinsurers = c.Security.Reinsurers
	}
	for i, k := range s.settings.Capital.Standards {
		rule := k.Rule()
		switch {
		case k.Formula != nil:
			factors, err := s.factors(fmt.Sprintf("capital.standards[%d].formula.factors", i), k.Formula.Factors)
			if err != nil {
				faults.AddError(err)
				continue
			}
			for j, class := range k.Formula.Classes {
				if !slices.ContainsFunc(factors.Segments, func(g capital.Segment) bool { return g.Number == int(class.Segment) }) {
					faults.Add(s.settings.At(fault.Fault{
						Key: fmt.Sprintf("capital.standards[%d].formula.classes[%d].segment", i, j), Found: fmt.Sprintf("no segment %d", class.Segment), Allowed: segmentWords(factors),
					}))
				}
			}
			rule.Formula = k.Formula.Rule(factors, s.settings.Book.Classes, reinsurers)
			rule.Source = fmt.Sprintf("factors %s, %s; the other inputs are the company's own", factors.Name, factors.Version)
		case k.Covariance != nil:
			rule.Covariance = k.Covariance.Rule()
			for j, name := range rule.Covariance.Perils {
				if !slices.Contains(s.book.Table.Perils(), name) {
					faults.Add(s.settings.At(fault.Fault{
						Key: fmt.Sprintf("capital.standards[%d].covariance.perils[%d]", i, j), Found: fmt.Sprintf("no peril of the book is named %q", name),
						Allowed: fmt.Sprintf("%q", s.book.Table.Perils()), Nearest: fault.Nearest(name, s.book.Table.Perils()),
					}))
				}
			}
		}
		s.standards = append(s.standards, rule)
	}
	c.Standards = s.standards
	return faults.Err()
}

// segmentWords lists the segments of a formula: "1 motor vehicle liability, 2 …".
func segmentWords(f capital.Factors) string {
	var list []string
	for _, g := range f.Segments {
		list = append(list, fmt.Sprintf("%d %s", g.Number, g.Name))
	}
	return strings.Join(list, ", ")
}

// factors reads a factor file: one that ships, by its name, or one of the study's own, by its path.
func (s *Study) factors(key, name string) (capital.Factors, error) {
	if data, ok := settings.ShippedFactors(name); ok {
		return settings.ReadFactors(data, name)
	}
	var factors capital.Factors
	err := s.read(key, name, func(r io.Reader, file string) (int, error) {
		data, err := io.ReadAll(r)
		if err != nil {
			return 0, err
		}
		factors, err = settings.ReadFactors(data, file)
		return 0, err
	})
	for _, f := range fault.All(err) {
		if strings.Contains(f.Found, "cannot be read") {
			f.Allowed = fmt.Sprintf("one of the factor files that ship, %q, or the path of a file, from the folder of the study", settings.ShippedFactorNames())
		}
	}
	return factors, err
}

// standardFaults gives faults of the case their place in the study: those of a formula or covariance stand under its key.
func (s *Study) standardFaults(err error) error {
	var faults fault.List
	for _, f := range fault.All(err) {
		for i, k := range s.settings.Capital.Standards {
			part := map[bool]string{true: ".formula", false: ".covariance"}[k.Formula != nil]
			if rest, ok := strings.CutPrefix(f.Key, fmt.Sprintf("capital.standards[%d].", i)); ok && (k.Formula != nil || k.Covariance != nil) {
				f.Key = fmt.Sprintf("capital.standards[%d]%s.%s", i, part, strings.Replace(rest, "scenario_correlations", "correlations", 1))
			}
		}
		faults.Add(s.settings.At(*f))
	}
	if faults.Len() == 0 {
		return err
	}
	return faults.Err()
}

// warnOfFewYears says where a figure rests on too few simulated years.
func (s *Study) warnOfFewYears(c optimize.Case) {
	type criterion struct {
		standard string
		level    sample.Level
	}
	said := map[criterion]bool{}
	few := func(name string, l sample.Level) {
		if said[criterion{name, l}] {
			return
		}
		said[criterion{name, l}] = true
		if beyond := float64(s.head.Years) * l.Tail(); beyond < 10 {
			s.head.Warnings = append(s.head.Warnings, fmt.Sprintf("Standard %s: only %.3g simulated years lie beyond its level of %s; its figures rest on too little.", name, beyond, l))
		}
	}
	for _, k := range s.standards {
		for _, one := range k.Criteria {
			few(k.Name, one.Level)
		}
		if k.Covariance != nil {
			few(k.Name, k.Covariance.Level)
		}
	}
	s.warnOfUnknownPerils()
	if c.Security != nil {
		for _, words := range s.appraiser.FailureWarnings() {
			s.head.Warnings = append(s.head.Warnings, "Security: "+words+"; what it leaves unpaid rests on too little.")
		}
	}
}

// warnOfUnknownPerils says which scenarios carry the name of a kind that the book does not know as a peril, so that treaties of named perils do not answer.
func (s *Study) warnOfUnknownPerils() {
	for _, k := range s.standards {
		if k.Formula == nil {
			continue
		}
		for _, scenario := range k.Formula.Scenarios {
			if !slices.Contains(s.book.Table.Perils(), scenario.Peril) {
				s.head.Warnings = append(s.head.Warnings, fmt.Sprintf("Standard %s, scenario %s: no peril of the book is named %s, so only treaties that cover all perils answer it; give the peril if the book calls it something else.",
					k.Name, scenario.Name, scenario.Peril))
			}
		}
	}
}
