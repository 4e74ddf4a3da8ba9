package ga

import (
	"errors"
	"math"
	"math/rand"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// zdt1 is a usual test problem with two objectives (Zitzler, Deb and Thiele 2000), on a grid of 100 steps in ten variables; its front is
// y = 1 − √x. The scalar is x + y, least at x = 1/4 on the front, where it is 3/4.
type zdt1 struct {
	scores []Score
	seen   int
	fail   int // the call of Evaluate that fails; 0 = none
	panics bool
}

func (z *zdt1) Random(r *rand.Rand) []int {
	p := make([]int, 10)
	for i := range p {
		p[i] = r.Intn(101)
	}
	return p
}

func (z *zdt1) Cross(receiver, mate []int, r *rand.Rand) {
	for i := range receiver {
		if r.Intn(2) == 0 {
			receiver[i] = mate[i]
		}
	}
}

func (z *zdt1) Mutate(p []int, r *rand.Rand) {
	i := r.Intn(len(p))
	p[i] = min(max(p[i]+r.Intn(21)-10, 0), 100)
}

func zdt1Score(p []int) Score {
	x, sum := float64(p[0])/100, 0.0
	for _, v := range p[1:] {
		sum += float64(v) / 100
	}
	g := 1 + sum
	y := g * (1 - math.Sqrt(x/g))
	return Score{Objectives: [2]float64{x, y}, Scalar: x + y}
}

func (z *zdt1) Evaluate(plans [][]int) ([]Score, error) {
	z.seen++
	if z.seen == z.fail {
		if z.panics {
			panic("a mistake")
		}
		return nil, errors.New("a failure")
	}
	var scores []Score
	for _, p := range plans {
		scores = append(scores, zdt1Score(p))
	}
	z.scores = append(z.scores, scores...)
	return scores, nil
}

// TestKnownFront: the whole width of the front and the least scalar are reached. 0.05: a front of some 60 plans after 9,000 evaluations on a
// grid of 1/100 lies within a few steps of the true one.
func TestKnownFront(t *testing.T) {
	z := &zdt1{}
	if err := Run(z, Settings{Population: 60, Generations: 150, Seed: 4}); err != nil {
		t.Fatal(err)
	}
	least := math.Inf(1)
	for _, s := range z.scores {
		least = min(least, s.Scalar)
	}
	if math.Abs(least-0.75) > 1e-9 { // x = 25/100 lies on the grid
		t.Errorf("least scalar %v, known 0.75", least)
	}
	for x := 0.0; x < 1; x += 0.1 {
		best := math.Inf(1)
		for _, s := range z.scores {
			if s.Objectives[0] <= x+1e-9 {
				best = min(best, s.Objectives[1])
			}
		}
		if best > 1-math.Sqrt(x)+0.05 {
			t.Errorf("at x ≤ %.1f the front is at %v, known %v", x, best, 1-math.Sqrt(x))
		}
	}
}

// TestSeeds: the same seed sees the same plans; other seeds see others, even seeds that are equal modulo 2³¹−1, which eaopt's own source
// takes for one.
func TestSeeds(t *testing.T) {
	run := func(seed uint64) []Score {
		z := &zdt1{}
		if err := Run(z, Settings{Population: 8, Generations: 3, Seed: seed}); err != nil {
			t.Fatal(err)
		}
		return z.scores
	}
	one := run(1)
	if !slices.Equal(one, run(1)) {
		t.Error("one seed gives two results")
	}
	for _, other := range []uint64{0, 2, 1 + (1<<31 - 1), 1 + 2*(1<<31-1), 1 << 63} {
		if slices.Equal(one, run(other)) {
			t.Errorf("seeds 1 and %d give the same", other)
		}
	}
}

// TestGenerations: Stop is asked after every generation, the last included, and ends the search.
func TestGenerations(t *testing.T) {
	for _, end := range []int{1, 3, 7} {
		var asked []int
		z := &zdt1{}
		err := Run(z, Settings{Population: 8, Generations: 7, Seed: 1, Stop: func(g int) bool { asked = append(asked, g); return g == end }})
		if err != nil || !slices.Equal(asked, []int{1, 2, 3, 4, 5, 6, 7}[:end]) {
			t.Errorf("end after %d: %v, asked %v", end, err, asked)
		}
		if z.seen != 1+end { // the first generation and the children of each
			t.Errorf("end after %d: %d batches", end, z.seen)
		}
	}
}

// TestStarts: the first generation holds the plans given; the best ever seen is kept in the population however crossing and mutation spoil.
func TestStarts(t *testing.T) {
	optimum := []int{25, 0, 0, 0, 0, 0, 0, 0, 0, 0}
	z := &zdt1{}
	if err := Run(z, Settings{Population: 8, Generations: 1, Seed: 1, Starts: [][]int{optimum}}); err != nil {
		t.Fatal(err)
	}
	if z.scores[0] != zdt1Score(optimum) || optimum[0] != 25 {
		t.Errorf("the first plan scores %+v", z.scores[0])
	}
}

func TestFailure(t *testing.T) {
	for _, fail := range []int{1, 2, 5} {
		for _, panics := range []bool{false, true} {
			err := Run(&zdt1{fail: fail, panics: panics}, Settings{Population: 8, Generations: 7, Seed: 1})
			if err == nil || !strings.Contains(err.Error(), map[bool]string{false: "a failure", true: "a mistake"}[panics]) {
				t.Errorf("batch %d, panics %v: %v", fail, panics, err)
			}
		}
	}
}

// drawn gives genomes with scores on a coarse grid, so that ties and equal plans are common.
func drawn(t *rapid.T) []*genome {
	list := make([]*genome, rapid.IntRange(1, 40).Draw(t, "count"))
	for i := range list {
		g := &genome{plan: []int{rapid.IntRange(0, 60).Draw(t, "plan")}, scored: true}
		for k := range g.score.Objectives {
			g.score.Objectives[k] = float64(rapid.IntRange(0, 6).Draw(t, "objective"))
		}
		g.score.Scalar = float64(rapid.IntRange(0, 9).Draw(t, "scalar"))
		g.score.Violation = float64(max(rapid.IntRange(-4, 3).Draw(t, "violation"), 0))
		list[i] = g
	}
	return list
}

// TestRankAgainstDefinition: the front of a plan is 0 when nothing dominates it, else one more than the highest front of what dominates it.
func TestRankAgainstDefinition(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		list := drawn(t)
		places := rank(list)
		var front func(i int) int
		front = func(i int) int {
			highest := -1
			for j := range list {
				if dominates(list[j].score, list[i].score) {
					highest = max(highest, places[j].front)
				}
			}
			return highest + 1
		}
		for i := range list {
			if places[i].front != front(i) {
				t.Fatalf("%+v: front %d, by definition %d", list[i].score, places[i].front, front(i))
			}
			if c := places[i].crowding; math.IsNaN(c) || c < 0 {
				t.Fatalf("crowding %v", c)
			}
		}
	})
}

