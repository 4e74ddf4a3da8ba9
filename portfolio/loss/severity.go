package loss

import (
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mathext"
	"gonum.org/v1/gonum/stat/distuv"
)

// Severity is the law of the loss of one event, in money.
type Severity interface {
	Mean() float64                          // +Inf when it does not exist
	Survival(x float64) float64             // P(loss > x)
	LimitedExpectedValue(d float64) float64 // E[min(loss, d)], d ≥ 0
	Draw(r *rand.Rand) float64
	String() string // family and parameters
}

// positive refuses what is not a finite number above 0.
func positive(family, name string, x float64) error {
	if !(x > 0) || math.IsInf(x, 0) {
		return fmt.Errorf("loss: %s: %s is %v, must be above 0", family, name, x)
	}
	return nil
}

// firstError gives the first error of a list.
func firstError(list ...error) error {
	for _, err := range list {
		if err != nil {
			return err
		}
	}
	return nil
}

// LogNormal is the law of exp(Mu + Sigma·Z); Mu is the mean of the logarithm of money, Sigma > 0.
type LogNormal struct{ Mu, Sigma float64 }

// NewLogNormal refuses parameters that are not finite and a sigma that is not above 0.
func NewLogNormal(mu, sigma float64) (LogNormal, error) {
	if math.IsNaN(mu) || math.IsInf(mu, 0) {
		return LogNormal{}, fmt.Errorf("loss: lognormal: mu is %v, must be a number", mu)
	}
	return LogNormal{mu, sigma}, positive("lognormal", "sigma", sigma)
}

// NewLogNormalOf takes mean and coefficient of variation, both above 0.
func NewLogNormalOf(mean, cv float64) (LogNormal, error) {
	if err := firstError(positive("lognormal", "mean", mean), positive("lognormal", "cv", cv)); err != nil {
		return LogNormal{}, err
	}
	variance := math.Log1p(cv * cv)
	return LogNormal{math.Log(mean) - variance/2, math.Sqrt(variance)}, nil
}

// Mean gives exp(Mu + Sigma²/2).
func (s LogNormal) Mean() float64 { return math.Exp(s.Mu + s.Sigma*s.Sigma/2) }

// Survival gives P(loss > x), accurate in the tail.
func (s LogNormal) Survival(x float64) float64 {
	if x <= 0 {
		return 1
	}
	return normalSurvival((math.Log(x) - s.Mu) / s.Sigma)
}

func normalSurvival(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }

// LimitedExpectedValue gives E[min(loss, d)].
func (s LogNormal) LimitedExpectedValue(d float64) float64 {
	if d <= 0 {
		return 0
	}
	z := (math.Log(d) - s.Mu) / s.Sigma
	return s.Mean()*normalSurvival(s.Sigma-z) + d*normalSurvival(z)
}

// Draw gives one loss.
func (s LogNormal) Draw(r *rand.Rand) float64 { return math.Exp(s.Mu + s.Sigma*r.NormFloat64()) }

// String names family and parameters.
func (s LogNormal) String() string {
	return fmt.Sprintf("lognormal, mu %.5g, sigma %.4g", s.Mu, s.Sigma)
}

// Gamma has density ∝ x^(Shape−1)·exp(−x/Scale); Scale is money.
type Gamma struct{ Shape, Scale float64 }

// NewGamma refuses parameters that are not above 0.
func NewGamma(shape, scale float64) (Gamma, error) {
	return Gamma{shape, scale}, firstError(positive("gamma", "shape", shape), positive("gamma", "scale", scale))
}

// NewGammaOf takes mean and coefficient of variation, both above 0.
func NewGammaOf(mean, cv float64) (Gamma, error) {
	if err := firstError(positive("gamma", "mean", mean), positive("gamma", "cv", cv)); err != nil {
		return Gamma{}, err
	}
	return Gamma{1 / (cv * cv), mean * cv * cv}, nil
}

// Mean gives Shape·Scale.
func (s Gamma) Mean() float64 { return s.Shape * s.Scale }

