package sample

import "math"

// InfluenceError gives the standard error of a figure from its influence values: their standard deviation over √N. It is 0 for fewer
// than two values. (Hampel 1974; the infinitesimal jackknife, Jaeckel 1972.)
func InfluenceError(influence []float64) float64 {
	n := float64(len(influence))
	if n < 2 {
		return 0
	}
	mean := Sum(influence) / n
	squares := 0.0
	for _, v := range influence {
		squares += float64((v - mean) * (v - mean))
	}
	return math.Sqrt(squares/(n-1)) / math.Sqrt(n)
}

// room gives dst at length n, newly made when it is too short. In every function here dst must not overlap the values.
func room(dst []float64, n int) []float64 {
	if cap(dst) < n {
		return make([]float64, n)
	}
	return dst[:n]
}

// MeanInfluence gives the influence of each year on the mean, in order of years.
func MeanInfluence(values, dst []float64) []float64 {
	dst = room(dst, len(values))
	mean := Sum(values) / float64(len(values))
	for i, v := range values {
		dst[i] = v - mean
	}
	return dst
}

// TVaRInfluence gives the influence of each year on tail value at risk, q + (x−q)⁺/(1−p) − TVaR, in order of years, with q the value
// at risk.
func TVaRInfluence(values []float64, l Level, dst []float64) []float64 {
	dst = room(dst, len(values))
	copy(dst, values)
	q, tail := Tail(dst, l)
	for i, v := range values {
		dst[i] = q + max(v-q, 0)/l.Tail() - tail
	}
	return dst
}

// VaRInfluence gives the influence of each year on value at risk, (1{x>q} − (1−p))/f(q), in order of years. The density f at the
// quantile q comes from the spacing of the order statistics one standard error of rank, m = ⌈√(N·p·(1−p))⌉, to either side, so that
// the standard error is about half that spacing (Woodruff 1952; Siddiqui 1960). With few values in the tail the window is cut at the
// largest value.
func VaRInfluence(values []float64, l Level, dst []float64) []float64 {
	n := len(values)
	dst = room(dst, n)
	copy(dst, values)
	k := l.Rank(n)
	m := int(math.Ceil(math.Sqrt(float64(n) * l.Float() * l.Tail())))
	q := Select(dst, k)
	high, low := min(k+m, n), max(k-m, 1)
	if high > k {
		Select(dst[k:], high-k)
	}
	top := dst[high-1]
	if low < k {
		Select(dst[:k-1], low)
	}
	slope := 0.0 // 1/f
	if high > low {
		slope = (top - dst[low-1]) * float64(n) / float64(high-low)
	}
	for i, v := range values {
		if v > q {
			dst[i] = slope * (1 - l.Tail())
		} else {
			dst[i] = -slope * l.Tail()
		}
	}
	return dst
}

// DistortedInfluence gives the influence of each year on the integral under the distortion g, in order of years:
// ∫ g'(S(x))·(1{value>x} − S(x)) dx over the sample's own steps, with g' the slope of g over one step of 1/N. A jump of g at 0 acts on
// the largest value alone, whose sampling error no finite sample knows; the slope next to it stands for it.
func DistortedInfluence(values []float64, g func(float64) float64, dst []float64) []float64 {
	n := len(values)
	dst = room(dst, n)
	order := ascendingOrder(values)
	slope := func(above int) float64 { // of g at the survival probability above/n, central where possible
		low, high := max(above-1, 1), min(above+1, n)
		if high == low {
			return 1
		}
		return (g(float64(high)/float64(n)) - g(float64(low)/float64(n))) * float64(n) / float64(high-low)
	}
	sum, mean := 0.0, 0.0
	dst[order[0]] = 0
	for i := 1; i < n; i++ {
		if step := values[order[i]] - values[order[i-1]]; step > 0 {
			above := n - i
			rise := float64(slope(above) * step)
			sum += rise
			mean += float64(rise * float64(above) / float64(n))
		}
		dst[order[i]] = sum
	}
	for i := range dst {
		dst[i] -= mean
	}
	return dst
}

// MeanError gives the standard error of the mean.
func (s Sample) MeanError() float64 { return s.StandardDeviation() / math.Sqrt(float64(s.Len())) }

// VaRError gives the standard error of value at risk from influence values (see VaRInfluence).
func (s Sample) VaRError(l Level) float64 { return InfluenceError(VaRInfluence(s.ascending, l, nil)) }

// TVaRError gives the standard error of tail value at risk from influence values (see TVaRInfluence).
func (s Sample) TVaRError(l Level) float64 { return InfluenceError(TVaRInfluence(s.ascending, l, nil)) }
