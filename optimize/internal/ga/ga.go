package ga

import (
	"fmt"
	"math/rand"
	randv2 "math/rand/v2"

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

// MutationRate is the share of children that are mutated after crossing; all others are crossings alone.
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
	m := &model{problem: p, size: s.Population}
	config.Model = m
	config.RNG = rand.New(source{randv2.NewPCG(s.Seed, 0x9e3779b97f4a7c15)})
	generation := -1 // eaopt calls back once after making the first generation, before any is scored
	config.Callback = func(*eaopt.GA) { generation++ }
	config.EarlyStop = func(*eaopt.GA) bool { return generation > 0 && s.Stop != nil && s.Stop(generation) }
	search, err := config.NewGA()
	if err != nil {
		return fmt.Errorf("ga: %w", err)
	}
	next := 0
	err = search.Minimize(func(r *rand.Rand) eaopt.Genome {
		g := &genome{problem: p}
		if next < len(s.Starts) {
			g.plan = append([]int(nil), s.Starts[next]...)
			next++
		} else {
			g.plan = p.Random(r)
		}
		return g
	})
	if m.err != nil {
		return m.err
	}
	return err
}

// source lets eaopt, which wants the first version of the library, draw from a PCG of 128 bits: its own source would make seeds that are
// equal modulo 2³¹−1 the same.
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
	err     error
}

// Validate has nothing to check.
func (m *model) Validate() error { return nil }

// Apply makes the next generation in place.
func (m *model) Apply(pop *eaopt.Population) error {
	parents := genomes(pop.Individuals)
	if err := m.score(parents); err != nil {
		m.err = err
		return err
	}
	order := rank(parents)
	children := make([]*genome, 0, m.size)
	for range m.size {
		scalar := pop.RNG.Intn(2) == 0 // half of the parents are chosen by the scalar, half for the spread of the front
		mother := parents[tournament(parents, order, scalar, pop.RNG)]
		father := parents[tournament(parents, order, scalar, pop.RNG)]
		child := mother.Clone().(*genome)
		child.Crossover(father, pop.RNG)
		if pop.RNG.Float64() < mutationRate {
			child.Mutate(pop.RNG)
		}
		children = append(children, child)
	}
	if err := m.score(children); err != nil {
		m.err = err
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
	scores, err := m.problem.Evaluate(plans)
	if err != nil {
		return err
	}
	for i, g := range fresh {
		g.score, g.scored = scores[i], true
	}
	return nil
}
