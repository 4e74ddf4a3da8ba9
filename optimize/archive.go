package optimize

import (
	"context"
	"fmt"
	"runtime/debug"
	"sync"

	"cedewright/optimize/internal/ga"
	"cedewright/portfolio/treaty"
)

// Evaluator appraises programmes; Appraiser is one. Appraise must be safe for concurrent use, and its figures may depend on nothing but
// the programme.
type Evaluator interface {
	Appraise(p treaty.Programme, detail bool) (Appraisal, error)
}

// record is what the archive keeps of a plan that was appraised.
type record struct {
	plan      plan
	margin    float64 // ceded margin, money per year
	relief    float64 // capital relief under the first standard, money
	cost      float64 // total cost, money per year
	violation float64 // 0 = feasible
}

func (r record) score() ga.Score {
	return ga.Score{Objectives: [2]float64{r.margin, -r.relief}, Scalar: r.cost, Violation: r.violation}
}

// cheaper compares by violation, then total cost, then ceded margin, so that of equal plans the simpler bargain wins.
func (r record) cheaper(o record) bool {
	switch {
	case r.violation != o.violation:
		return r.violation < o.violation
	case r.cost != o.cost:
		return r.cost < o.cost
	}
	return r.margin < o.margin
}

// archive appraises plans, each distinct one once, and keeps what came out, in the order in which plans were first asked for, which does
// not depend on the number of workers.
type archive struct {
	ctx       context.Context
	evaluator Evaluator
	coder     *coder
	workers   int
	index     map[string]int
	records   []record
	best      int // place of the best record; −1 before the first
	asked     int // plans asked for, repetitions included
}

func newArchive(ctx context.Context, e Evaluator, c *coder, workers int) *archive {
	return &archive{ctx: ctx, evaluator: e, coder: c, workers: max(workers, 1), index: map[string]int{}, best: -1}
}

// evaluate gives the records of plans, in their order. It appraises the new ones on all workers. When the context ends, it gives the
// context's error and keeps nothing of this batch, so that what is kept stays the same for any number of workers.
func (a *archive) evaluate(plans []plan) ([]record, error) {
	a.asked += len(plans)
	var fresh []plan
	pending := map[string]bool{}
	for _, p := range plans {
		key := p.key()
		if _, ok := a.index[key]; !ok && !pending[key] {
			pending[key] = true
			fresh = append(fresh, append(plan(nil), p...))
		}
	}
	found, err := a.appraise(fresh)
	if err != nil {
		return nil, err
	}
	for _, r := range found {
		a.index[r.plan.key()] = len(a.records)
		a.records = append(a.records, r)
		if a.best < 0 || r.cheaper(a.records[a.best]) {
			a.best = len(a.records) - 1
		}
	}
	records := make([]record, len(plans))
	for i, p := range plans {
		records[i] = a.records[a.index[p.key()]]
	}
	return records, nil
}

// appraise spreads plans over the workers.
func (a *archive) appraise(plans []plan) ([]record, error) {
	records := make([]record, len(plans))
	errs := make([]error, len(plans))
	next := make(chan int)
	var group sync.WaitGroup
	for range min(a.workers, len(plans)) {
		group.Go(func() {
			for i := range next {
				if a.ctx.Err() == nil {
					records[i], errs[i] = a.appraiseOne(plans[i])
				}
			}
		})
	}
	for i := range plans {
		next <- i
	}
	close(next)
	group.Wait()
	if err := a.ctx.Err(); err != nil {
		return nil, err
	}
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	return records, nil
}

// appraiseOne appraises one plan. A panic, which only a mistake of the program's could cause, becomes an error: in a worker it would
// otherwise end the process without a word.
func (a *archive) appraiseOne(p plan) (r record, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			err = fmt.Errorf("optimize: search: internal error in the appraisal of a plan: %v\n%s", fault, debug.Stack())
		}
	}()
	result, err := a.evaluator.Appraise(a.coder.decode(p), false)
	if err != nil {
		return record{}, err
	}
	return record{
		plan: p, margin: result.CededMargin.Value, relief: result.Driving.Relief.Value, cost: result.TotalCost.Value, violation: a.coder.space.violation(result),
	}, nil
}
