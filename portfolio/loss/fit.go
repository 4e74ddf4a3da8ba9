package loss

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mathext"
)

// ParetoFit is a generalised Pareto law fitted to excesses over a threshold by maximum likelihood.
type ParetoFit struct {
	Count         int
	Xi, XiError   float64 // shape and its standard error, from the observed information
	Beta          float64 // scale, money
	BetaError     float64
	LogLikelihood float64
}

// FitGeneralisedPareto fits by maximum likelihood through the profile likelihood in θ = ξ/β (Grimshaw 1993), whose derivative's root is
// found by bisection. It needs at least 5 excesses above 0, not all equal, and refuses data whose likelihood has no maximum with
// ξ above −0.5, where standard errors exist (Smith 1985).
func FitGeneralisedPareto(excesses []float64) (ParetoFit, error) {
	n := float64(len(excesses))
	if len(excesses) < 5 {
		return ParetoFit{}, fmt.Errorf("loss: fit of a generalised pareto law: %d excesses, at least 5 are needed", len(excesses))
	}
	mean, largest, smallest := 0.0, 0.0, math.Inf(1)
	for _, y := range excesses {
		if !(y > 0) || math.IsInf(y, 0) {
			return ParetoFit{}, fmt.Errorf("loss: fit of a generalised pareto law: excess %v, must be above 0", y)
		}
		mean += y / n
		largest, smallest = max(largest, y), min(smallest, y)
	}
	if largest == smallest {
		return ParetoFit{}, errors.New("loss: fit of a generalised pareto law: all excesses are equal")
	}
	shape := func(theta float64) float64 {
		sum := 0.0
		for _, y := range excesses {
			sum += math.Log1p(theta * y)
		}
		return sum / n
	}
	// slope is the derivative of the profile likelihood by θ, over n, times θ (which keeps its sign for θ > 0 and turns it for θ < 0).
	slope := func(theta float64) float64 {
		xi, rise := shape(theta), 0.0
		for _, y := range excesses {
			rise += theta * y / (1 + theta*y)
		}
		rise /= n
		return 1 - rise/xi - rise
	}
	profile := func(theta float64) float64 { xi := shape(theta); return -math.Log(xi/theta) - xi - 1 }
	theta, err := maximum(profile, slope, mean, largest)
	if err != nil {
		return ParetoFit{}, err
	}
	fit := ParetoFit{Count: len(excesses), Xi: shape(theta)}
	fit.Beta = fit.Xi / theta
	if fit.Xi <= -0.5 {
		return ParetoFit{}, fmt.Errorf("loss: fit of a generalised pareto law: ξ is %.3g: the data end too abruptly for a standard error", fit.Xi)
	}
	fit.LogLikelihood = n * profile(theta)
	fit.XiError, fit.BetaError = paretoErrors(excesses, fit.Xi, fit.Beta)
	return fit, nil
}

// maximum looks for the highest maximum of the profile on a grid either side of 0, then bisects the derivative to the last digits.
func maximum(profile, slope func(float64) float64, mean, largest float64) (float64, error) {
	var grid []float64
	for i := range 200 {
		grid = append(grid, -(1-math.Pow(10, -6+6*float64(i)/200))/largest)
	}
	for i := range 400 {
		grid = append(grid, math.Pow(10, -6+9*float64(i)/400)/mean)
	}
	best := 0
	for i := range grid {
		if profile(grid[i]) > profile(grid[best]) {
			best = i
		}
	}
	if best == 0 || best == len(grid)-1 {
		return 0, errors.New("loss: fit of a generalised pareto law: the likelihood has no maximum")
	}
	low, high := grid[best-1], grid[best+1]
	rising := func(theta float64) bool { return slope(theta)*theta > 0 }
	if low < 0 && high > 0 { // the exponential law is all but the best: leave 0 itself out
		low = math.Copysign(min(1e-12/mean, -low), 1)
		if !rising(low) {
			low, high = grid[best-1], -1e-12/mean
		}
	}
	for range 200 {
		middle := low + (high-low)/2
		if middle == low || middle == high {
			break
		}
		if rising(middle) {
			low = middle
		} else {
			high = middle
		}
	}
	return low, nil
}

