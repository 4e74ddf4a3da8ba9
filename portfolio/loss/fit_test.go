package loss

import (
	"math"
	"os"
	"testing"
)

// danish reads the Danish fire losses (provenance in testdata/PROVENANCE.md).
func danish(t testing.TB) []HistoryLoss {
	t.Helper()
	f, err := os.Open("../../testdata/danish-fire-by-line.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	losses, err := ReadHistory(f, "danish-fire-by-line.csv", HistoryFormat{Date: "loss_date", Parts: []string{"buildings", "contents", "profits"}, Total: "total", Scale: 1})
	if err != nil {
		t.Fatal(err)
	}
	if len(losses) != 2167 {
		t.Fatalf("%d losses, want 2167", len(losses))
	}
	return losses
}

// TestFitGeneralisedParetoDanish: values computed with R and recomputed with scipy from the same file; the fit at threshold 10 was published
// by McNeil (1997), ASTIN Bulletin 27(1): 109 exceedances, ξ 0.50 (0.14), β 7.0 (1.1).
func TestFitGeneralisedParetoDanish(t *testing.T) {
	losses := danish(t)
	for _, want := range []struct {
		threshold               float64
		count                   int
		xi, beta, xiErr, betErr float64
		logLikelihood           float64
	}{
		{3, 532, 0.667605405907, 2.18920670152, 0.073086, 0.17491, -1304.0089524},
		{4, 362, 0.720469140498, 2.63162398423, 0.096676, 0.2719, -973.081441584},
		{5, 254, 0.631543031308, 3.80912698229, 0.11164, 0.46386, -754.111536144},
		{10, 109, 0.496985786078, 6.97546825061, 0.13628, 1.1135, -374.892991622},
		{20, 36, 0.684152159593, 9.63513313637, 0.27507, 2.8976, -142.184458057},
	} {
		var excesses []float64
		for _, l := range losses {
			if l.Total > want.threshold {
				excesses = append(excesses, l.Total-want.threshold)
			}
		}
		fit, err := FitGeneralisedPareto(excesses)
		if err != nil {
			t.Fatal(err)
		}
		// 1e-9: both sides solve the same likelihood to the last digits; errors are printed with five.
		if fit.Count != want.count || math.Abs(fit.Xi-want.xi) > 1e-9 || math.Abs(fit.Beta-want.beta) > 1e-8 ||
			math.Abs(fit.LogLikelihood-want.logLikelihood) > 1e-8*math.Abs(want.logLikelihood) ||
			math.Abs(fit.XiError/want.xiErr-1) > 1e-4 || math.Abs(fit.BetaError/want.betErr-1) > 1e-4 {
			t.Errorf("threshold %v: %+v, want %+v", want.threshold, fit, want)
		}
	}
}

// TestFitFrequencyDanish: values computed with R (fitdistrplus) and recomputed with scipy.
func TestFitFrequencyDanish(t *testing.T) {
	losses := danish(t)
	above := func(x float64) []HistoryLoss {
		var some []HistoryLoss
		for _, l := range losses {
			if l.Total > x {
				some = append(some, l)
			}
		}
		return some
	}
	for _, want := range []struct {
		threshold, mean, variance, size, negative, poisson float64
	}{
		{0, 197, 971.4, 55.4658264478, -52.9355064427, -63.9753751945},
		{5, 23.0909090909, 42.4909090909, 33.0819160749, -35.6673168651, -36.5612739772},
		{10, 9.90909090909, 8.29090909091, 0, 0, -26.7514985663},
	} {
		counts := YearlyCounts(above(want.threshold))
		poisson, err := FitPoisson(counts)
		if err != nil || math.Abs(poisson.LogLikelihood-want.poisson) > 1e-8 || math.Abs(poisson.Mean-want.mean) > 1e-9 || math.Abs(poisson.Variance-want.variance) > 1e-9 {
			t.Errorf("above %v: Poisson %+v, %v, want %+v", want.threshold, poisson, err, want)
		}
		fit, err := FitNegativeBinomial(counts)
		if want.size == 0 {
			if err == nil {
				t.Errorf("above %v: a size was found for counts that are not over-dispersed", want.threshold)
			}
			continue
		}
		if err != nil {
			t.Fatal(err)
		}
		size := fit.Frequency.(NegativeBinomial).Size
		// 1e-6 relative: the reference's size comes from a general optimiser.
		if math.Abs(size/want.size-1) > 1e-6 || math.Abs(fit.LogLikelihood-want.negative) > 1e-8 {
			t.Errorf("above %v: size %v, log-likelihood %v, want %+v", want.threshold, size, fit.LogLikelihood, want)
		}
	}
}
