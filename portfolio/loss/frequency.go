package loss

import (
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/stat/distuv"
)

// Frequency is the law of the number of events in a year.
type Frequency interface {
	Mean() float64     // events per year
	Variance() float64 // of the number of events in a year
	Draw(r *rand.Rand) int
	String() string // family and parameters
}

// Poisson is the law of independent events at a constant rate; Rate ≥ 0 is events per year.
type Poisson struct{ Rate float64 }

// NewPoisson refuses a rate that is not a number of at least 0.
func NewPoisson(mean float64) (Poisson, error) {
	if !(mean >= 0) || math.IsInf(mean, 0) {
		return Poisson{}, fmt.Errorf("loss: poisson: mean is %v, must be at least 0", mean)
	}
	return Poisson{mean}, nil
}

// Mean gives events per year.
func (f Poisson) Mean() float64 { return f.Rate }

// Variance equals the mean.
func (f Poisson) Variance() float64 { return f.Rate }

// Draw gives the number of events of one year.
func (f Poisson) Draw(r *rand.Rand) int { return drawPoisson(r, f.Rate) }

// String names family and mean.
func (f Poisson) String() string { return fmt.Sprintf("Poisson, mean %.4g", f.Rate) }

func drawPoisson(r *rand.Rand, rate float64) int {
	if rate == 0 {
		return 0
	}
	// From a rate of 10 on, gonum (v0.17) draws from the law given that there is an event: it rejects 0. Years without one are drawn first; beyond a
	// rate of 37 they are rarer than the smallest random number.
	if rate >= 10 && rate < 37 && r.Float64() < math.Exp(-rate) {
		return 0
	}
	return int(distuv.Poisson{Lambda: rate, Src: r}.Rand())
}

// NegativeBinomial is a Poisson law whose rate varies from year to year by a gamma law: events cluster. Its variance is
// mean + mean²/Size.
type NegativeBinomial struct {
	Expected float64 // events per year, ≥ 0
	Size     float64 // shape of the gamma law, > 0
}

// NewNegativeBinomial takes the mean and the variance as a multiple of the mean, which must be above 1.
func NewNegativeBinomial(mean, varianceToMean float64) (NegativeBinomial, error) {
	if !(mean > 0) || math.IsInf(mean, 0) {
		return NegativeBinomial{}, fmt.Errorf("loss: negative binomial: mean is %v, must be above 0", mean)
	}
	if !(varianceToMean > 1) || math.IsInf(varianceToMean, 0) {
		return NegativeBinomial{}, fmt.Errorf("loss: negative binomial: variance to mean is %v, must be above 1 (1 is poisson)", varianceToMean)
	}
	return NegativeBinomial{mean, mean / (varianceToMean - 1)}, nil
}

// Mean gives events per year.
func (f NegativeBinomial) Mean() float64 { return f.Expected }

// Variance of the number of events in a year.
func (f NegativeBinomial) Variance() float64 { return f.Expected + f.Expected*f.Expected/f.Size }

// Draw gives the number of events of one year.
func (f NegativeBinomial) Draw(r *rand.Rand) int {
	return drawPoisson(r, distuv.Gamma{Alpha: f.Size, Beta: f.Size / f.Expected, Src: r}.Rand())
}

// String names family and parameters.
func (f NegativeBinomial) String() string {
	return fmt.Sprintf("negative binomial, mean %.4g, size %.4g", f.Expected, f.Size)
}

// Binomial is the law of Trials independent chances of Probability each.
type Binomial struct {
	Trials      int
	Probability float64
}

// NewBinomial refuses fewer than one trial and a probability outside 0–1.
func NewBinomial(trials int, probability float64) (Binomial, error) {
	if trials < 1 {
		return Binomial{}, fmt.Errorf("loss: binomial: %d trials, must be at least 1", trials)
	}
	if !(probability >= 0 && probability <= 1) {
		return Binomial{}, fmt.Errorf("loss: binomial: probability is %v, must be from 0 to 1", probability)
	}
	return Binomial{trials, probability}, nil
}

// Mean gives events per year.
func (f Binomial) Mean() float64 { return float64(f.Trials) * f.Probability }

// Variance of the number of events in a year.
func (f Binomial) Variance() float64 { return f.Mean() * (1 - f.Probability) }

// Draw gives the number of events of one year.
func (f Binomial) Draw(r *rand.Rand) int {
	return int(distuv.Binomial{N: float64(f.Trials), P: f.Probability, Src: r}.Rand())
}

// String names family and parameters.
func (f Binomial) String() string {
	return fmt.Sprintf("binomial, %d trials, probability %.4g", f.Trials, f.Probability)
}
