package market

import (
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"testing"

	"cedewright/portfolio/treaty"
)

// fittedCurve gives a curve fitted to noisy quotes of a known one.
func fittedCurve(t testing.TB, family string, seed uint64) Curve {
	t.Helper()
	r := rand.New(rand.NewPCG(seed, 1))
	quotes := syntheticQuotes(12, Wang{0.4})
	for i := range quotes {
		quotes[i].RateOnLine *= math.Exp(0.1 * r.NormFloat64())
	}
	var f *Fit
	var err error
	if family == FamilyFree {
		f, err = FitFree(quotes, 0, FreeOptions{})
	} else {
		f, err = FitFamily(family, quotes, 0)
	}
	if err != nil {
		t.Fatal(err)
	}
	return Curve{Name: "c", Distortion: f.Distortion, Fit: f}
}

// TestOnKnots: a curve on the grid asks what the curve asks, to the error of chords.
func TestOnKnots(t *testing.T) {
	tails := knots(syntheticQuotes(12, Wang{0.4}))
	for _, d := range []Distortion{Wang{0.4}, ProportionalHazard{1.3}, TailValueAtRisk{0.7}, ConstantCostOfCapital{0.02}, DualPower{2}, Mixture{Supremum: 0.01, Knots: []Knot{{tails[40], 0.3}, {1, 0.69}}}} {
		w := onKnots(d, tails)
		total := 0.0
		for _, x := range w {
			total += x
		}
		if math.Abs(total-1) > 1e-9 {
			t.Errorf("%v: weights add up to %v", d, total)
		}
		r := Replicates{tails: tails, weights: [][]float64{w}}
		for _, s := range []float64{0.001, 0.01, 0.1, 0.5, 0.9} {
			// Chords of the widest gap, a factor of 1.08, miss a concave curve by up to ln(1.08)/4 = 2 %; a kink between knots is the worst case.
			if got, want := r.At(s)[0], d.At(s); math.Abs(got/want-1) > 0.02 {
				t.Errorf("%v at %v: %v, want %v", d, s, got, want)
			}
		}
	}
}

// TestReplicatesSpreadLikeNewQuotes: the spread of the replicates of one fit is like the spread of fits to fresh quotes with the same noise.
func TestReplicatesSpreadLikeNewQuotes(t *testing.T) {
	probabilities := []float64{0.01, 0.05}
	fresh := make([][]float64, len(probabilities))
	stated := make([]float64, len(probabilities))
	const runs = 40
	for seed := range uint64(runs) {
		c := fittedCurve(t, FamilyWang, seed)
		r, err := Resample(c, 20, 9)
		if err != nil {
			t.Fatal(err)
		}
		for i, s := range probabilities {
			fresh[i] = append(fresh[i], c.Distortion.At(s))
			stated[i] += deviation(r.At(s)) / runs
		}
	}
	for i, s := range probabilities {
		// 40 fits know their spread to 11 %; the bootstrap of 12 quotes understates by about √(11/12).
		if ratio := stated[i] / deviation(fresh[i]); ratio < 0.6 || ratio > 1.4 {
			t.Errorf("at %v: replicates spread by %v, fits to new quotes by %v", s, stated[i], deviation(fresh[i]))
		}
	}
}

func deviation(x []float64) float64 {
	mean, sum := 0.0, 0.0
	for _, v := range x {
		mean += v / float64(len(x))
	}
	for _, v := range x {
		sum += (v - mean) * (v - mean)
	}
	return math.Sqrt(sum / float64(len(x)-1))
}

// TestResampleIgnoresOrder: the order in which quotes stand draws no other replicates.
func TestResampleIgnoresOrder(t *testing.T) {
	for _, family := range []string{FamilyWang, FamilyFree} {
		c := fittedCurve(t, family, 5)
		r, err := Resample(c, 20, 1)
		if err != nil {
			t.Fatal(err)
		}
		turned := *c.Fit
		turned.Quotes = slices.Clone(turned.Quotes)
		slices.Reverse(turned.Quotes)
		c.Fit = &turned
		other, err := Resample(c, 20, 1)
		if err != nil {
			t.Fatal(err)
		}
		probabilities := []float64{0.002, 0.02, 0.2}
		errors := r.StandardErrors(probabilities)
		for i, e := range other.StandardErrors(probabilities) {
			if !(e > 0) || e != errors[i] {
				t.Errorf("%s: standard error of g(%v) is %v or, in another order, %v", family, probabilities[i], errors[i], e)
			}
		}
	}
}

