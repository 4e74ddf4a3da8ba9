package capital

import "math"

// DefaultRisk is the type 1 default risk of some counterparties, in money and money squared.
type DefaultRisk struct {
	Between     float64 // V_inter, the variance that counterparties share, money squared
	Within      float64 // V_intra, their own, money squared
	Deviation   float64 // √(Between + Within)
	Exposure    float64 // sum of the losses given default
	Requirement float64
}

// DefaultRequirement gives the requirement for type 1 default risk (Art. 200 and 201, read): LowMultiple times the standard deviation of losses while
// that is at most Low of all losses given default, HighMultiple times it up to High, and all losses given default beyond. It jumps at Low. Losses
// given default are money of at least 0, probabilities of default from 0 to 1, one of each for every counterparty; a counterparty with 0 or 1 has no
// variance and adds to the exposure alone. Without exposure everything is 0.
//
// The text sums V_inter over pairs of classes of equal probability, with the losses of each class together; the sum over all pairs of counterparties
// is the same, for any probabilities.
func (f *Factors) DefaultRequirement(losses, probabilities []float64) DefaultRisk {
	var r DefaultRisk
	for i, x := range losses {
		if x == 0 {
			continue
		}
		p := probabilities[i]
		shared := 0.0
		for j, y := range losses[:i] {
			if y != 0 {
				shared += float64(sharedVariance(p, probabilities[j]) * y)
			}
		}
		r.Between += float64(x * (float64(2*shared) + float64(sharedVariance(p, p)*x)))
		r.Within += float64(ownVariance(p) * float64(x*x))
		r.Exposure += x
	}
	r.Deviation = math.Sqrt(r.Between + r.Within)
	r.Requirement = r.Exposure
	if multiple := f.defaultMultiple(r); multiple > 0 {
		r.Requirement = multiple * r.Deviation
	}
	return r
}

// defaultMultiple gives the multiple of the deviation that is asked; 0 where it is the whole exposure.
func (f *Factors) defaultMultiple(r DefaultRisk) float64 {
	switch {
	case r.Deviation <= f.Low*r.Exposure:
		return f.LowMultiple
	case r.Deviation <= f.High*r.Exposure:
		return f.HighMultiple
	}
	return 0
}

// defaultSlopes adds to slopes by how much the requirement r of these losses rises per unit of each loss, times weight. Where the deviation is 0 its
// slope counts as 0.
func (f *Factors) defaultSlopes(r DefaultRisk, losses, probabilities []float64, weight float64, slopes []float64) {
	multiple := f.defaultMultiple(r)
	for i, x := range losses {
		switch {
		case multiple == 0:
			slopes[i] += weight
		case r.Deviation > 0:
			p := probabilities[i]
			rise := float64(ownVariance(p) * x)
			for j, y := range losses {
				rise += float64(sharedVariance(p, probabilities[j]) * y)
			}
			slopes[i] += weight * multiple * rise / r.Deviation
		}
	}
}

// sharedVariance is the factor of V_inter on the product of two losses given default; p and q are their probabilities.
func sharedVariance(p, q float64) float64 {
	if p <= 0 || q <= 0 {
		return 0
	}
	return p * (1 - p) * (q * (1 - q) / (1.25*(p+q) - p*q)) // so grouped, small probabilities do not underflow
}

// ownVariance is the factor of V_intra on the square of a loss given default. With sharedVariance(p, p) it comes to p·(1−p).
func ownVariance(p float64) float64 { return 1.5 * p * (1 - p) / (2.5 - p) }
