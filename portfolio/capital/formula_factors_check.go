package capital

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/fault"
)

// factorCheck collects what is wrong with factors.
type factorCheck struct{ faults fault.List }

func (c *factorCheck) add(key string, found any, allowed string) {
	c.faults.Add(fault.Fault{Key: key, Found: fmt.Sprint(found), Allowed: allowed})
}

// within reports a number that is not from low to high.
func (c *factorCheck) within(key string, x, low, high float64, allowed string) {
	if !(x >= low && x <= high) {
		c.add(key, x, allowed)
	}
}

// above reports a number that is not above 0 and at most high.
func (c *factorCheck) above(key string, x, high float64, allowed string) {
	if !(x > 0 && x <= high) {
		c.add(key, x, allowed)
	}
}

// unknownKind reports a kind of scenario that is none of a list.
func (c *factorCheck) unknownKind(key, kind string, known []string) {
	c.faults.Add(fault.Fault{
		Key: key, Found: fmt.Sprintf("no kind of scenario here is named %q", kind), Allowed: fmt.Sprintf("%q", known), Nearest: fault.Nearest(kind, known),
	})
}

// Validate reports every fault of the factors at once. Its keys are those of a factor file, such as "segments[3].premium" or
// "segment_correlation[2][1]", counted from 0. It looks for factors that make no sense, not for such as differ from the law in force.
func (f *Factors) Validate() error {
	var c factorCheck
	if f.Name == "" {
		c.add("name", "no name", "the name of the factors, such as eu-2015-35")
	}
	if f.Version == "" {
		c.add("version", "no version", "date and state of the text that the factors were taken from")
	}
	c.segments(f)
	c.scenarios(f)
	c.modules(f)
	c.counterparties(f)
	return c.faults.Err()
}

func (c *factorCheck) segments(f *Factors) {
	if len(f.Segments) == 0 {
		c.add("segments", "no segments", "at least one")
	}
	numbers, names := map[int]bool{}, map[string]bool{}
	var list []string
	for i, s := range f.Segments {
		key := fmt.Sprintf("segments[%d].", i)
		switch {
		case s.Number < 1 || s.Number > 12:
			c.add(key+"number", s.Number, "a number from 1 to 12")
		case numbers[s.Number]:
			c.add(key+"number", fmt.Sprintf("%d is the number of another segment", s.Number), "each once")
		}
		switch {
		case s.Name == "":
			c.add(key+"name", "no name", "a name of its own")
		case names[s.Name]:
			c.add(key+"name", fmt.Sprintf("%q is the name of another segment", s.Name), "a name of its own")
		}
		numbers[s.Number], names[s.Name] = true, true
		list = append(list, s.Name)
		c.above(key+"premium", s.Premium, 1, "a standard deviation above 0 and at most 1, as a fraction of the volume")
		c.above(key+"reserve", s.Reserve, 1, "a standard deviation above 0 and at most 1, as a fraction of the volume")
		c.above(key+"non_proportional", s.NonProportional, 1, "a factor above 0 and at most 1; 1 = none")
	}
	checkCorrelations(&c.faults, "segment_correlation", f.SegmentCorrelation, list)
	c.within("premium_reserve", f.PremiumReserve, -1, 1, "a correlation from -1 to 1")
	c.above("multiple", f.Multiple, 10, "a multiple of the standard deviation above 0 and at most 10")
	if !(f.Diversification >= 0 && f.Diversification < 1) {
		c.add("diversification", f.Diversification, "a weight from 0 to below 1")
	}
}