// Survival gives P(loss > x).
func (s Gamma) Survival(x float64) float64 {
	if x <= 0 {
		return 1
	}
	return mathext.GammaIncRegComp(s.Shape, x/s.Scale)
}

// LimitedExpectedValue gives E[min(loss, d)].
func (s Gamma) LimitedExpectedValue(d float64) float64 {
	if d <= 0 {
		return 0
	}
	return s.Mean()*mathext.GammaIncReg(s.Shape+1, d/s.Scale) + d*s.Survival(d)
}

// Draw gives one loss.
func (s Gamma) Draw(r *rand.Rand) float64 {
	return distuv.Gamma{Alpha: s.Shape, Beta: 1 / s.Scale, Src: r}.Rand()
}

// String names family and parameters.
func (s Gamma) String() string { return fmt.Sprintf("gamma, shape %.4g, scale %.5g", s.Shape, s.Scale) }

// Weibull has survival function exp(−(x/Scale)^Shape); Scale is money. Shape 1 is the exponential law.
type Weibull struct{ Shape, Scale float64 }

// NewWeibull refuses parameters that are not above 0.
func NewWeibull(shape, scale float64) (Weibull, error) {
	return Weibull{shape, scale}, firstError(positive("weibull", "shape", shape), positive("weibull", "scale", scale))
}

// NewExponential takes the mean, above 0.
func NewExponential(mean float64) (Weibull, error) {
	return Weibull{1, mean}, positive("exponential", "mean", mean)
}

// Mean gives Scale·Γ(1 + 1/Shape).
func (s Weibull) Mean() float64 { return s.Scale * math.Gamma(1+1/s.Shape) }

// Survival gives P(loss > x).
func (s Weibull) Survival(x float64) float64 {
	if x <= 0 {
		return 1
	}
	return math.Exp(-math.Pow(x/s.Scale, s.Shape))
}

// LimitedExpectedValue gives E[min(loss, d)].
func (s Weibull) LimitedExpectedValue(d float64) float64 {
	if d <= 0 {
		return 0
	}
	return s.Mean()*mathext.GammaIncReg(1+1/s.Shape, math.Pow(d/s.Scale, s.Shape)) + d*s.Survival(d)
}

// Draw gives one loss.
func (s Weibull) Draw(r *rand.Rand) float64 { return s.Scale * math.Pow(r.ExpFloat64(), 1/s.Shape) }

// String names family and parameters.
func (s Weibull) String() string {
	if s.Shape == 1 {
		return fmt.Sprintf("exponential, mean %.5g", s.Scale)
	}
	return fmt.Sprintf("Weibull, shape %.4g, scale %.5g", s.Shape, s.Scale)
}

// GeneralisedPareto is the law of a loss above Threshold: P(loss > x) = (1 + Xi·(x−Threshold)/Beta)^(−1/Xi), cut off at Ceiling (the law
// given that the loss is not above it). Xi may be of any sign; 0 is the exponential law. (Pickands 1975.)
type GeneralisedPareto struct {
	Threshold float64 // money, ≥ 0
	Xi        float64
	Beta      float64 // money, > 0
	Ceiling   float64 // money, above Threshold, +Inf = none
	beyond    float64 // P(loss > Ceiling) without the cut
}

// NewGeneralisedPareto checks the parameters; a ceiling of +Inf is none.
func NewGeneralisedPareto(threshold, xi, beta, ceiling float64) (GeneralisedPareto, error) {
	switch {
	case !(threshold >= 0) || math.IsInf(threshold, 0):
		return GeneralisedPareto{}, fmt.Errorf("loss: generalised pareto: threshold is %v, must be at least 0", threshold)
	case math.IsNaN(xi) || math.IsInf(xi, 0):
		return GeneralisedPareto{}, fmt.Errorf("loss: generalised pareto: xi is %v, must be a number", xi)
	case !(ceiling > threshold):
		return GeneralisedPareto{}, fmt.Errorf("loss: generalised pareto: ceiling %v, must be above the threshold %v", ceiling, threshold)
	}
	if err := positive("generalised pareto", "beta", beta); err != nil {
		return GeneralisedPareto{}, err
	}
	s := GeneralisedPareto{Threshold: threshold, Xi: xi, Beta: beta, Ceiling: ceiling}
	s.beyond = s.uncut(ceiling)
	return s, nil
}

