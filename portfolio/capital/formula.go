package capital

// Factors are what the text of the standard formula fixes for non-life business: Delegated Regulation (EU) 2015/35, its factors and matrices. They
// come from a preset file, whose rows cite articles, so that a change of law is a change of data.
type Factors struct {
	Name    string // "eu-2015-35"
	Version string // date and state of the text

	Segments           []Segment
	SegmentCorrelation [][]float64 // between segments, symmetric, positive semidefinite, 1 on the diagonal
	PremiumReserve     float64     // correlation of premium and reserve risk inside a segment: 0.5
	Multiple           float64     // of the standard deviation: 3
	Diversification    float64     // weight of geographical diversification in a volume: 0.25, so that V = (Vp+Vr)·(0.75+0.25·DIV)

	Patterns       []Pattern   // of the natural perils: which events of a scenario follow one another
	ManMade        []string    // kinds of man-made scenarios: fire, motor, marine, aviation, liability, credit
	PremiumCat     float64     // correlation of premium and reserve risk with catastrophe risk: 0.25
	PremiumLapse   float64     // with lapse risk: 0
	CatLapse       float64     // of catastrophe risk with lapse risk: 0
	Modules        []string    // of the basic requirement: market, default, life, health, non-life
	ModuleMatrix   [][]float64 // between them, in that order
	Steps          []float64   // yearly probability of default by credit quality step, from step 0
	Solvency       []SolvencyStep
	LossGiven      float64 // part of recoverables (and of half the mitigating effect) lost on default: 0.5
	LossGivenTied  float64 // the same where 60 % or more of the reinsurer's assets are tied as collateral: 0.9
	Mitigating     float64 // weight of the risk-mitigating effect in the loss given default: 0.5
	CollateralUsed float64 // fraction of the collateral's value that counts, 0–1
	Low, High      float64 // limits of the deviation as a fraction of all losses given default: 7 % and 20 %
	LowMultiple    float64 // 3 up to Low
	HighMultiple   float64 // 5 up to High; beyond it the whole loss given default
	TypesCross     float64 // 1.5 in √(T1² + 1.5·T1·T2 + T2²)
}

// Segment is a segment of non-life business.
type Segment struct {
	Number          int // 1–12
	Name            string
	Premium         float64 // standard deviation of premium risk, gross of reinsurance, fraction of volume
	Reserve         float64 // standard deviation of reserve risk
	NonProportional float64 // factor on Premium where a recognised excess treaty answers: 0.8 for segments 1, 4 and 5, else 1
}

// Pattern says how the specified loss of a natural peril falls in one year: the events of each of the alternatives as fractions of the specified
// loss. The dearest alternative counts.
type Pattern struct {
	Kind         string // windstorm, earthquake, flood, hail, subsidence
	Alternatives [][]float64
}

// SolvencyStep gives the probability of default of an unrated insurer that meets its requirement by that ratio; linear between.
type SolvencyStep struct{ Ratio, Probability float64 }

// Formula is the standard formula for one company: the factors, and what the company knows of itself. Money is in the book's currency.
type Formula struct {
	Factors   Factors
	Classes   []FormulaClass // in the order of the book's classes
	Scenarios []Scenario
	// Correlations between scenarios of one kind; every pair of one kind must be given.
	ScenarioCorrelations []ScenarioCorrelation
	NonProportional      NonProportional

	Lapse                                         float64   // capital for lapse risk, money
	OtherCatastrophe                              float64   // capital for other non-life catastrophe risk, and
	PropertyReinsurance                           float64   // for non-proportional property reinsurance written, money
	Market, Life, Health, Intangible, Operational float64   // capital of the other modules, money
	Adjustment                                    float64   // for the loss-absorbing capacity of provisions and deferred taxes, money, ≤ 0
	TypeTwo                                       float64   // capital for type 2 default risk, money
	Recoverables                                  []float64 // existing recoverables by reinsurer, in the order of the register, money; nil = none
	Default                                       []float64 // yearly probability of default by reinsurer, 0–1: see Factors.Steps and UnratedProbability
	Tied                                          []bool    // by reinsurer: 60 % or more of its assets are tied as collateral; nil = none
}

// NonProportional says when the factor for excess cover applies. Art. 117(3), as read in the text of 14/11/2024, applies it to its segments without a
// condition: Always. The other ways are more careful.
type NonProportional uint8

// The ways.
const (
	ByTreaty NonProportional = iota // where an event- or risk-excess treaty of the programme answers a class of the segment
	Always
	Never
)

// FormulaClass is what the formula knows of a class of the book.
type FormulaClass struct {
	Segment         int     // index into Factors.Segments
	Reserves        float64 // net best estimate of claims outstanding, money, ≥ 0
	LastPremium     float64 // net earned premium of the last twelve months, money; 0 when the company has bound itself not to exceed next year's
	FuturePremium   float64 // present value of premiums beyond the year, existing and future contracts, net, money, ≥ 0
	Diversification float64 // DIV of its segment's volume, above 0, at most 1 = one region; the same for all classes of a segment
}

// Scenario is a gross loss that the company has worked out for one peril, region or kind.
type Scenario struct {
	Name    string
	Kind    string    // of Factors.Patterns or Factors.ManMade
	Peril   string    // name of the book's peril, as treaties know it
	OneRisk bool      // the loss hits a single risk, so that risk covers answer it
	Losses  []float64 // gross specified loss by class, money, ≥ 0
}

// ScenarioCorrelation is that of two scenarios of one kind, by index.
type ScenarioCorrelation struct {
	A, B        int
	Correlation float64
}

// FormulaPosition is what a programme changes in the formula. Lists left nil, but for Premium and Scenario, say nothing: no cover, nothing
// recoverable.
type FormulaPosition struct {
	Premium     []float64   // next year's premium by class, net of the programme's premiums, money
	ExcessCover []bool      // by class: an event- or risk-excess treaty answers it
	Scenario    [][]float64 // net loss, reinstatement premiums included, by scenario and alternative of its pattern (one for man-made), money
	Recoverable []float64   // expected recoveries of the programme by reinsurer, in the order of the register, money
	Collateral  []float64   // held from each reinsurer, money
}

// FormulaFigures is what the formula asks, module by module, in money.
type FormulaFigures struct {
	PremiumReserve float64
	Volume, Sigma  float64   // of premium and reserve risk: money, and fraction of volume
	Kinds          []float64 // by kind of scenario, in the order of Factors.Patterns and then Factors.ManMade; overwritten when scratch memory is reused
	Natural        float64
	ManMade        float64
	Catastrophe    float64
	NonLife        float64
	TypeOne        float64
	Default        float64
	Basic          float64 // basic requirement, intangible assets included
	Total          float64 // with operational risk and adjustments
}

// FormulaSlopes is by how much the whole requirement rises per unit of each input: its gradient, the scenarios' on the alternative that counts. See
// Formula.Slopes for the points where it has a kink.
type FormulaSlopes struct {
	Premium     []float64   // by class
	Reserves    []float64   // by class
	Scenario    [][]float64 // by scenario and alternative
	Recoverable []float64   // by reinsurer
}
