package optimize

import (
	"testing"

	"cedewright/portfolio/treaty"
)

// TestFreeCoverFreesCapital: cover without premium, behind which nobody can fail, never raises what a standard asks of the result, the formula or the
// covariance. (A deviation may rise: free cover also lifts the expected result.)
func TestFreeCoverFreesCapital(t *testing.T) {
	freed := map[string]int{}
	for seed := range uint64(trials(200)) {
		r := newRand(seed)
		c := enlarge(r, randomCase(t, r))
		c.Owners, c.Rest = nil, nil
		for _, s := range c.Standards {
			if s.Formula != nil {
				s.Formula.Recoverables = nil // what is owed already becomes dearer when more is mitigated
			}
		}
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		p := randomProgramme(r, c)
		for i := range p.Treaties {
			p.Treaties[i].Reinstatements = nil // premium after a loss
		}
		before, err := a.Appraise(p, false)
		if err != nil {
			t.Fatal(err)
		}
		q := treaty.Programme{Name: "more", Treaties: append([]treaty.Treaty(nil), p.Treaties...)}
		q.Treaties = append(q.Treaties, treaty.Treaty{
			Name: "free", Kind: []treaty.Kind{treaty.EventExcess, treaty.RiskExcess, treaty.AggregateExcess}[r.IntN(3)], Retention: float64(r.IntN(20)), Limit: float64(1 + r.IntN(60)),
			Share: 1, Premium: treaty.Some(0), Curve: "w",
		})
		after, err := a.Appraise(q, false)
		if err != nil {
			t.Fatal(err)
		}
		for i, s := range c.Standards {
			if s.Name == "t" || s.Name == "d" || s.Name == "worst" || s.Name == "weighted" {
				continue // deviations
			}
			had, has := before.Capital[i].Net.Value, after.Capital[i].Net.Value
			if has > had+1e-9*max(had, 100) {
				t.Fatalf("seed %d: under %s free cover raises the requirement from %v to %v\n%+v", seed, s.Name, had, has, q)
			}
			if has < had {
				freed[s.Name]++
			}
		}
	}
	for _, name := range []string{"v", "u", "formula", "covariance"} {
		if freed[name] < trials(50) {
			t.Errorf("%s: freed in %d of 200", name, freed[name])
		}
	}
}
