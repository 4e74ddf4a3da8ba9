package ga

import (
	"fmt"
	"math/rand"
	randv2 "math/rand/v2"
	"runtime/debug"

	"github.com/MaxHalford/eaopt"
)

// Score is what the search knows of a plan. All figures are finite.
type Score struct {
	Objectives [2]float64 // both to be small
	Scalar     float64    // to be small
	Violation  float64    // 0 = feasible
}

// Problem is what is searched. Operators change the plan given, which is theirs to change, and nothing else.
type Problem interface {
	Random(r *rand.Rand) []int
	Cross(receiver, mate []int, r *rand.Rand)
	Mutate(plan []int, r *rand.Rand)
	// Evaluate scores plans, in their order. It is called on one goroutine, with all plans of a generation.
	Evaluate(plans [][]int) ([]Score, error)
}

// Settings of a search.
type Settings struct {
	Population  int
	Generations int
	Seed        uint64
	Starts      [][]int                   // plans of the first generation, before random ones
	Stop        func(generation int) bool // asked after every generation
}

// mutationRate is the share of children that are mutated after crossing; all others are crossings alone.
const mutationRate = 0.8

// eliteShare is the share of a generation that is kept by the scalar alone; the rest is kept by rank and crowding of the two objectives.
const eliteShare = 0.25

// Run searches until the generations are used up, Stop says so, or Evaluate fails. The caller keeps its own archive of what Evaluate saw.
func Run(p Problem, s Settings) error {
	config := eaopt.NewDefaultGAConfig()
	config.NPops = 1
	config.PopSize = uint(s.Population)
	config.NGenerations = uint(s.Generations)
	config.HofSize = 1
	config.ParallelEval = false
	m := &model{problem: p, size: s.Population, random: rand.New(source{randv2.NewPCG(s.Seed, 0x9e3779b97f4a7c15)})}
	config.Model = m
	config.RNG = m.random
	generation := -1 // eaopt calls back once after making the first generation, before any is scored
	config.Callback = func(*eaopt.GA) { generation++ }
	config.EarlyStop = func(*eaopt.GA) bool { return generation > 0 && s.Stop != nil && s.Stop(generation) }
	search, err := config.NewGA()
	if err != nil {
		return fmt.Errorf("ga: %w", err)
	}
	next := 0
	err = search.Minimize(func(*rand.Rand) eaopt.Genome {
		g := &genome{problem: p}
		if next < len(s.Starts) {
			g.plan = append([]int(nil), s.Starts[next]...)
			next++
		} else {
			g.plan = p.Random(m.random)
		}
		return g
	})
	if m.err != nil {
		return m.err
	}
	if err == nil && generation == s.Generations && s.Stop != nil {
		s.Stop(generation) // eaopt asks before a generation, hence not after the last
	}
	return err
}

// source lets code that wants the first version of the library draw from a PCG of 128 bits. Everything random is drawn from it: eaopt's own
// generators of a population make seeds that are equal modulo 2³¹−1 the same.
type source struct{ pcg *randv2.PCG }

func (s source) Int63() int64   { return int64(s.pcg.Uint64() >> 1) }
func (s source) Uint64() uint64 { return s.pcg.Uint64() }
func (s source) Seed(int64)     {}

// genome is a plan and its score. eaopt asks for Evaluate one genome at a time; scoring in batches is the model's work, so Evaluate
// gives the rank that the model has set.
type genome struct {
	problem Problem
	plan    []int
	score   Score
	scored  bool
}

// Evaluate gives a placeholder: the model scores and ranks before eaopt sorts.
func (g *genome) Evaluate() (float64, error) { return 0, nil }

// Mutate changes the plan.
func (g *genome) Mutate(r *rand.Rand) {
	g.problem.Mutate(g.plan, r)
	g.scored = false
}

// Crossover changes the receiver only: eaopt passes the mate by value and would keep its old fitness.
func (g *genome) Crossover(mate eaopt.Genome, r *rand.Rand) {
	g.problem.Cross(g.plan, mate.(*genome).plan, r)
	g.scored = false
}

// Clone copies the plan.
func (g *genome) Clone() eaopt.Genome {
	c := *g
	c.plan = append([]int(nil), g.plan...)
	return &c
}

// model makes a generation of the one before: parents by tournament, children by crossing and mutation, survivors of both together.
type model struct {
	problem Problem
	size    int
	random  *rand.Rand
	err     error
}

// Validate has nothing to check.
func (m *model) Validate() error { return nil }

// Apply makes the next generation in place. A panic, which only a mistake of the program's could cause, becomes an error: eaopt calls from
// a goroutine of its own, whose panic the caller could not stop.
func (m *model) Apply(pop *eaopt.Population) (err error) {
	defer func() {
		if fault := recover(); fault != nil {
			err = fmt.Errorf("ga: internal error in a generation: %v\n%s", fault, debug.Stack())
		}
		m.err = err
	}()
	parents := genomes(pop.Individuals)
	if err := m.score(parents); err != nil {
		return err
	}
	children := m.children(parents)
	if err := m.score(children); err != nil {
		return err
	}
	survivors := survive(append(parents, children...), m.size)
	for i := range pop.Individuals {
		pop.Individuals[i].Genome = survivors[i]
		pop.Individuals[i].Fitness = float64(i)
		pop.Individuals[i].Evaluated = true
	}
	return nil
}

// children crosses and mutates parents chosen by tournament: half of them by the scalar, half for the spread of the front.
func (m *model) children(parents []*genome) []*genome {
	order := rank(parents)
	children := make([]*genome, 0, m.size)
	for range m.size {
		scalar := m.random.Intn(2) == 0
		mother := parents[tournament(parents, order, scalar, m.random)]
		father := parents[tournament(parents, order, scalar, m.random)]
		child := mother.Clone().(*genome)
		child.Crossover(father, m.random)
		if m.random.Float64() < mutationRate {
			child.Mutate(m.random)
		}
		children = append(children, child)
	}
	return children
}

func genomes(individuals eaopt.Individuals) []*genome {
	list := make([]*genome, len(individuals))
	for i := range individuals {
		list[i] = individuals[i].Genome.(*genome)
	}
	return list
}

// score evaluates, in one batch, what has no score yet.
func (m *model) score(list []*genome) error {
	var fresh []*genome
	var plans [][]int
	for _, g := range list {
		if !g.scored {
			fresh = append(fresh, g)
			plans = append(plans, g.plan)
		}
	}
	if len(fresh) == 0 {
		return nil
	}
	scores, err := m.problem.Evaluate(plans)
	if err != nil {
		return err
	}
	for i, g := range fresh {
		g.score, g.scored = scores[i], true
	}
	return nil
}
