package settings

// Capital is the section of standards and what capital costs.
type Capital struct {
	Cost      *Fraction  `key:"cost"`
	Owners    *Owners    `key:"owners"`
	OwnFunds  *Money     `key:"own_funds"`
	Drive     []string   `key:"drive"`
	Standards []Standard `key:"standards,required"`
	Rest      *Rest      `key:"rest"`
}

// Owners is the owners' own price of the risk that they keep: a family of distortions with its parameter, or the distortion of a curve of the market.
type Owners struct {
	Curve     string  `key:"curve"`
	Family    string  `key:"family"`
	Parameter *Number `key:"parameter"`
}

// Standard is one of: a preset, or a measure with level, basis and ratio, where what is given beside a preset overrides it; a list of criteria with the
// way in which they combine; a formula; a covariance.
type Standard struct {
	Name       string      `key:"name,required"`
	Preset     string      `key:"preset"`
	Measure    string      `key:"measure"`
	Level      *Level      `key:"level"`
	Basis      string      `key:"basis"`
	Ratio      *Fraction   `key:"ratio"`
	Combine    string      `key:"combine"`
	Criteria   []Criterion `key:"criteria"`
	Formula    *Formula    `key:"formula"`
	Covariance *Covariance `key:"covariance"`
}

// Criterion is one risk measure of a standard of several.
type Criterion struct {
	Measure string    `key:"measure,required"`
	Level   Level     `key:"level,required"`
	Basis   string    `key:"basis"`
	Ratio   *Fraction `key:"ratio"`
	Weight  *Fraction `key:"weight"`
}

// Formula is the standard formula for one company: the file of its factors, and what the company knows of itself.
type Formula struct {
	Factors             string         `key:"factors,required"`
	Classes             []FormulaClass `key:"classes,required"`
	Scenarios           []LossScenario `key:"scenarios"`
	Correlations        []Correlation  `key:"correlations"`
	NonProportional     string         `key:"non_proportional"`
	Lapse               Money          `key:"lapse"`
	OtherCatastrophe    Money          `key:"other_catastrophe"`
	PropertyReinsurance Money          `key:"property_reinsurance"`
	Market              Money          `key:"market"`
	Life                Money          `key:"life"`
	Health              Money          `key:"health"`
	Intangible          Money          `key:"intangible"`
	Operational         Money          `key:"operational"`
	Adjustment          Money          `key:"adjustment"`
	TypeTwo             Money          `key:"type_two"`
	Recoverables        []Recoverable  `key:"recoverables"`
}

// FormulaClass says to which segment a class of the book belongs, and what the formula asks of it beside its premium.
type FormulaClass struct {
	Class           string    `key:"class,required"`
	Segment         Count     `key:"segment,required"`
	Reserves        Money     `key:"reserves"`
	LastPremium     Money     `key:"last_premium"`
	FuturePremium   Money     `key:"future_premium"`
	Diversification *Fraction `key:"diversification"`
}

// LossScenario is a gross loss that the company has worked out. Without a peril its kind serves.
type LossScenario struct {
	Name    string         `key:"name,required"`
	Kind    string         `key:"kind,required"`
	Peril   string         `key:"peril"`
	OneRisk bool           `key:"one_risk"`
	Losses  []ScenarioLoss `key:"losses,required"`
}

// ScenarioLoss is the part of a scenario's loss that falls on a class.
type ScenarioLoss struct {
	Class string `key:"class,required"`
	Loss  Money  `key:"loss,required"`
}

// Recoverable is what a reinsurer owes already.
type Recoverable struct {
	Reinsurer string `key:"reinsurer,required"`
	Amount    Money  `key:"amount,required"`
}

// Covariance is charges given as numbers beside a modelled catastrophe charge.
type Covariance struct {
	Charges          Charges   `key:"charges"`
	Perils           []string  `key:"perils,required"`
	Level            *Level    `key:"level"`
	ContingentCredit Fraction  `key:"contingent_credit"`
	Operational      Fraction  `key:"operational"`
	Multiple         *Fraction `key:"multiple"`
}

// Charges are those of a covariance, each 0 where it is left out.
type Charges struct {
	R0 Money `key:"r0"`
	R1 Money `key:"r1"`
	R2 Money `key:"r2"`
	R3 Money `key:"r3"`
	R4 Money `key:"r4"`
	R5 Money `key:"r5"`
}

// Rest is what else the company stands for beside the book: a capital figure with its correlation, or the law of a yearly loss.
type Rest struct {
	Capital         *Money    `key:"capital"`
	Correlation     *Fraction `key:"correlation"`
	Family          string    `key:"family"`
	Mean            *Money    `key:"mean"`
	SD              *Money    `key:"sd"`
	RankCorrelation *Fraction `key:"rank_correlation"`
	Seed            *Seed     `key:"seed"`
}

// Security is the section of the reinsurers behind the treaties. Its panel is that of every treaty and tower that has none of its own.
type Security struct {
	Correlation Fraction    `key:"correlation"`
	Seed        *Seed       `key:"seed"`
	Reinsurers  []Reinsurer `key:"reinsurers,required"`
	Panel       []Line      `key:"panel"`
}

// Reinsurer is a counterparty with its rating: a credit quality step, a probability of default or a solvency ratio.
type Reinsurer struct {
	Name               string    `key:"name,required"`
	Step               *Count    `key:"step"`
	DefaultProbability *Fraction `key:"default_probability"`
	SolvencyRatio      *Fraction `key:"solvency_ratio"`
	LossGivenDefault   *Fraction `key:"loss_given_default"`
	TiedAssets         bool      `key:"tied_assets"`
}

// Line is one reinsurer's part of what is placed of a treaty; collateral is held against that line alone.
type Line struct {
	Reinsurer  string   `key:"reinsurer,required"`
	Share      Fraction `key:"share,required"`
	Collateral Money    `key:"collateral"`
}
