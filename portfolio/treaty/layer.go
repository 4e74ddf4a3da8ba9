package treaty

import "math"

// rounding is the part of a loss that counts as nothing when a loss is compared with a threshold. Losses net of inuring treaties carry
// rounding errors of some 1e-16 of the gross loss, so that a net loss of exactly a retention may stand a hair above or below it; 1e-12
// is far above that, and a millionth of a cent in ten thousand.
const rounding = 1e-12

// AttachmentPoint gives the money that a unit of loss must exceed to count as an attachment: the retention, and a hair for rounding.
func (t Treaty) AttachmentPoint() float64 { return t.Retention * (1 + rounding) }

// ExhaustionPoint gives the money that a unit of loss must reach to count as an exhaustion: retention + limit, less a hair for rounding;
// +Inf for an unlimited layer.
func (t Treaty) ExhaustionPoint() float64 { return (t.Retention + t.Limit) * (1 - rounding) }

// NetOf gives what is left of a loss after recoveries, never below zero; what is left by rounding alone (1e-12 of the loss) is nothing.
func NetOf(loss, recovered float64) float64 {
	if net := loss - recovered; net > loss*rounding {
		return net
	}
	return 0
}

// LayerLoss gives what falls into the layer of one unit of loss x (an event, a risk, a year): min(max(x − retention, 0), limit), for
// 100 % of the treaty. A quota share has no layer: it gives x.
func (t Treaty) LayerLoss(x float64) float64 {
	if t.Kind == QuotaShare {
		return x
	}
	return min(max(x-t.Retention, 0), t.Limit)
}

// AnnualRecoveryLimit gives the most that 100 % of the treaty pays in a year: the annual limit, or (n+1) limits with n reinstatements,
// or +Inf when neither is given. An aggregate-excess pays its limit once; a quota share has no limit.
func (t Treaty) AnnualRecoveryLimit() float64 {
	switch {
	case t.Kind == QuotaShare:
		return math.Inf(1)
	case t.Kind == AggregateExcess:
		return t.Limit
	case t.AnnualLimit > 0:
		return t.AnnualLimit
	case t.Reinstatements != nil:
		return float64(len(t.Reinstatements)+1) * t.Limit
	default:
		return math.Inf(1)
	}
}

// AnnualRecovery gives the recovery of a year, for 100 % of the treaty, from the sum of its layer losses: the annual deductible comes
// off first, then the annual limit caps.
func (t Treaty) AnnualRecovery(layerLosses float64) float64 {
	return min(max(layerLosses-t.AnnualDeductible, 0), t.AnnualRecoveryLimit())
}

// Reinstated gives the fraction of the base premium that is due as reinstatement premium in a year with this recovery (at 100 %):
// Σ_k c_k·min(max(R − (k−1)·limit, 0), limit)/limit, pro rata as to amount, no time factor (common practice, no source; the formula as
// in Sundt 1991).
func (t Treaty) Reinstated(recovery float64) float64 {
	sum := 0.0
	for k, charge := range t.Reinstatements {
		used := recovery - float64(float64(k)*t.Limit)
		if used <= 0 {
			break
		}
		sum += float64(charge * min(used, t.Limit) / t.Limit)
	}
	return sum
}
