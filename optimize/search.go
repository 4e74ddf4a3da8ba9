package optimize

import (
	"context"
	"errors"
	"fmt"
	"math/rand"

	"cedewright/optimize/internal/ga"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// SearchSettings say how long and how a search looks. A field of 0 takes its default.
type SearchSettings struct {
	Seed        uint64 // 0 is an ordinary seed
	Population  int    // plans in a generation; default 100
	Generations int    // at most; default 200
	Evaluations int    // distinct programmes at most, looked at between generations; default 20,000
	Patience    int    // generations without a better total cost and without a change of the frontier's ends before it stops; default 30
	Workers     int    // goroutines that appraise; at least 1; never changes a result
	Frontier    int    // programmes of the frontier given at most; default 60
	Progress    func(Progress)
}

// Defaults of SearchSettings.
const (
	DefaultPopulation  = 100
	DefaultGenerations = 200
	DefaultEvaluations = 20000
	DefaultPatience    = 30
	DefaultFrontier    = 60
)

func (s SearchSettings) withDefaults() SearchSettings {
	for _, f := range []struct {
		field *int
		value int
	}{
		{&s.Population, DefaultPopulation}, {&s.Generations, DefaultGenerations}, {&s.Evaluations, DefaultEvaluations},
		{&s.Patience, DefaultPatience}, {&s.Frontier, DefaultFrontier}, {&s.Workers, 1},
	} {
		if *f.field == 0 {
			*f.field = f.value
		}
	}
	return s
}

func (s SearchSettings) validate() error {
	var faults fault.List
	for _, f := range []struct {
		key   string
		value int
		least int
		most  int
	}{
		{"population", s.Population, 4, 10000}, {"generations", s.Generations, 1, 1000000}, {"evaluations", s.Evaluations, 1, 100000000},
		{"patience", s.Patience, 1, 1000000}, {"workers", s.Workers, 1, 4096}, {"frontier", s.Frontier, 2, 10000},
	} {
		if f.value < f.least || f.value > f.most {
			faults.Add(fault.Fault{Key: "search." + f.key, Found: fmt.Sprint(f.value), Allowed: fmt.Sprintf("a whole number from %d to %d", f.least, f.most)})
		}
	}
	return faults.Err()
}

// Progress says how far a search is.
type Progress struct {
	Phase       string  // "search", "polish" or "detail"
	Done, Total int     // of the phase: generations at most, rounds, programmes
	Evaluations int     // distinct programmes appraised
	TotalCost   float64 // of the best so far, money per year
	Feasible    bool
}

// Status says why a search ended.
type Status uint8

// The ways in which a search ends.
const (
	Proven      Status = iota + 1 // every programme of the space was appraised
	Settled                       // no better programme for as many generations as patience says
	OutOfBudget                   // generations or evaluations are used up
	Interrupted                   // the caller ended it; the best so far is valid
)

// String says it in words.
func (s Status) String() string {
	switch s {
	case Proven:
		return "every programme of the space was appraised"
	case Settled:
		return "no better programme was found for a while"
	case OutOfBudget:
		return "the budget is used up"
	case Interrupted:
		return "interrupted; the best so far"
	}
	return fmt.Sprintf("Status(%d)", uint8(s))
}

// Result is what a search found.
type Result struct {
	Best        Appraisal   // with detail
	Feasible    bool        // Best keeps every constraint
	Shortfalls  []Shortfall // the constraints that Best breaks when no feasible programme was found
	Frontier    []Appraisal // with detail; mutually non-dominated in ceded margin and relief under the first standard, by rising relief
	Evaluations int         // distinct programmes appraised
	Generations int
	Seed        uint64
	Status      Status
	Polished    bool     // no single move on the steps improves Best
	SpaceSize   float64  // programmes in the space (upper bound)
	Notes       []string // what was rounded or moved
}

// enumerationLimit is the size of a space up to which all its programmes are appraised instead of searched.
const enumerationLimit = 4096

// Search looks for the programme of the space with the least total cost that keeps the constraints, and for the frontier of ceded margin
// against capital relief, in one genetic search (eaopt; non-dominated sorting with crowding after Deb et al. 2002), which starts from the
// space's start programme and no cover, and ends with a local polish on the steps. Small spaces are enumerated.
//
// The result depends on the space, the evaluator, the seed and the budget, not on the number of workers. When the context ends, the best
// so far is given, with status Interrupted. When nothing feasible was found, Best is the programme that breaks the constraints least.
func Search(ctx context.Context, e Evaluator, space Space, settings SearchSettings) (Result, error) {
	settings = settings.withDefaults()
	if err := errors.Join(space.Validate(), settings.validate()); err != nil {
		return Result{}, err
	}
	c := newCoder(space)
	run := &run{coder: c, archive: newArchive(ctx, e, c, settings.Workers), settings: settings}
	result := Result{Seed: settings.Seed, SpaceSize: c.size(), Notes: space.Rounded()}
	start, moved := c.encode(space.Start)
	if moved {
		result.Notes = append(result.Notes, fmt.Sprintf("the start programme %q is not in the space; the search starts from its nearest member", space.Start.Name))
	}
	var err error
	if result.SpaceSize <= enumerationLimit {
		err = run.enumerate()
		result.Status, result.Polished = Proven, true
	} else {
		err = run.search(start)
		result.Status = run.status
		if err == nil {
			result.Polished, err = run.polish()
		}
	}
	if errors.Is(err, context.Canceled) || errors.Is(err, context.DeadlineExceeded) {
		result.Status, result.Polished = Interrupted, false
		err = run.atLeastOne(start)
	}
	if err != nil {
		return Result{}, err
	}
	result.Evaluations, result.Generations = len(run.archive.records), run.generation
	return run.finish(result, e)
}

// run is one search under way.
type run struct {
	coder      *coder
	archive    *archive
	settings   SearchSettings
	generation int
	status     Status
	still      int // generations without improvement
	last       [3]float64
}

// atLeastOne makes sure that an interrupted search has something to show.
func (r *run) atLeastOne(start plan) error {
	if len(r.archive.records) > 0 {
		return nil
	}
	r.archive.ctx = context.Background()
	_, err := r.archive.evaluate([]plan{start})
	return err
}

func (r *run) report(phase string, done, total int) {
	if r.settings.Progress == nil {
		return
	}
	p := Progress{Phase: phase, Done: done, Total: total, Evaluations: len(r.archive.records)}
	if b := r.archive.best; b >= 0 {
		p.TotalCost, p.Feasible = r.archive.records[b].cost, r.archive.records[b].violation == 0
	}
	r.settings.Progress(p)
}

// enumerate appraises every plan.
func (r *run) enumerate() error {
	p := make(plan, len(r.coder.genes))
	seen := map[string]bool{}
	var plans []plan
	for {
		if q := r.coder.normalise(append(plan(nil), p...)); !seen[q.key()] {
			seen[q.key()] = true
			plans = append(plans, q)
		}
		i := 0
		for ; i < len(p); i++ {
			if p[i]++; p[i] < r.coder.genes[i].count {
				break
			}
			p[i] = 0
		}
		if i == len(p) {
			break
		}
	}
	const batch = 256
	for first := 0; first < len(plans); first += batch {
		if _, err := r.archive.evaluate(plans[first:min(first+batch, len(plans))]); err != nil {
			return err
		}
		r.report("search", min(first+batch, len(plans)), len(plans))
	}
	return nil
}

// search runs the genetic search.
func (r *run) search(start plan) error {
	r.status = OutOfBudget
	none := make(plan, len(r.coder.genes))
	starts := [][]int{start, r.coder.normalise(none)}
	err := ga.Run(r, ga.Settings{
		Population: r.settings.Population, Generations: r.settings.Generations, Seed: r.settings.Seed, Starts: starts, Stop: r.stop,
	})
	return err
}

// stop notes a generation and tells whether the search should end.
func (r *run) stop(generation int) bool {
	r.generation = generation
	r.report("search", generation, r.settings.Generations)
	now := r.ends()
	if now == r.last {
		r.still++
	} else {
		r.still, r.last = 0, now
	}
	switch {
	case r.still >= r.settings.Patience:
		r.status = Settled
		return true
	case len(r.archive.records) >= r.settings.Evaluations:
		r.status = OutOfBudget
		return true
	}
	return false
}

// ends gives the best total cost and the ends of the frontier so far.
func (r *run) ends() [3]float64 {
	best := r.archive.records[r.archive.best]
	now := [3]float64{best.cost, best.margin, best.relief}
	for _, q := range r.archive.records {
		if q.violation == 0 {
			now[1], now[2] = min(now[1], q.margin), max(now[2], q.relief)
		}
	}
	return now
}

// Random, Cross, Mutate and Evaluate make a run a ga.Problem.

// Random draws a plan.
func (r *run) Random(random *rand.Rand) []int { return r.coder.random(random) }

// Cross takes parts of the mate into the receiver.
func (r *run) Cross(receiver, mate []int, random *rand.Rand) { r.coder.cross(receiver, mate, random) }

// Mutate changes a plan.
func (r *run) Mutate(p []int, random *rand.Rand) { r.coder.mutate(p, random) }

// Evaluate scores plans.
func (r *run) Evaluate(plans [][]int) ([]ga.Score, error) {
	list := make([]plan, len(plans))
	for i, p := range plans {
		list[i] = p
	}
	records, err := r.archive.evaluate(list)
	if err != nil {
		return nil, err
	}
	scores := make([]ga.Score, len(records))
	for i, q := range records {
		scores[i] = q.score()
	}
	return scores, nil
}

// finish appraises the best and the frontier with detail.
func (r *run) finish(result Result, e Evaluator) (Result, error) {
	best := r.archive.records[r.archive.best]
	result.Feasible = best.violation == 0
	frontier := thin(nonDominated(r.archive.records), r.settings.Frontier, best.plan.key())
	programmes := []treaty.Programme{r.coder.decode(best.plan)}
	programmes[0].Name = "best found"
	for i, q := range frontier {
		p := r.coder.decode(q.plan)
		p.Name = fmt.Sprintf("frontier %d", i+1)
		programmes = append(programmes, p)
	}
	appraisals, err := AppraiseAll(e, programmes, r.settings.Workers, func(done int) { r.report("detail", done, len(programmes)) })
	if err != nil {
		return Result{}, err
	}
	result.Best, result.Frontier = appraisals[0], appraisals[1:]
	if !result.Feasible {
		result.Shortfalls = r.coder.space.shortfalls(result.Best)
	}
	return result, nil
}