// NewPareto takes the threshold (money, > 0), the tail index alpha (> 0) and a ceiling: P(loss > x) = (threshold/x)^alpha.
func NewPareto(threshold, alpha, ceiling float64) (GeneralisedPareto, error) {
	if err := firstError(positive("pareto", "threshold", threshold), positive("pareto", "alpha", alpha)); err != nil {
		return GeneralisedPareto{}, err
	}
	return NewGeneralisedPareto(threshold, 1/alpha, threshold/alpha, ceiling)
}

// uncut is the survival function without the ceiling.
func (s GeneralisedPareto) uncut(x float64) float64 {
	y := (x - s.Threshold) / s.Beta
	switch {
	case y <= 0:
		return 1
	case math.IsInf(y, 1):
		return 0
	case s.Xi == 0:
		return math.Exp(-y)
	case s.Xi < 0 && y >= -1/s.Xi:
		return 0
	}
	return math.Exp(-math.Log1p(s.Xi*y) / s.Xi)
}

// Survival gives P(loss > x).
func (s GeneralisedPareto) Survival(x float64) float64 {
	if x >= s.Ceiling {
		return 0
	}
	return (s.uncut(x) - s.beyond) / (1 - s.beyond)
}

// Quantile gives the loss that is exceeded with probability u, 0 < u ≤ 1.
func (s GeneralisedPareto) Quantile(u float64) float64 {
	u = s.beyond + u*(1-s.beyond)
	if s.Xi == 0 {
		return s.Threshold - s.Beta*math.Log(u)
	}
	return s.Threshold + s.Beta/s.Xi*math.Expm1(-s.Xi*math.Log(u))
}

// LimitedExpectedValue gives E[min(loss, d)].
func (s GeneralisedPareto) LimitedExpectedValue(d float64) float64 {
	if d <= s.Threshold {
		return max(d, 0)
	}
	d = min(d, s.Ceiling)
	excess := s.Beta * s.integral(d) // of the uncut survival function from threshold to d
	return s.Threshold + (excess-s.beyondTimes(d-s.Threshold))/(1-s.beyond)
}

// beyondTimes is beyond·x, 0 when beyond is 0 and x infinite.
func (s GeneralisedPareto) beyondTimes(x float64) float64 {
	if s.beyond == 0 {
		return 0
	}
	return s.beyond * x
}

// integral gives ∫ of the uncut survival function up to d, in units of Beta.
func (s GeneralisedPareto) integral(d float64) float64 {
	at := s.uncut(d)
	switch {
	case s.Xi == 0:
		return 1 - at
	case s.Xi == 1:
		return math.Log1p((d - s.Threshold) / s.Beta)
	case at == 0 && s.Xi < 1:
		return 1 / (1 - s.Xi)
	case at == 0:
		return math.Inf(1)
	}
	return -math.Expm1((1-s.Xi)*math.Log(at)) / (1 - s.Xi)
}

// Mean gives the expected loss; +Inf when Xi ≥ 1 without a ceiling.
func (s GeneralisedPareto) Mean() float64 { return s.LimitedExpectedValue(s.Ceiling) }

// Draw gives one loss.
func (s GeneralisedPareto) Draw(r *rand.Rand) float64 {
	return min(s.Quantile(1-r.Float64()), s.Ceiling)
}

// String names family and parameters.
func (s GeneralisedPareto) String() string {
	text := fmt.Sprintf("generalised Pareto above %.5g, xi %.4g, beta %.5g", s.Threshold, s.Xi, s.Beta)
	if s.Xi > 0 && s.Beta == s.Threshold*s.Xi {
		text = fmt.Sprintf("Pareto above %.5g, alpha %.4g", s.Threshold, 1/s.Xi)
	}
	if !math.IsInf(s.Ceiling, 1) {
		text += fmt.Sprintf(", ceiling %.5g", s.Ceiling)
	}
	return text
}
