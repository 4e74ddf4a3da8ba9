package capital

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"cedewright/portfolio/fault"

	"gonum.org/v1/gonum/stat/distuv"
)

// Rest is what else the company stands for beside the book: its other risks. Either a capital figure with a correlation, or the law of a
// yearly loss that is combined with the book year by year.
type Rest struct {
	// A capital figure: K of the company = √(K² + 2·Correlation·K·Capital + Capital²).
	Capital     float64 // money, ≥ 0
	Correlation float64 // −1 to 1

	// A loss distribution: Quantile gives the loss of the rest at a probability within (0, 1), in money, a profit negative. Its years are paired with the
	// book's gross losses at RankCorrelation (Spearman, by a normal copula).
	Quantile        func(probability float64) float64 // nil = a capital figure
	Law             string                            // in words, for display: "lognormal, mean 20m, standard deviation 60m"
	RankCorrelation float64                           // −1 to 1
	Seed            uint64
}

// Validate reports every fault at once.
func (r *Rest) Validate() error {
	var faults fault.List
	if !(r.Capital >= 0) || math.IsInf(r.Capital, 0) {
		faults.Add(fault.Fault{Key: "capital.rest.capital", Found: fmt.Sprint(r.Capital), Allowed: "money of at least 0"})
	}
	for _, f := range []struct {
		key string
		x   float64
	}{{"capital.rest.correlation", r.Correlation}, {"capital.rest.rank_correlation", r.RankCorrelation}} {
		if !(f.x >= -1 && f.x <= 1) {
			faults.Add(fault.Fault{Key: f.key, Found: fmt.Sprint(f.x), Allowed: "a correlation from -1 to 1"})
		}
	}
	return faults.Err()
}

// Combine gives the capital of the company from that of the book: √(k² + 2·c·k·B + B²), B and c the rest's capital and correlation. It is never
// below 0. k may be below 0, as the deviation of a value at risk at a low level may be. Where k < −c·B, that is with k far enough below 0, or with c
// below 0 and a small k, the company's capital falls as the book's rises.
//
// The root is the length of the vector (k + c·B, B·√(1 − c²)), whose square is k² + 2·c·k·B + c²B² + (1 − c²)B². A length is a convex function of its
// vector, and the vector is linear in k: so the root is convex in k, and a tangent bounds it from below. Its derivatives are (k + c·B)/K and
// (K² − (k + c·B)²)/K³ = B²·(1 − c²)/K³ ≥ 0.
func (r *Rest) Combine(k float64) float64 {
	if cross := float64(2 * r.Correlation * k * r.Capital); cross >= 0 {
		return math.Sqrt(float64(k*k) + cross + float64(r.Capital*r.Capital))
	}
	// The sum would cancel, near c = −1 and k = B to half its digits or to less than 0; the length does not.
	return math.Hypot(r.along(k), r.Capital*math.Sqrt((1-r.Correlation)*(1+r.Correlation)))
}

// along is the part of the company's vector that moves with the book.
func (r *Rest) along(k float64) float64 { return k + float64(r.Correlation*r.Capital) }

// Slope gives by how much the company's capital rises per unit of the book's, at k, from −1 to 1; at the kink, where the company's capital is 0, the
// slope to the right, 1.
func (r *Rest) Slope(k float64) float64 {
	all := r.Combine(k)
	if all == 0 {
		return 1
	}
	return r.along(k) / all
}

// Years gives the rest's loss of every year, in money; Quantile must be given. The values are the law's quantiles at the middles of N equal strata, so
// that the law is met as closely as N values can; their order pairs them with the gross losses by a normal copula whose Spearman correlation is
// RankCorrelation: Pearson's parameter is 2·sin(π·ρ/6) (Kruskal 1958). The correlation of one pairing scatters around it by about (1 − ρ²)/√N; at ±1
// the pairing is exact. Equal gross losses, such as those of years without an event, are ordered at random, so that the numbering of years never shows;
// the correlation is that with the losses so ordered. The stream is seeded by (Seed, "rest of the company"), so that no other draw moves it. It takes
// time of the order N·log N.
func (r *Rest) Years(grossLosses []float64) []float64 {
	n := len(grossLosses)
	sum := sha256.Sum256(binary.LittleEndian.AppendUint64([]byte("rest of the company "), r.Seed))
	random := rand.New(rand.NewPCG(binary.LittleEndian.Uint64(sum[:8]), binary.LittleEndian.Uint64(sum[8:16])))
	loading := 2 * math.Sin(math.Pi*r.RankCorrelation/6)
	if math.Abs(r.RankCorrelation) == 1 {
		loading = r.RankCorrelation // the sine is short of it by a rounding, which would leave noise of 1.5e-8
	}
	own := math.Sqrt(max(1-loading*loading, 0))
	// Scores of the gross losses, those of equal losses in random order, mixed with noise: their order is that of the rest's losses.
	mixed := make([]float64, n)
	for k, y := range byValue(grossLosses, random) {
		mixed[y] = float64(loading*distuv.UnitNormal.Quantile((float64(k)+0.5)/float64(n))) + float64(own*random.NormFloat64())
	}
	years := make([]float64, n)
	for k, y := range byValue(mixed, random) {
		years[y] = r.Quantile((float64(k) + 0.5) / float64(n))
	}
	return years
}

// byValue gives the places of values by rising value, equal values in random order.
func byValue(values []float64, random *rand.Rand) []int {
	order := random.Perm(len(values))
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case values[i] < values[j]:
			return -1
		case values[i] > values[j]:
			return 1
		}
		return 0
	})
	return order
}

// RestFamilies lists the families that RestLaw knows.
func RestFamilies() []string { return []string{"normal", "lognormal"} }

// RestLaw gives the quantiles of a yearly loss of that mean and standard deviation, in money. The standard deviation must be above 0; the mean of a
// lognormal law must be above 0 too, and not so small beside the standard deviation that the square of their ratio overflows. The error holds every
// fault at once, under the keys mean, sd and family.
func RestLaw(family string, mean, deviation float64) (func(probability float64) float64, error) {
	var faults fault.List
	if math.IsNaN(mean) || math.IsInf(mean, 0) {
		faults.Add(fault.Fault{Key: "mean", Found: fmt.Sprint(mean), Allowed: "money"})
	}
	if !(deviation > 0) || math.IsInf(deviation, 0) {
		faults.Add(fault.Fault{Key: "sd", Found: fmt.Sprint(deviation), Allowed: "money above 0"})
	}
	switch family {
	case "normal":
		if err := faults.Err(); err != nil {
			return nil, err
		}
		return distuv.Normal{Mu: mean, Sigma: deviation}.Quantile, nil
	case "lognormal":
		cv := deviation / mean
		variance := math.Log1p(cv * cv)
		switch {
		case mean <= 0:
			faults.Add(fault.Fault{Key: "mean", Found: fmt.Sprint(mean), Allowed: "money above 0, for a lognormal law"})
		case faults.Len() == 0 && math.IsInf(variance, 0):
			faults.Add(fault.Fault{Key: "sd", Found: fmt.Sprint(deviation), Allowed: "at most 1e150 times the mean, for a lognormal law"})
		}
		if err := faults.Err(); err != nil {
			return nil, err
		}
		return distuv.LogNormal{Mu: math.Log(mean) - variance/2, Sigma: math.Sqrt(variance)}.Quantile, nil
	}
	faults.Add(fault.Fault{Key: "family", Found: fmt.Sprintf("no family is named %q", family), Allowed: fmt.Sprintf("%q", RestFamilies()),
		Nearest: fault.Nearest(family, RestFamilies())})
	return nil, faults.Err()
}
