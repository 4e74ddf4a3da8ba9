package sample

import "math"

// Select gives the k-th smallest value, k from 1 to len(values). It reorders values so that the first k−1 are not above it and the rest
// not below it. It allocates nothing and takes linear time, also on sorted input and on ties (Floyd and Rivest 1975).
func Select(values []float64, k int) float64 {
	selectRange(values, 0, len(values)-1, k-1)
	return values[k-1]
}

func selectRange(v []float64, left, right, k int) {
	for right > left {
		if n := float64(right - left + 1); n > 600 {
			// Narrow the range to where the k-th value of a sample of about n^(2/3) values says that it must be.
			i := float64(k - left + 1)
			z := math.Log(n)
			s := 0.5 * math.Exp(2*z/3)
			d := 0.5 * math.Sqrt(z*s*(n-s)/n)
			if i < n/2 {
				d = -d
			}
			newLeft := max(left, int(float64(k)-i*s/n+d))
			newRight := min(right, int(float64(k)+(n-i)*s/n+d))
			selectRange(v, newLeft, newRight, k)
		}
		t := v[k]
		i, j := left, right
		v[left], v[k] = v[k], v[left]
		if v[right] > t {
			v[right], v[left] = v[left], v[right]
		}
		for i < j {
			v[i], v[j] = v[j], v[i]
			i++
			j--
			for v[i] < t {
				i++
			}
			for v[j] > t {
				j--
			}
		}
		if v[left] == t {
			v[left], v[j] = v[j], v[left]
		} else {
			j++
			v[j], v[right] = v[right], v[j]
		}
		if j <= k {
			left = j + 1
		}
		if k <= j {
			right = j - 1
		}
	}
}

// Tail gives value at risk and tail value at risk of an unsorted sample, which it reorders. It allocates nothing. The figures are those
// of Sample.VaR and Sample.TVaR to rounding.
func Tail(values []float64, l Level) (valueAtRisk, tailValueAtRisk float64) {
	n := len(values)
	k := l.Rank(n)
	valueAtRisk = Select(values, k)
	sum := Sum(values[k:]) + float64(l.Excess(n)*valueAtRisk)
	return valueAtRisk, sum / (l.Tail() * float64(n))
}

// Beyond counts the values of a sample of n at or above the quantile of a level, itself included.
func (l Level) Beyond(n int) int { return n - l.Rank(n) + 1 }

// TailFigures are value at risk and tail value at risk at one level, in the unit of the values.
type TailFigures struct{ VaR, TVaR float64 }

// Tails gives the tail figures at several levels, which must rise, of an unsorted sample, which it reorders; dst is as long as levels. Tail
// value at risk is worked out for levels[means:] alone, 0 below. It allocates nothing. Each level looks only at the values that the level before it left above itself, so that further levels cost
// little. The figures are those of Sample.VaR and Sample.TVaR to rounding.
func Tails(values []float64, levels []Level, means int, dst []TailFigures) {
	TailsOfLargest(values, len(values), levels, means, dst)
}

// TailsOfLargest does the same for a sample of n values of which only the largest are given: at least as many as lie at or above the quantile of the lowest
// level, which Beyond counts.
func TailsOfLargest(values []float64, n int, levels []Level, means int, dst []TailFigures) {
	missing := n - len(values)
	done := 0 // values[:done] are in their places: not above the rest, and what a lower level left above itself stays there
	for i, l := range levels {
		k := l.Rank(n) - missing
		selectRange(values, min(done, k-1), len(values)-1, k-1)
		dst[i] = TailFigures{VaR: values[k-1]}
		done = k
	}
	// From the top down each level adds what lies between its quantile and the one above.
	sum, from := 0.0, len(values)
	for i := len(levels) - 1; i >= means; i-- {
		k := levels[i].Rank(n) - missing
		if k < from {
			sum += Sum(values[k:from])
			from = k
		}
		dst[i].TVaR = (sum + float64(levels[i].Excess(n)*dst[i].VaR)) / (levels[i].Tail() * float64(n))
	}
}