// TestSurvive: as many survive as asked for; none is lost that no other beats in the scalar, and no plan is there twice while another waits.
func TestSurvive(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		list := drawn(t)
		size := rapid.IntRange(1, len(list)).Draw(t, "size")
		before := slices.Clone(list)
		kept := survive(list, size)
		if len(kept) != size || !slices.Equal(before, list) {
			t.Fatalf("%d of %d survive", len(kept), size)
		}
		plans, all := map[int]int{}, map[int]bool{}
		for _, g := range list {
			all[g.plan[0]] = true
		}
		for _, g := range kept {
			plans[g.plan[0]]++
		}
		if len(plans) != min(size, len(all)) {
			t.Fatalf("%d different plans survive of %d, size %d", len(plans), len(all), size)
		}
		distinct, _ := split(list) // the first of each plan stands for it
		best := slices.MinFunc(distinct, func(a, b *genome) int {
			if cheaper(a.score, b.score) {
				return -1
			}
			if cheaper(b.score, a.score) {
				return 1
			}
			return 0
		})
		if !slices.ContainsFunc(kept, func(g *genome) bool { return !cheaper(best.score, g.score) }) {
			t.Fatal("the best by scalar is lost")
		}
	})
}

// BenchmarkGeneration is the engine's own work for a child: choice, crossing, mutation, ranking.
func BenchmarkGeneration(b *testing.B) {
	for _, population := range []int{100, 1000, 10000} {
		b.Run(map[int]string{100: "100", 1000: "1000", 10000: "10000"}[population], func(b *testing.B) {
			const generations = 5
			for b.Loop() {
				if err := Run(&zdt1{}, Settings{Population: population, Generations: generations, Seed: 1}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*population*(generations+1)), "ns/plan")
		})
	}
}
