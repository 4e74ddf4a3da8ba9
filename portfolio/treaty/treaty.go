package treaty

import "fmt"

// Kind is a kind of treaty.
type Kind uint8

// The kinds of treaty. More may follow.
const (
	QuotaShare      Kind = iota + 1 // a share of every loss
	EventExcess                     // excess of loss per event
	RiskExcess                      // excess of loss per risk
	AggregateExcess                 // excess of the year's sum of losses
)

var kindNames = [...]string{QuotaShare: "quota-share", EventExcess: "event-excess", RiskExcess: "risk-excess", AggregateExcess: "aggregate-excess"}

// KindNames lists the names that ParseKind accepts.
func KindNames() []string { return kindNames[1:] }

// String gives the name used in studies, such as "event-excess".
func (k Kind) String() string {
	if k >= QuotaShare && k <= AggregateExcess {
		return kindNames[k]
	}
	return fmt.Sprintf("Kind(%d)", uint8(k))
}

// ParseKind gives the kind of that name.
func ParseKind(name string) (Kind, error) {
	for k := QuotaShare; k <= AggregateExcess; k++ {
		if kindNames[k] == name {
			return k, nil
		}
	}
	return 0, fmt.Errorf("treaty: kind %q is unknown", name)
}

// Optional is a number that may be absent.
type Optional struct {
	Value float64
	Given bool
}

// Some gives a present number.
func Some(value float64) Optional { return Optional{Value: value, Given: true} }

// Treaty is the terms of one contract. Money is in the book's currency; fractions are of 1. Fields that its kind does not use are zero.
type Treaty struct {
	Name string
	Kind Kind

	// Subject: what the treaty looks at.
	Classes []string // classes covered; none = all
	Perils  []string // perils covered; none = all
	After   []string // names of the treaties that inure to this one; their placed recoveries reduce its subject loss

	Cession float64 // quota share only: fraction of subject loss and premium ceded, 0–1

	Retention        float64   // excess kinds: money per event (risk, year), ≥ 0
	Limit            float64   // excess kinds: money per event (risk, year) above the retention, > 0, +Inf = unlimited
	Share            float64   // excess kinds: fraction placed, 0–1
	AnnualDeductible float64   // event- and risk-excess: money per year, taken off the year's sum of layer losses, ≥ 0
	AnnualLimit      float64   // event- and risk-excess: money per year; 0 = not given (see Aggregate)
	Reinstatements   []float64 // event- and risk-excess: charge per reinstated limit, fraction of base premium; nil = not given, empty = none
	EventLimit       float64   // risk-excess only: money per event over all its risks; 0 = none

	Curve      string   // name of the market curve that prices it
	Premium    Optional // quoted base premium for 100 % of an excess treaty, money per year; overrides the curve
	Commission Optional // quota share only: commission as a fraction of ceded premium; overrides the curve

	Panel []Line // who stands behind it; none = nobody fails. What the lines leave of 100 % is taken as free of default
}

// Line is one reinsurer's part of a treaty.
type Line struct {
	Reinsurer  string
	Share      float64 // fraction of what is placed, 0–1; the lines of a panel come to at most 1
	Collateral float64 // money held against this line, ≥ 0
}

// Placed gives the fraction of the contract that is placed: the cession of a quota share, else the share.
func (t Treaty) Placed() float64 {
	if t.Kind == QuotaShare {
		return t.Cession
	}
	return t.Share
}

// Programme is a set of treaties. Their order in the list carries no meaning: inuring is said by After.
type Programme struct {
	Name     string
	Treaties []Treaty
}