func (c *factorCheck) scenarios(f *Factors) {
	seen := map[string]bool{}
	known := func(key, kind string, kinds []string) {
		switch {
		case !slices.Contains(kinds, kind):
			c.unknownKind(key, kind, kinds)
		case seen[kind]:
			c.add(key, fmt.Sprintf("%q twice", kind), "each kind once")
		}
		seen[kind] = true
	}
	for i, p := range f.Patterns {
		key := fmt.Sprintf("patterns[%d]", i)
		known(key+".kind", p.Kind, naturalKinds)
		if len(p.Alternatives) == 0 {
			c.add(key+".alternatives", "no alternative", "at least one, each a list of events as fractions of the specified loss")
		}
		for j, events := range p.Alternatives {
			if len(events) == 0 {
				c.add(fmt.Sprintf("%s.alternatives[%d]", key, j), "no event", "at least one, as a fraction of the specified loss")
			}
			for k, x := range events {
				if !(x >= 0) || math.IsInf(x, 0) {
					c.add(fmt.Sprintf("%s.alternatives[%d][%d]", key, j, k), x, "a fraction of at least 0")
				}
			}
		}
	}
	for i, kind := range f.ManMade {
		known(fmt.Sprintf("man_made[%d]", i), kind, manMadeKinds)
	}
	before := c.faults.Len()
	c.within("premium_catastrophe", f.PremiumCat, -1, 1, "a correlation from -1 to 1")
	c.within("premium_lapse", f.PremiumLapse, -1, 1, "a correlation from -1 to 1")
	c.within("catastrophe_lapse", f.CatLapse, -1, 1, "a correlation from -1 to 1")
	if c.faults.Len() > before {
		return
	}
	smallest := eigenvalues([][]float64{{1, f.PremiumCat, f.PremiumLapse}, {f.PremiumCat, 1, f.CatLapse}, {f.PremiumLapse, f.CatLapse, 1}})[0]
	if !(smallest >= smallestEigenvalue) {
		c.faults.Add(notSemidefinite("premium_catastrophe", smallest))
	}
}

func (c *factorCheck) modules(f *Factors) {
	if !slices.Equal(f.Modules, moduleNames) {
		c.add("modules", fmt.Sprintf("%q", f.Modules), fmt.Sprintf("%q, in this order", moduleNames))
	}
	checkCorrelations(&c.faults, "module_matrix", f.ModuleMatrix, moduleNames)
}

func (c *factorCheck) counterparties(f *Factors) {
	const probability = "a probability from 0 to 1"
	if len(f.Steps) != 7 {
		c.add("steps", fmt.Sprintf("%d probabilities", len(f.Steps)), "7, for the credit quality steps 0 to 6")
	}
	for i, p := range f.Steps {
		key := fmt.Sprintf("steps[%d]", i)
		c.within(key, p, 0, 1, probability)
		if i > 0 && p < f.Steps[i-1] {
			c.add(key, fmt.Sprintf("%g after %g", p, f.Steps[i-1]), "probabilities that do not fall from step to step")
		}
	}
	if len(f.Solvency) == 0 {
		c.add("solvency", "no rows", "at least one, of ratio and probability")
	}
	for i, s := range f.Solvency {
		key := fmt.Sprintf("solvency[%d].", i)
		if !(s.Ratio >= 0) || math.IsInf(s.Ratio, 0) {
			c.add(key+"ratio", s.Ratio, "a ratio of at least 0")
		}
		c.within(key+"probability", s.Probability, 0, 1, probability)
		if i > 0 && s.Ratio >= f.Solvency[i-1].Ratio {
			c.add(key+"ratio", fmt.Sprintf("%g after %g", s.Ratio, f.Solvency[i-1].Ratio), "ratios that fall from row to row")
		}
		if i > 0 && s.Probability < f.Solvency[i-1].Probability {
			c.add(key+"probability", fmt.Sprintf("%g after %g", s.Probability, f.Solvency[i-1].Probability), "probabilities that rise as ratios fall")
		}
	}
	for _, part := range []struct {
		key string
		x   float64
	}{{"loss_given", f.LossGiven}, {"loss_given_tied", f.LossGivenTied}, {"mitigating", f.Mitigating}, {"collateral_used", f.CollateralUsed}} {
		c.within(part.key, part.x, 0, 1, "a fraction from 0 to 1")
	}
	c.within("low", f.Low, 0, 1, "a fraction from 0 to 1 of all losses given default")
	c.within("high", f.High, 0, 1, "a fraction from 0 to 1 of all losses given default")
	if f.High <= f.Low {
		c.add("high", fmt.Sprintf("%g, with %g for low", f.High, f.Low), "more than low")
	}
	c.above("low_multiple", f.LowMultiple, 100, "a multiple above 0 and at most 100")
	c.above("high_multiple", f.HighMultiple, 100, "a multiple above 0 and at most 100")
	if f.HighMultiple < f.LowMultiple {
		c.add("high_multiple", fmt.Sprintf("%g, with %g for low_multiple", f.HighMultiple, f.LowMultiple), "at least low_multiple")
	}
	c.within("types_cross", f.TypesCross, 0, 2, "a number from 0 (independent) to 2 (added)")
}
