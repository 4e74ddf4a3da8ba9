package capital

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// byClasses sums the variance as the text has it, over classes of equal probability.
func byClasses(losses, probabilities []float64) (between, within float64) {
	total := map[float64]float64{}
	for i, x := range losses {
		p := probabilities[i]
		total[p] += x
		within += 1.5 * p * (1 - p) / (2.5 - p) * x * x
	}
	for p, x := range total {
		for q, y := range total {
			if p > 0 && q > 0 {
				between += p * (1 - p) * q * (1 - q) / (1.25*(p+q) - p*q) * x * y
			}
		}
	}
	return between, within
}

func TestDefaultByClassesAndByPairs(t *testing.T) {
	f := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		probabilities := rapid.SliceOfN(rapid.OneOf(rapid.SampledFrom(f.Steps), rapid.Float64Range(1e-9, 1)), 1, 12).Draw(t, "probabilities")
		losses := rapid.SliceOfN(rapid.OneOf(rapid.Just(0.0), rapid.Float64Range(1e-3, 1e9)), len(probabilities), len(probabilities)).Draw(t, "losses")
		between, within := byClasses(losses, probabilities)
		r := f.DefaultRequirement(losses, probabilities)
		// A sum of at most 144 terms of one sign, in another order: 1e-12 relative is ample.
		if math.Abs(r.Between-between) > 1e-12*between || math.Abs(r.Within-within) > 1e-12*within {
			t.Fatalf("by pairs %v and %v, by classes %v and %v", r.Between, r.Within, between, within)
		}
		if r.Requirement < 0 || r.Requirement > r.Exposure*(1+1e-12) || math.IsNaN(r.Requirement) {
			t.Fatalf("requirement %v of %v", r.Requirement, r.Exposure)
		}
	})
}

// TestDefaultOfOne holds V_inter and V_intra together against the variance of one exposure, LGD²·PD·(1−PD).
func TestDefaultOfOne(t *testing.T) {
	f := publishedFactors(t)
	for _, p := range []float64{0, 1e-300, 2e-5, 0.01, 0.3, 0.5, 0.999, 1} {
		r := f.DefaultRequirement([]float64{7}, []float64{p})
		if want := 7 * math.Sqrt(p*(1-p)); math.Abs(r.Deviation-want) > 1e-14*want { // a handful of roundings
			t.Errorf("probability %v: deviation %v, want %v", p, r.Deviation, want)
		}
	}
	for _, none := range [][]float64{nil, {0, 0}} {
		if r := f.DefaultRequirement(none, []float64{0.01, 0.02}); r != (DefaultRisk{}) {
			t.Errorf("no exposure: %+v", r)
		}
	}
	// One that never fails and one that is sure to fail have no variance; they add to the exposure, and so widen the limits.
	alone := f.DefaultRequirement([]float64{100}, []float64{0.012})
	beside := f.DefaultRequirement([]float64{100, 100, 100}, []float64{0.012, 0, 1})
	if alone.Deviation != beside.Deviation || beside.Exposure != 300 || alone.Requirement != 5*alone.Deviation || beside.Requirement != 3*beside.Deviation {
		t.Errorf("alone %+v, beside %+v", alone, beside)
	}
}

// TestDefaultLimits puts each limit on, and just below, the deviation of an exposure of 1, so that there is no rounding.
func TestDefaultLimits(t *testing.T) {
	f := publishedFactors(t)
	losses, probabilities := []float64{1}, []float64{0.01}
	d := f.DefaultRequirement(losses, probabilities).Deviation
	below := math.Nextafter(d, 0)
	for _, c := range []struct{ low, high, want float64 }{{d, 1, 3 * d}, {below, 1, 5 * d}, {0, d, 5 * d}, {0, below, 1}} {
		f.Low, f.High = c.low, c.high
		if got := f.DefaultRequirement(losses, probabilities).Requirement; got != c.want {
			t.Errorf("limits %v and %v: %v, want %v", c.low, c.high, got, c.want)
		}
	}
}

func TestSplittingAnExposureLowersTheRequirement(t *testing.T) {
	f := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		p := rapid.SampledFrom(f.Steps).Draw(t, "probability")
		n := rapid.IntRange(2, 10).Draw(t, "names")
		whole := f.DefaultRequirement([]float64{100}, []float64{p})
		split := f.DefaultRequirement(slices.Repeat([]float64{100 / float64(n)}, n), slices.Repeat([]float64{p}, n))
		if !(split.Requirement < whole.Requirement) {
			t.Fatalf("%d names ask %v, one asks %v", n, split.Requirement, whole.Requirement)
		}
	})
}