// paretoErrors inverts the observed information at the maximum.
func paretoErrors(excesses []float64, xi, beta float64) (xiError, betaError float64) {
	// Second derivatives of −log density, log β + (1 + 1/ξ)·log(1 + ξz), z = y/β.
	var xx, xb, bb float64
	for _, y := range excesses {
		z := y / beta
		u := 1 + xi*z
		l := math.Log(u)
		xx += 2*l/(xi*xi*xi) - 2*z/(xi*xi*u) - (1+1/xi)*z*z/(u*u)
		xb += z/(beta*xi*u) - (1+1/xi)*z/(beta*u) + (1+1/xi)*xi*z*z/(beta*u*u)
		bb += -1/(beta*beta) + (1+xi)*z*(2+xi*z)/(beta*beta*u*u)
	}
	determinant := xx*bb - xb*xb
	return math.Sqrt(bb / determinant), math.Sqrt(xx / determinant)
}

// CountFit is a frequency law fitted to yearly counts.
type CountFit struct {
	Frequency     Frequency
	Years         int
	Mean          float64
	Variance      float64 // divisor N − 1
	LogLikelihood float64
}

// FitPoisson fits by maximum likelihood: the rate is the mean count. It needs at least one year.
func FitPoisson(counts []int) (CountFit, error) {
	fit, err := summarise(counts)
	if err != nil {
		return CountFit{}, err
	}
	fit.Frequency = Poisson{fit.Mean}
	for _, c := range counts {
		if fit.Mean > 0 {
			logFactorial, _ := math.Lgamma(float64(c) + 1)
			fit.LogLikelihood += float64(c)*math.Log(fit.Mean) - fit.Mean - logFactorial
		}
	}
	return fit, nil
}

// ErrNotOverDispersed says that the counts vary no more than a Poisson law has them vary, so that the negative binomial likelihood has
// its maximum at the Poisson limit.
var ErrNotOverDispersed = errors.New("the yearly counts are not over-dispersed: the Poisson law is the limit")

// FitNegativeBinomial fits by maximum likelihood: the mean is the mean count, the size the root of the profile likelihood's derivative.
// It gives ErrNotOverDispersed when there is none.
func FitNegativeBinomial(counts []int) (CountFit, error) {
	fit, err := summarise(counts)
	if err != nil {
		return CountFit{}, err
	}
	n := float64(len(counts))
	if fit.Variance*(n-1)/n <= fit.Mean {
		return CountFit{}, ErrNotOverDispersed
	}
	slope := func(size float64) float64 {
		sum := n * math.Log(size/(size+fit.Mean))
		for _, c := range counts {
			sum += mathext.Digamma(float64(c)+size) - mathext.Digamma(size)
		}
		return sum
	}
	low, high := math.Log(1e-6), math.Log(1e9)
	for range 200 {
		if middle := (low + high) / 2; slope(math.Exp(middle)) > 0 {
			low = middle
		} else {
			high = middle
		}
	}
	size := math.Exp(low)
	fit.Frequency = NegativeBinomial{fit.Mean, size}
	p := size / (size + fit.Mean)
	logGammaSize, _ := math.Lgamma(size)
	for _, c := range counts {
		a, _ := math.Lgamma(float64(c) + size)
		b, _ := math.Lgamma(float64(c) + 1)
		fit.LogLikelihood += a - logGammaSize - b + size*math.Log(p) + float64(c)*math.Log1p(-p)
	}
	return fit, nil
}

// FitFrequency fits a negative binomial law, or a Poisson law where the counts are not over-dispersed.
func FitFrequency(counts []int) (CountFit, error) {
	fit, err := FitNegativeBinomial(counts)
	if errors.Is(err, ErrNotOverDispersed) {
		return FitPoisson(counts)
	}
	return fit, err
}

func summarise(counts []int) (CountFit, error) {
	if len(counts) == 0 {
		return CountFit{}, errors.New("loss: fit of a frequency: no year")
	}
	fit := CountFit{Years: len(counts)}
	for _, c := range counts {
		if c < 0 {
			return CountFit{}, fmt.Errorf("loss: fit of a frequency: count %d", c)
		}
		fit.Mean += float64(c) / float64(len(counts))
	}
	for _, c := range counts {
		fit.Variance += (float64(c) - fit.Mean) * (float64(c) - fit.Mean) / float64(max(len(counts)-1, 1))
	}
	return fit, nil
}