func TestResample(t *testing.T) {
	c := fittedCurve(t, FamilyFree, 3)
	one, err := Resample(c, 20, 1)
	if err != nil || one.Count() != 20 {
		t.Fatal(err)
	}
	again, err := Resample(c, 20, 1)
	if err != nil || !reflect.DeepEqual(one, again) {
		t.Error("the same seed gives other replicates")
	}
	other, err := Resample(c, 20, 2)
	if err != nil || reflect.DeepEqual(one, other) {
		t.Error("another seed gives the same replicates")
	}
	for _, w := range one.weights {
		total := 0.0
		for _, x := range w {
			if x < 0 {
				t.Errorf("weight %v", x)
			}
			total += x
		}
		if math.Abs(total-1) > 1e-9 {
			t.Errorf("weights add up to %v", total)
		}
	}
	band := one.Band([]float64{0.0005, 0.05}, 0.9)
	if band[0].High/band[0].Low <= band[1].High/band[1].Low {
		t.Errorf("the band is no wider beyond the quotes: %+v", band)
	}
	for _, c := range []Curve{{Name: "by hand", Distortion: Wang{0.4}}, {Name: "few", Fit: &Fit{Quotes: c.Fit.Quotes[:2]}}} {
		if r, err := Resample(c, 20, 1); r != nil || err != nil {
			t.Errorf("%s: %v, %v", c.Name, r, err)
		}
	}
}

// TestPremiumsOfReplicates: prices under a replicate are those of a tariff on its curve, to the error of chords.
func TestPremiumsOfReplicates(t *testing.T) {
	const years = 2000
	random := rand.New(rand.NewPCG(1, 1))
	var recoveries []float64
	for range years / 10 {
		recoveries = append(recoveries, min(100*random.ExpFloat64(), 200))
	}
	slices.Sort(recoveries)
	slices.Reverse(recoveries)
	layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Share: 1, Reinstatements: []float64{1}}
	c := fittedCurve(t, FamilyWang, 4)
	c.Brokerage = 0.1
	r, err := Resample(c, 10, 1)
	if err != nil {
		t.Fatal(err)
	}
	price := func(d Distortion) float64 {
		tariff, err := NewTariff(Curve{Name: "c", Distortion: d, Brokerage: 0.1}, years)
		if err != nil {
			t.Fatal(err)
		}
		p, err := tariff.BasePremium(layer, recoveries)
		if err != nil {
			t.Fatal(err)
		}
		return p.Base
	}
	moves := r.BasePremiums(layer, recoveries, years)
	for i, w := range r.weights {
		want := price(mixtureOf(w, r.tails)) - price(mixtureOf(r.fitted, r.tails))
		if math.Abs(moves[i]-want) > 1e-6*price(c.Distortion) {
			t.Errorf("replicate %d moves the premium by %v, want %v", i, moves[i], want)
		}
	}
	layer.Premium = treaty.Some(5)
	if slices.ContainsFunc(r.BasePremiums(layer, recoveries, years), func(x float64) bool { return x != 0 }) {
		t.Error("a quoted premium is moved")
	}
	q := treaty.Treaty{Kind: treaty.QuotaShare, Cession: 1}
	if moves := r.Commissions(q, recoveries, years); deviation(moves) == 0 {
		t.Error("a modelled commission is not moved")
	}
	q.Commission = treaty.Some(0.3)
	if moves := r.Commissions(q, recoveries, years); deviation(moves) != 0 {
		t.Error("a given commission is moved")
	}
}

func TestReliance(t *testing.T) {
	c := fittedCurve(t, FamilyWang, 1)
	layer := treaty.Treaty{Kind: treaty.EventExcess, Retention: 10, Limit: 10}
	for _, x := range []struct {
		attachment, exhaustion float64
		want                   Reliance
	}{{0.1, 0.05, Interpolated}, {0.005, 0.0001, Extrapolated}, {0.9, 0.5, Extrapolated}} {
		if got := c.Reliance(layer, x.attachment, x.exhaustion); got != x.want {
			t.Errorf("%v to %v: %v, want %v", x.attachment, x.exhaustion, got, x.want)
		}
	}
	layer.Premium = treaty.Some(1)
	if c.Reliance(layer, 0.1, 0.05) != Quoted || (Curve{}).Reliance(treaty.Treaty{}, 0.1, 0.05) != Assumed {
		t.Error("marks of a quoted and an assumed price")
	}
}
