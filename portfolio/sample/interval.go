package sample

import "math"

// confidence is the coverage that VaRInterval guarantees.
const confidence = 0.95

// VaRInterval gives a confidence interval of 95 % for the true value at risk, in the unit of the values, whatever their law: two order
// statistics as many ranks below and above the quantile's own, as near as the coverage allows (Thompson 1936; David and Nagaraja 2003,
// section 7.1). The coverage is at least 95 % for a law without atoms, and more for one with atoms. Where the sample has too few values
// beyond the quantile to bound it, that end is infinite: the data cannot say.
func (s Sample) VaRInterval(l Level) (low, high float64) {
	lowRank, highRank, _ := intervalRanks(l, len(s.ascending))
	low, high = math.Inf(-1), math.Inf(1)
	if lowRank >= 1 {
		low = s.ascending[lowRank-1]
	}
	if highRank <= len(s.ascending) {
		high = s.ascending[highRank-1]
	}
	return low, high
}

// intervalRanks gives the ranks of the interval's ends and its coverage: the smallest d for which P(k−d ≤ B ≤ k+d−1) reaches the
// confidence, with k the quantile's rank and B, binomial of n and p, the number of values below the true quantile. Rank 0 and rank n+1
// stand for an end without bound.
func intervalRanks(l Level, n int) (low, high int, coverage float64) {
	k, p := l.Rank(n), l.Float()
	low, high = k, k
	for coverage < confidence && (low > 0 || high <= n) {
		if high <= n { // the interval grows upwards by one rank: B may be high as well
			coverage += binomial(n, high, p)
			high++
		}
		if low > 0 {
			low--
			coverage += binomial(n, low, p)
		}
	}
	return low, high, coverage
}

// binomial gives P(B = k) for n trials, by logarithms: good to 1e-7 relative up to ten million trials.
func binomial(n, k int, p float64) float64 {
	if p == 0 {
		if k == 0 {
			return 1
		}
		return 0
	}
	all, _ := math.Lgamma(float64(n) + 1)
	in, _ := math.Lgamma(float64(k) + 1)
	out, _ := math.Lgamma(float64(n-k) + 1)
	return math.Exp(all - in - out + float64(k)*math.Log(p) + float64(n-k)*math.Log1p(-p))
}
