package optimize

import (
	"cedewright/market"
	"cedewright/portfolio/treaty"
)

// Estimate is a simulated figure and its standard error, both in the figure's unit.
type Estimate struct {
	Value         float64
	StandardError float64
}

// CapitalFigure is required capital under one standard, in money. Relief = Gross − Net.
type CapitalFigure struct {
	Standard string        // name in the study
	Gross    Estimate      // with no reinsurance
	Net      Estimate      // with the programme
	Relief   Estimate      // its error is that of the difference on common years
	Alone    *Alone        // of the book alone, before diversification with the rest of the company; nil without a rest
	Binding  bool          // no standard asks more of the net position
	Parts    []CapitalPart // what the requirement is made of; none for a single criterion; detail only
}

// Alone is required capital before diversification with the rest of the company, in money.
type Alone struct{ Gross, Net, Relief Estimate }

// CapitalPart is a piece of a requirement, such as a module, a charge or a criterion, in money. Pieces do not add up: the standard says how they are combined.
type CapitalPart struct {
	Name   string
	Gross  float64 // with no reinsurance
	Amount float64 // with the programme
	Sets   bool    // the criterion that sets the requirement of the net position
}

// NetResult describes the net result of a year, in money; a loss is negative.
type NetResult struct {
	Mean              Estimate
	StandardDeviation float64  // divisor N − 1
	OneIn10           Estimate // not reached in the worst tenth of years
	OneIn200          Estimate
}

// TreatyFigure is what one treaty of a programme costs and gives. Money per year as placed, unless said otherwise.
type TreatyFigure struct {
	Terms                 treaty.Treaty
	Premium               Estimate // base premium ceded (placed share), brokerage included; error from simulation when modelled
	BasePremium           float64  // for 100 % of the treaty
	RateOnLine            float64  // BasePremium / Limit; 0 for a quota share or an unlimited treaty
	ReinstatementPremium  Estimate // expected
	Commission            float64  // money per year
	CommissionRate        float64  // fraction of ceded premium
	ExpectedRecovery      Estimate
	Margin                Estimate // premium + reinstatement premium − commission − recovery
	Relief                Estimate // last-in: driving capital without this treaty − with the whole programme, money
	ExpectedUnpaid        Estimate // of recoveries, by reinsurers that fail
	AttachmentProbability Estimate // per year; 0 for a quota share
	ExhaustionProbability Estimate
	PricedBy              string          // "quoted", "curve NAME", "commission", "minimum rate on line of curve NAME"
	PriceError            float64         // standard error of Premium (of Commission for a quota share) that comes from the quotes, money per year; detail only
	Reliance              market.Reliance // how far the price rests on quotes; detail only
}

// Appraisal is everything that is said about one programme. Money per year unless said otherwise. Appraise fills the errors, the
// reliefs of the treaties and TreatyFigure details only when asked for Detail; the plain figures are the same either way.
type Appraisal struct {
	Programme            treaty.Programme
	CededPremium         Estimate
	ExpectedRecoveries   Estimate
	ReinstatementPremium Estimate
	Commission           Estimate
	CededMargin          Estimate
	ExpectedUnpaid       Estimate        // of recoveries, by reinsurers that fail; not part of the margin, but of the total cost
	Capital              []CapitalFigure // in the order of the standards
	Driving              CapitalFigure   // what drives: the standard of those that drive which asks the most, before and after the programme
	CapitalCost          Estimate        // what the owners ask for the risk kept
	TotalCost            Estimate        // ceded margin + expected unpaid recoveries + capital cost
	Rent                 Estimate        // per year; no value when relief ≤ 0: RentDefined is false
	RentDefined          bool
	OwnFundsRatio        []Estimate // own funds / net required capital, per standard; empty when own funds are not given
	NetResult            NetResult
	NoTaker              []string // treaties for which the market has no capacity; the figures take them as placed all the same
	Treaties             []TreatyFigure
	MarginPriceError     float64   // standard error of CededMargin that comes from the quotes, beside that of the simulation; detail only
	CostPriceError       float64   // the same for TotalCost
	CostPriceMoves       []float64 // by how much each replicate of the curves moves the total cost, money per year; empty without replicates
	marginMoves          []float64
	CostInfluence        []float64 // per year: the total cost's influence values, mean 0 (detail only); differences use these
}
