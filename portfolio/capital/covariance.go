package capital

import "cedewright/portfolio/sample"

// Covariance is a standard in the style of the United States' risk-based capital for property and casualty insurers: charges given as numbers under one
// square root, beside a catastrophe charge that is modelled, net of the programme.
//
//	K = multiple · (R0 + √(R1² + … + R5² + Rcat²) + operational · (that sum))
type Covariance struct {
	Uncorrelated     float64      // R0, money, ≥ 0: outside the root
	Charges          [5]float64   // R1 to R5, money, ≥ 0
	Perils           []string     // perils of the book with a catastrophe charge, each alone
	Level            sample.Level // of the yearly loss of a peril, such as 1 in 100
	ContingentCredit float64      // fraction of the modelled recoverables of each peril, added to its net loss, 0–1
	Operational      float64      // fraction added to the whole, ≥ 0
	Multiple         float64      // by which the whole counts, > 0: 0.5 for a control level of one half
}

// PerilLoss is the yearly loss of one peril at the level of the standard, in money.
type PerilLoss struct {
	Net         float64 // after the programme
	Recoverable float64 // gross less net
}
