package security

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"math/rand/v2"
	"slices"
)

// few is the expected number of failing years below which a warning is due: a mean over fewer years, drawn one by one, would err by a third
// or more.
const few = 10

// Failures is the simulated years in which the reinsurers of a register fail. Reinsurers are counted from 0 in the order of the register,
// years from 0 in the order of the badness given. It never changes.
type Failures struct {
	names      []string
	defaults   []float64 // probability of default
	factor     factor
	thresholds []float64
	scores     []float64 // of the years
	years      [][]int32
}

// Fail draws the years in which reinsurers fail. badness[y] says how bad year y is for the cedant, such as its gross loss, in any unit;
// only its order counts, and equal values share their mean rank. It must be finite; there may be at most 2³¹−1 years, or none. The
// register must be valid.
//
// A reinsurer with the probability p fails in year y with the conditional probability p_y = Φ((a·z_y − c)/√(1−a²)) of the one-factor
// model (Vasicek 1987, 2002; Gordy 2003): a is the register's Correlation, z_y the normal score of the year's rank, and c, near Φ⁻¹(1−p),
// makes the mean of p_y over these years p.
//
// The failing years are a systematic sample with these inclusion probabilities along the years from the worst to the best, from a random
// start (Madow 1949). So year y is drawn with the probability p_y; the number of failing years is N·p rounded up or down; and they spread
// over bad and good years as evenly as p_y asks, so that a mean over them scatters less than over independent draws. The order is
// shuffled among equal years and within short runs of neighbours, as in randomised systematic sampling (Hartley and Rao 1962): unshuffled,
// two reinsurers of one probability would fail at one fixed distance, together always or never, so that the number of years in which both
// fail would be right on average over seeds and far off under each.
//
// Each reinsurer draws from its own stream, seeded by (Seed, name). Given the year, reinsurers fail independently of one another, and what
// else is in the register, or in which order, moves nothing.
func (r *Register) Fail(badness []float64) *Failures {
	ranked := rank(badness)
	n := len(r.Reinsurers)
	f := &Failures{
		names: make([]string, n), defaults: make([]float64, n), factor: newFactor(r.Correlation),
		thresholds: make([]float64, n), scores: ranked.scores(), years: make([][]int32, n),
	}
	d := drawing{ranked: ranked, probabilities: make([]float64, len(badness)), order: make([]int32, len(badness))}
	known := map[float64]float64{} // thresholds, since many reinsurers share a rating
	for i, u := range r.Reinsurers {
		f.names[i], f.defaults[i] = u.Name, u.Default
		c, ok := known[u.Default]
		if !ok {
			c = f.factor.threshold(u.Default, ranked, d.probabilities[:len(ranked.atoms)])
			known[u.Default] = c
		}
		f.thresholds[i] = c
		if u.Default > 0 {
			f.years[i] = d.draw(stream(r.Seed, u.Name), f.factor, c)
		}
	}
	return f
}

// stream gives the random numbers of one reinsurer: they depend on nothing else than the seed. The word keeps them apart from those of a
// loss model of the same name.
func stream(seed uint64, name string) *rand.Rand {
	head := binary.LittleEndian.AppendUint64(nil, seed)
	sum := sha256.Sum256(append(append(head, "security"...), name...))
	return rand.New(rand.NewPCG(binary.LittleEndian.Uint64(sum[:8]), binary.LittleEndian.Uint64(sum[8:16])))
}

// drawing is the scratch memory of drawing one reinsurer's years after another.
type drawing struct {
	ranked        ranking
	probabilities []float64 // by place in the ranking
	order         []int32   // places in the ranking, shuffled
}

// draw gives the failing years of one reinsurer, ascending.
func (d *drawing) draw(random *rand.Rand, f factor, threshold float64) []int32 {
	for i := range d.order {
		d.order[i] = int32(i)
	}
	shuffle := func(part []int32) {
		random.Shuffle(len(part), func(i, j int) { part[i], part[j] = part[j], part[i] })
	}
	running := random.Float64()
	expected, start := 0.0, 0
	for _, a := range d.ranked.atoms {
		p := f.probability(a.score, threshold)
		for i := start; i < a.end; i++ {
			d.probabilities[i] = p
		}
		expected += p * float64(a.end-start)
		shuffle(d.order[start:a.end])
		start = a.end
	}
	// A run ends where independent draws would have reached a variance of 1: about one failing year where defaults are rare, and about one
	// surviving year where they are the rule. That is long enough to part two reinsurers and the shortest that is.
	variance := 0.0
	start = 0
	for i := range d.order {
		p := d.probabilities[i] // equal years have equal probabilities, so the place serves for whoever was shuffled into it
		variance += float64(p * (1 - p))
		if variance >= 1 || i == len(d.order)-1 {
			shuffle(d.order[start : i+1])
			variance, start = 0, i+1
		}
	}
	years := make([]int32, 0, int(expected)+2)
	for _, place := range d.order {
		if running += d.probabilities[place]; running >= 1 {
			running-- // exact, so that the sum of many years loses nothing
			years = append(years, d.ranked.years[place])
		}
	}
	slices.Sort(years)
	return years
}

// Years gives the years in which reinsurer i fails, ascending. It must not be changed.
func (f *Failures) Years(i int) []int32 { return f.years[i] }

// Count gives the number of years in which reinsurer i fails: its probability of default times the number of years, rounded up or down.
func (f *Failures) Count(i int) int { return len(f.years[i]) }

// Probability gives the probability that reinsurer i fails in each year, given how bad the year is, in order of years: from 0 to 1, rising
// with badness, the same for years equally bad. Their mean is its probability of default, to rounding. It is worked out anew each time.
func (f *Failures) Probability(i int) []float64 {
	list := make([]float64, len(f.scores))
	for y, z := range f.scores {
		list[y] = f.factor.probability(z, f.thresholds[i])
	}
	return list
}

// Warnings names the reinsurers that may fail but do so in so few simulated years, fewer than 10 expected, that figures of their default
// rest on too little; in the order of the register, one clause each, such as: only 3 simulated years see reinsurer "Gannet Re" fail.
func (f *Failures) Warnings() []string {
	var list []string
	for i, p := range f.defaults {
		if !(p > 0) || p*float64(len(f.scores)) >= few {
			continue
		}
		switch count := f.Count(i); count {
		case 0:
			list = append(list, fmt.Sprintf("no simulated year sees reinsurer %q fail", f.names[i]))
		case 1:
			list = append(list, fmt.Sprintf("only 1 simulated year sees reinsurer %q fail", f.names[i]))
		default:
			list = append(list, fmt.Sprintf("only %d simulated years see reinsurer %q fail", count, f.names[i]))
		}
	}
	return list
}
