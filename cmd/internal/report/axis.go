package report

import (
	"fmt"
	"math"
)

// axis maps values to places on a picture.
type axis struct {
	low, high float64 // values at the ends
	from, to  float64 // places of the ends
	scale     scaling
	label     string
	format    func(float64) string
}

// scaling is how values are spread along an axis.
type scaling uint8

const (
	linear scaling = iota
	logarithmic
)

func (a axis) spread(x float64) float64 {
	if a.scale == logarithmic {
		return math.Log(max(x, math.SmallestNonzeroFloat64))
	}
	return x
}

// at gives the place of a value; values beyond the ends stop there, and what is no number stands at the low end.
func (a axis) at(x float64) float64 {
	low, high := a.spread(a.low), a.spread(a.high)
	if high == low {
		return (a.from + a.to) / 2
	}
	if math.IsNaN(x) {
		return a.from
	}
	share := min(max((a.spread(x)-low)/(high-low), 0), 1)
	return a.from + share*(a.to-a.from)
}

// ticks gives values that read well: about count of them on a linear axis; 1, 2, 5, 10, … on a logarithmic one, or only the powers of ten
// where it spans more than four of them.
func (a axis) ticks(count int) []float64 {
	var list []float64
	if a.scale == logarithmic {
		if !(a.low > 0) || math.IsInf(a.high, 0) {
			return nil
		}
		steps := []float64{1, 2, 5}
		if a.high/a.low > 2e4 {
			steps = steps[:1]
		}
		for power := math.Floor(math.Log10(a.low)); power <= math.Ceil(math.Log10(a.high)); power++ {
			for _, m := range steps {
				if x := m * math.Pow(10, power); x >= a.low*(1-1e-9) && x <= a.high*(1+1e-9) {
					list = append(list, x)
				}
			}
		}
		return list
	}
	step := niceStep((a.high - a.low) / float64(count))
	first := math.Ceil(a.low/step - 1e-9)
	for k := 0.0; (first+k)*step <= a.high+step*1e-9 && k < 50; k++ {
		list = append(list, (first+k)*step)
	}
	return list
}

// niceStep rounds up to 1, 2 or 5 times a power of ten.
func niceStep(x float64) float64 {
	if !(x > 0) || math.IsInf(x, 0) {
		return 1
	}
	power := math.Pow(10, math.Floor(math.Log10(x)))
	for _, m := range []float64{1, 2, 5} {
		if x <= m*power*(1+1e-9) {
			return m * power
		}
	}
	return 10 * power
}

// upTo gives an end of an axis that reads well, at or above x.
func upTo(x float64) float64 {
	if !(x > 0) || math.IsInf(x, 0) {
		return 1
	}
	step := niceStep(x / 8)
	return math.Ceil(x/step-1e-9) * step
}

// moneyAxis gives an axis of money from low to high, named with unit and currency.
func moneyAxis(low, high float64, name, currency string) axis {
	u := unitOf(low, high)
	label := fmt.Sprintf("%s, %s%s", name, u.word(), currency)
	return axis{low: low, high: high, label: label, format: func(x float64) string { return significant(x/u.factor, 4) }}
}
