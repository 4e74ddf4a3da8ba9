package security

import (
	"cmp"
	"math"
	"slices"

	"cedewright/portfolio/sample"

	"gonum.org/v1/gonum/stat/distuv"
)

// ranking is the simulated years from the worst for the cedant to the best.
type ranking struct {
	years []int32 // from the worst; ties by index
	atoms []atom
}

// atom is a run of years that are equally bad.
type atom struct {
	score float64 // normal score of their mean rank
	end   int     // place in the ranking behind the last of them
}

// rank orders the years and gives each atom the normal score Φ⁻¹((r − ½)/N) of its mean rank r, counted from the best year. With the
// midpoint of a rank's interval the mean over the years is the midpoint rule for an integral over the factor.
func rank(badness []float64) ranking {
	n := len(badness)
	r := ranking{years: make([]int32, n)}
	for i := range r.years {
		r.years[i] = int32(i)
	}
	slices.SortFunc(r.years, func(a, b int32) int {
		if c := cmp.Compare(badness[b], badness[a]); c != 0 {
			return c
		}
		return cmp.Compare(a, b)
	})
	same := func(i, j int) bool { return cmp.Compare(badness[r.years[i]], badness[r.years[j]]) == 0 }
	distinct := 0
	for i := range n {
		if i == 0 || !same(i, i-1) {
			distinct++
		}
	}
	r.atoms = make([]atom, 0, distinct)
	for start := 0; start < n; {
		end := start + 1
		for end < n && same(end, start) {
			end++
		}
		// The ranks n−end+1 to n−start have the mean n − (start+end−1)/2; the score is that of the mirrored place, with its sign turned.
		r.atoms = append(r.atoms, atom{-distuv.UnitNormal.Quantile(float64(start+end) / float64(2*n)), end})
		start = end
	}
	return r
}

// scores gives the normal score of each year, in order of years.
func (r ranking) scores() []float64 {
	scores := make([]float64, len(r.years))
	start := 0
	for _, a := range r.atoms {
		for _, y := range r.years[start:a.end] {
			scores[y] = a.score
		}
		start = a.end
	}
	return scores
}

// factor is the one-factor model of default (Vasicek 1987, 2002; Gordy 2003): a reinsurer fails when a·z + √(1−a²)·ε is above its
// threshold, with z the year's score and ε standard normal and its own.
type factor struct {
	loading float64 // a
	own     float64 // √(1−a²)
}

func newFactor(loading float64) factor {
	return factor{loading, math.Sqrt((1 - loading) * (1 + loading))}
}

// probability gives the probability of default given the year's score, Φ((a·z − threshold)/√(1−a²)).
func (f factor) probability(score, threshold float64) float64 {
	return 0.5 * math.Erfc((threshold-f.loading*score)/(f.own*math.Sqrt2))
}

// threshold gives the threshold at which the conditional probabilities of the simulated years have the mean p.
//
// With infinitely many years it is Φ⁻¹(1−p). Finitely many scores lack the law's tails, where rare defaults of a high loading happen, and
// the score of tied years stands for all of them, so that the mean would come out beside p, by far when most years tie: reinsurers would
// then be better or worse than the study says. Moving the threshold, unlike scaling the probabilities, keeps every one of them below 1
// and their order in the years.
//
// It is found by Newton's rule on the logarithm of the mean, which falls as the threshold rises; a step that leaves the interval known to
// hold it is replaced by halving that. The mean is p to rounding, which is 1e-16 times about 1/√(1−a²). scratch is as long as the atoms.
func (f factor) threshold(p float64, r ranking, scratch []float64) float64 {
	if !(p > 0) || len(r.atoms) == 0 {
		return math.Inf(1)
	}
	at := -distuv.UnitNormal.Quantile(p)
	// Were all scores the lowest, or the highest, it would be here; the slack is for rounding.
	slack := 1e-9 * (1 + math.Abs(at))
	low := f.loading*r.atoms[len(r.atoms)-1].score + f.own*at - slack
	high := f.loading*r.atoms[0].score + f.own*at + slack
	n := float64(len(r.years))
	at = min(max(at, low), high)
	for range 200 { // halving alone needs some 60
		density, start := 0.0, 0 // the slope need not be known to the last digit
		for i, a := range r.atoms {
			years := float64(a.end - start)
			x := (at - f.loading*a.score) / f.own
			scratch[i] = years * 0.5 * math.Erfc(x/math.Sqrt2)
			density += years * math.Exp(-0.5*x*x)
			start = a.end
		}
		mean := sample.Sum(scratch) / n
		if math.Abs(mean/p-1) < 1e-14 {
			break
		}
		if mean > p {
			low = at
		} else {
			high = at
		}
		slope := density / (n * f.own * math.Sqrt(2*math.Pi))
		next := at + math.Log(mean/p)*mean/slope
		if !(next > low && next < high) {
			next = low + (high-low)/2
		}
		if next == at || !(next > low && next < high) {
			break // no number lies between
		}
		at = next
	}
	return at
}
