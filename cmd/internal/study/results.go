package study

import (
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/security"
)

// Head is what every result says about where it comes from.
type Head struct {
	Title    string
	Currency string
	Years    int
	Seed     uint64 // seed of the book
	Notes    []string
	Warnings []string // what is extrapolated, thin or doubtful, one sentence each
	Inputs   []Input  // every file read, the study first
}

// Input is a file that was read.
type Input struct {
	Path   string // as given
	SHA256 string // hexadecimal
	Rows   int    // data rows read; 0 for the study itself
}

// ClassLook describes one class before reinsurance; money per year.
type ClassLook struct {
	Name     string
	Premium  float64
	Expenses float64           // fraction of premium
	Loss     optimize.Estimate // mean annual loss
	SD       float64           // standard deviation of the annual loss
	OneIn10  float64           // annual loss exceeded in one year of ten
	OneIn200 float64
	Events   float64 // events with a loss to the class, per year
}

// PerilLook describes one peril before reinsurance, all classes together.
type PerilLook struct {
	Name          string
	Events        float64           // per year; attritional: 0
	Loss          optimize.Estimate // mean annual loss
	LargestOneIn  []float64         // largest event of a year, at each of ReturnPeriods
	AnnualOneIn   []float64         // annual loss, at each of ReturnPeriods
	LargestOfBook float64           // largest event simulated
}

// ReturnPeriods are the return periods in years of every exceedance table and picture.
var ReturnPeriods = []float64{2, 5, 10, 20, 50, 100, 200, 500, 1000}

// Look is the answer of the verb look: the data and the gross position.
type Look struct {
	Head
	Classes []ClassLook
	Total   ClassLook // all classes
	Perils  []PerilLook
	Gross   optimize.Appraisal // no cover
	Fits    []HistoryFit       // severity and frequency fitted to history files
}

// HistoryFit tells what was fitted to a file of historical losses.
type HistoryFit struct {
	Model         string
	File          string
	Losses        int
	Years         int     // calendar years of history
	Threshold     float64 // money
	Exceedances   int
	Xi, XiError   float64 // shape and its standard error
	Beta          float64 // scale, money
	BetaError     float64
	Frequency     string // "negative binomial, mean 197, size 55.5"
	LargestLoss   float64
	Extrapolation string // how far the model goes beyond the data, one sentence
}

// CurveFit is one market curve with what speaks for it.
type CurveFit struct {
	Curve      market.Curve
	Chosen     *market.Fit   // nil when the curve was set by hand
	Candidates []*market.Fit // all families tried, for comparison

	Recommended *market.Fit // what the quotes speak for; nil when the curve was set by hand
	Reason      string      // why

	// Of the answers of fit and search alone:
	Consistency *market.Consistency // whether one curve can price all quotes; nil for a curve by hand or with too many quotes
	BandAt      []float64           // yearly probabilities
	Band        []market.Interval   // what the quotes alone allow of g there
	Opened      float64             // by how much, relatively, the quotes had to be opened for any curve to exist
	Resampled   []market.Interval   // what nine in ten resampled curves ask there; nil with fewer than three quotes
}

// Fitted is the answer of the verb fit.
type Fitted struct {
	Head
	Curves []CurveFit
}

// Appraised is the answer of the verb appraise: no cover first, then the programmes in the order of the study.
type Appraised struct {
	Head
	CostOfCapital float64            // flat rate per year; 0 when the owners price the risk they keep by a distortion
	Owners        string             // their distortion in words; "" = the flat rate
	OwnFunds      float64            // money; 0 = not given
	Standards     []capital.Standard // in the order of the capital figures
	Drive         []string           // names of the standards of which the one that asks the most drives
	Rest          *capital.Rest      // of the company; nil = none
	Security      *security.Register // reinsurers behind the treaties; nil = none
	Gross         GrossFigures
	Programmes    []optimize.Appraisal        // first is "no cover"
	Prices        [][]optimize.ExplainedPrice // of each programme, in the same order
	Allocations   [][]optimize.Allocation     // likewise, by standard
	Differences   []Difference                // of every later programme to the first named "expiring" or, without one, to no cover
}

// GrossFigures is the position without any treaty; money per year.
type GrossFigures struct {
	Premium  float64
	Expenses float64
	Loss     optimize.Estimate
	Capital  []optimize.CapitalFigure // Net = Gross here
	Result   optimize.NetResult
}

// Difference compares the total cost of two programmes on common years.
type Difference struct {
	Programme string
	Against   string
	TotalCost optimize.Estimate // money per year, negative = cheaper; the error is the simulation's
	Prices    float64           // standard error of the difference that comes from the quotes
}

// Searched is the answer of the verb search.
type Searched struct {
	Appraised // no cover, the start programme, the study's other programmes, and last the best found, named "best found"
	Result    optimize.Result
	Bound     optimize.Bound // no total cost can come below it, on the loaded years
	Start     optimize.Appraisal
	NoCover   optimize.Appraisal
	Curves    []CurveFit
	Curve     ExceedanceCurves // gross, with the start programme, with the best
	Scales    [][][]float64    // of the start programme and the best: by treaty, the loss of its unit exceeded once in each of ReturnPeriods
	Keep      []optimize.Keep  // constraints
	Space     string           // the decision space in words, with its size
}

// ExceedanceCurves gives the annual loss to the cedant at return periods: gross, and net of programmes with premiums left out.
type ExceedanceCurves struct {
	ReturnPeriods []float64
	Gross         []float64
	Programmes    []string
	Net           [][]float64 // by programme
}
