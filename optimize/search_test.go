package optimize

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"math/rand"
	"os"
	"reflect"
	"slices"
	"strings"
	"sync/atomic"
	"testing"

	"cedewright/portfolio/treaty"

	"pgregory.net/rapid"
)

// shop prices twelve fixed layers on 1,000 years, each bought or not (testdata/oracles/D1_shares_1000x12.json).
type shop struct {
	X     []float64
	A     [][]float64
	Price []float64
	R     float64
	TVaR  float64 `json:"tvar_p"`
	Want  struct {
		None    float64 `json:"no_reinsurance"`
		Integer float64 `json:"integer_optimum"`
		LP      float64 `json:"lp_optimum"`
	} `json:"expected"`
}

// Appraise makes the shop an Evaluator: treaties are named "0" to "11".
func (s shop) Appraise(p treaty.Programme, _ bool) (Appraisal, error) {
	net := slices.Clone(s.X)
	margin := 0.0
	for _, u := range p.Treaties {
		var j int
		fmt.Sscan(u.Name, &j)
		margin += u.Share * s.Price[j]
		for i, a := range s.A[j] {
			net[i] -= u.Share * a
			margin -= u.Share * a / float64(len(net))
		}
	}
	mean := 0.0
	for _, x := range net {
		mean += x / float64(len(net))
	}
	slices.Sort(net)
	worst := 0.0
	for _, x := range net[990:] {
		worst += x / 10
	}
	k := worst - mean
	figure := CapitalFigure{Net: Estimate{Value: k}, Relief: Estimate{Value: 1000 - k}}
	a := Appraisal{Programme: p, Capital: []CapitalFigure{figure}, Driving: figure}
	a.CededMargin.Value, a.CapitalCost.Value, a.TotalCost.Value = margin, s.R*k, margin+s.R*k
	return a, nil
}

func readShop(t testing.TB) shop {
	t.Helper()
	data, err := os.ReadFile("../testdata/oracles/D1_shares_1000x12.json")
	if err != nil {
		t.Fatal(err)
	}
	var s shop
	if err := json.Unmarshal(data, &s); err != nil {
		t.Fatal(err)
	}
	return s
}

func (s shop) space(step float64) Space {
	var space Space
	for j := range s.Price {
		name := fmt.Sprint(j)
		space.Start.Treaties = append(space.Start.Treaties, treaty.Treaty{Name: name, Kind: treaty.EventExcess, Limit: 1, Share: 1})
		space.Vary = append(space.Vary, Vary{Treaty: name, Share: &Range{0, 1, step}})
	}
	return space
}

// TestOracleShop: the proven optimum of 0/1 shares (4,096 programmes, by enumeration and by HiGHS): enumerated here, and found by the genetic
// search on the finer space of shares in steps of a quarter, whose optimum lies between the linear programme's and the integer one.
func TestOracleShop(t *testing.T) {
	s := readShop(t)
	none, err := s.Appraise(treaty.Programme{}, false)
	if err != nil || math.Abs(none.TotalCost.Value/s.Want.None-1) > 1e-9 {
		t.Fatalf("no reinsurance costs %v, want %v", none.TotalCost.Value, s.Want.None)
	}
	proven, err := Search(context.Background(), s, s.space(1), SearchSettings{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(proven.Best.TotalCost.Value/s.Want.Integer-1) > 1e-6 || proven.Status != Proven || proven.Evaluations != 4096 {
		t.Errorf("enumeration gives %v after %d (%v), want %v", proven.Best.TotalCost.Value, proven.Evaluations, proven.Status, s.Want.Integer)
	}
	quarters, err := Search(context.Background(), s, s.space(0.25), SearchSettings{Workers: 2, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	if c := quarters.Best.TotalCost.Value; c > s.Want.Integer+1e-9 || c < s.Want.LP-1e-6 {
		t.Errorf("quarters cost %v, the integer optimum is %v, the linear programme's %v", c, s.Want.Integer, s.Want.LP)
	}
}

// TestSearchFindsTheIntegerOptimum: on the same shop as a space that is searched, not enumerated (a thirteenth layer that nobody would buy), in at
// least 19 of 20 seeds.
func TestSearchFindsTheIntegerOptimum(t *testing.T) {
	s := readShop(t)
	s.A, s.Price = append(s.A, make([]float64, len(s.X))), append(s.Price, 50)
	found := 0
	for seed := range uint64(20) {
		r, err := Search(context.Background(), s, s.space(1), SearchSettings{Workers: 2, Seed: seed, Population: 40, Generations: 40})
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(r.Best.TotalCost.Value/s.Want.Integer-1) < 1e-6 {
			found++
		}
	}
	if found < 19 {
		t.Errorf("the optimum was found in %d of 20 seeds", found)
	}
}

// towerSpace is a space on a random case with a tower, a varied quota share and a constraint.
func towerSpace() Space {
	return Space{
		Start: treaty.Programme{Name: "start", Treaties: []treaty.Treaty{
			{Name: "share", Kind: treaty.QuotaShare, Cession: 0.2, Commission: treaty.Some(0.25)},
			{Name: "low", Kind: treaty.EventExcess, Retention: 20, Limit: 20, Share: 1, Reinstatements: []float64{1}, Curve: "w", After: []string{"share"}},
			{Name: "stop", Kind: treaty.AggregateExcess, Retention: 60, Limit: 40, Share: 1, Curve: "p", After: []string{"low"}},
		}},
		Vary: []Vary{
			{Treaty: "share", Cession: &Range{0, 0.4, 0.1}},
			{Treaty: "stop", Retention: &Range{40, 80, 20}, Optional: true},
		},
		Towers: []Tower{{
			Name: "tower", Template: treaty.Treaty{Kind: treaty.EventExcess, Curve: "w", After: []string{"share"}}, Replaces: []string{"low"}, Layers: 3,
			Retention: Range{10, 40, 0}, Top: Range{30, 120, 0}, Step: 10, Share: Range{0.5, 1, 0.25}, Reinstatements: &ReinstatementRange{0, 2, 1},
		}},
	}
}

func randomAppraiser(t testing.TB, seed uint64) *Appraiser {
	t.Helper()
	a, err := NewAppraiser(randomCase(t, newRand(seed)))
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// TestSearchIsReproducible: same seed, same result to the bit for any number of workers; the frontier is mutually non-dominated; the best is on no
// side of anything better.
func TestSearchIsReproducible(t *testing.T) {
	a := randomAppraiser(t, 5)
	settings := SearchSettings{Seed: 3, Workers: 1, Population: 30, Generations: 15}
	one, err := Search(context.Background(), a, towerSpace(), settings)
	if err != nil {
		t.Fatal(err)
	}
	for _, workers := range []int{2, 3, 8} {
		settings.Workers = workers
		again, err := Search(context.Background(), randomAppraiser(t, 5), towerSpace(), settings)
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(again, one) {
			t.Errorf("%d workers give another result: total cost %v after %d, was %v after %d", workers, again.Best.TotalCost.Value, again.Evaluations, one.Best.TotalCost.Value, one.Evaluations)
		}
	}
	for i, p := range one.Frontier {
		if p.TotalCost.Value < one.Best.TotalCost.Value {
			t.Errorf("programme %d of the frontier is cheaper than the best", i)
		}
		for j, q := range one.Frontier[:i] {
			if p.CededMargin.Value <= q.CededMargin.Value || p.Capital[0].Relief.Value <= q.Capital[0].Relief.Value {
				t.Errorf("programmes %d and %d of the frontier: margins %v, %v, reliefs %v, %v", j, i, q.CededMargin.Value, p.CededMargin.Value, q.Capital[0].Relief.Value, p.Capital[0].Relief.Value)
			}
		}
	}
	if !one.Polished || !one.Feasible {
		t.Errorf("polished %v, feasible %v", one.Polished, one.Feasible)
	}
}

// TestPolishEndsAtALocalOptimum: no neighbour of the best on the steps is better.
func TestPolishEndsAtALocalOptimum(t *testing.T) {
	for seed := range uint64(5) {
		a := randomAppraiser(t, seed)
		c := newCoder(towerSpace())
		r := &run{coder: c, archive: newArchive(context.Background(), a, c, 2), settings: SearchSettings{Evaluations: 1 << 20}.withDefaults()}
		if _, err := r.archive.evaluate([]plan{c.normalise(make(plan, len(c.genes)))}); err != nil {
			t.Fatal(err)
		}
		if done, err := r.polish(); err != nil || !done {
			t.Fatalf("polish: %v, %v", done, err)
		}
		best := r.archive.records[r.archive.best]
		for _, p := range r.singles(best.plan) {
			x, err := a.Appraise(c.decode(p), false)
			if err != nil {
				t.Fatal(err)
			}
			if x.TotalCost.Value < best.cost {
				t.Errorf("seed %d: a neighbour costs %v, the polished best %v", seed, x.TotalCost.Value, best.cost)
			}
		}
	}
}

// cancelling ends a context after so many appraisals.
type cancelling struct {
	Evaluator
	left   atomic.Int64
	cancel context.CancelFunc
}

func (c *cancelling) Appraise(p treaty.Programme, detail bool) (Appraisal, error) {
	if c.left.Add(-1) == 0 {
		c.cancel()
	}
	return c.Evaluator.Appraise(p, detail)
}

func TestInterruptedSearch(t *testing.T) {
	for _, after := range []int64{1, 50, 200} {
		ctx, cancel := context.WithCancel(context.Background())
		e := &cancelling{Evaluator: randomAppraiser(t, 5), cancel: cancel}
		e.left.Store(after)
		r, err := Search(ctx, e, towerSpace(), SearchSettings{Workers: 2, Population: 30})
		cancel()
		if err != nil || r.Status != Interrupted || r.Evaluations == 0 || r.Polished || r.Best.TotalCost.Value == 0 {
			t.Errorf("interrupted after %d: %v, status %v, %d evaluations", after, err, r.Status, r.Evaluations)
		}
	}
}

// broken panics or fails in the middle.
type broken struct {
	Evaluator
	left  atomic.Int64
	panic bool
}

func (b *broken) Appraise(p treaty.Programme, detail bool) (Appraisal, error) {
	if b.left.Add(-1) == 0 {
		if b.panic {
			panic("a mistake")
		}
		return Appraisal{}, fmt.Errorf("a failure")
	}
	return b.Evaluator.Appraise(p, detail)
}

func TestFailureInAnAppraisal(t *testing.T) {
	for _, panics := range []bool{false, true} {
		b := &broken{Evaluator: randomAppraiser(t, 5), panic: panics}
		b.left.Store(100)
		_, err := Search(context.Background(), b, towerSpace(), SearchSettings{Workers: 2, Population: 30})
		if err == nil || !strings.Contains(err.Error(), map[bool]string{false: "a failure", true: "a mistake"}[panics]) {
			t.Errorf("error %v", err)
		}
	}
}

func TestConstraints(t *testing.T) {
	a := randomAppraiser(t, 5)
	free, err := Search(context.Background(), a, towerSpace(), SearchSettings{Population: 40, Generations: 30})
	if err != nil {
		t.Fatal(err)
	}
	space := towerSpace()
	bound := free.Best.Capital[0].Net.Value * 0.9
	space.Keep = []Keep{{Measure: "required capital", AtMost: treaty.Some(bound)}}
	kept, err := Search(context.Background(), a, space, SearchSettings{Population: 40, Generations: 30})
	if err != nil {
		t.Fatal(err)
	}
	if !kept.Feasible || kept.Best.Capital[0].Net.Value > bound || kept.Best.TotalCost.Value < free.Best.TotalCost.Value {
		t.Errorf("feasible %v, capital %v of at most %v, cost %v against %v without", kept.Feasible, kept.Best.Capital[0].Net.Value, bound, kept.Best.TotalCost.Value, free.Best.TotalCost.Value)
	}
	space.Keep = append(space.Keep, Keep{Measure: "ceded premium", AtMost: treaty.Some(0.0)}, Keep{Measure: "mean result", AtLeast: treaty.Some(-1e6)})
	none, err := Search(context.Background(), a, space, SearchSettings{Population: 40, Generations: 30})
	if err != nil {
		t.Fatal(err)
	}
	if none.Feasible || len(none.Shortfalls) == 0 || len(none.Frontier) != 0 || none.Shortfalls[0].Keep.Measure == "mean result" {
		t.Errorf("nothing is feasible, but: %v, %+v, %d on the frontier", none.Feasible, none.Shortfalls, len(none.Frontier))
	}
	for _, m := range MeasureNames() {
		k := Keep{Measure: m, AtMost: treaty.Some(1e12), AtLeast: treaty.Some(-1e12)}
		if v := k.violation(free.Best); v != 0 {
			t.Errorf("%s: violation %v within wide bounds", m, v)
		}
	}
}

// TestOperatorsKeepPlans: random plans, crossings and mutations stay in canonical form, decode to valid programmes, and come back when encoded.
func TestOperatorsKeepPlans(t *testing.T) {
	space := towerSpace()
	c := newCoder(space)
	rapid.Check(t, func(t *rapid.T) {
		r := rand.New(rand.NewSource(rapid.Int64().Draw(t, "seed")))
		p, mate := c.random(r), c.random(r)
		before := append(plan(nil), mate...)
		c.cross(p, mate, r)
		if !slices.Equal(mate, before) {
			t.Fatal("the mate was changed")
		}
		c.mutate(p, r)
		if q := c.normalise(append(plan(nil), p...)); !slices.Equal(p, q) {
			t.Fatalf("%v is not canonical, %v is", p, q)
		}
		programme := c.decode(p)
		if err := programme.Validate([]string{"a"}, nil); err != nil {
			t.Fatalf("%v: %v", p, err)
		}
		back, moved := c.encode(programme)
		if !slices.Equal(back, p) || moved {
			// Shares of 0 cannot be told from what is left out, and a tower that is not bought has no layers to read.
			t.Fatalf("%v came back as %v (moved %v)\n%+v", p, back, moved, programme)
		}
		var layers []treaty.Treaty
		for _, u := range programme.Treaties {
			if strings.HasPrefix(u.Name, "tower ") {
				layers = append(layers, u)
			}
		}
		for i, l := range layers {
			if i > 0 && l.Retention != layers[i-1].Retention+layers[i-1].Limit {
				t.Fatalf("layers do not touch: %+v", layers)
			}
			if i == 0 && l.Retention > 40 || i == len(layers)-1 && l.Retention+l.Limit < 30 {
				t.Fatalf("the tower leaves its ranges: %+v", layers)
			}
		}
	})
}

func TestSpaceValidate(t *testing.T) {
	if err := towerSpace().Validate(); err != nil {
		t.Fatal(err)
	}
	for message, spoil := range map[string]func(s *Space){
		`vary[0].treaty: the start programme has no treaty named "shar"`: func(s *Space) { s.Vary[0].Treaty = "shar" },
		`did you mean "share"?`:                                               func(s *Space) { s.Vary[0].Treaty = "shar" },
		`vary[1].treaty: "share" is varied twice`:                             func(s *Space) { s.Vary[1] = s.Vary[0] },
		`vary[1].treaty: "low" is replaced by a tower`:                        func(s *Space) { s.Vary[1] = Vary{Treaty: "low", Share: &Range{0, 1, 0.5}} },
		`vary[0].retention: given for the kind quota-share`:                   func(s *Space) { s.Vary[0].Retention = &Range{0, 1, 1} },
		`vary[0].cession: from 0 to 1.4`:                                      func(s *Space) { s.Vary[0].Cession.To = 1.4 },
		`vary[0].cession.step: 0; allowed: above 0`:                           func(s *Space) { s.Vary[0].Cession.Step = 0 },
		`vary[0].cession.step: 4000000 values; allowed: at most 10,000 value`: func(s *Space) { s.Vary[0].Cession.Step = 1e-7 },
		`towers[0].layers: 0; allowed: from 1 to 20`:                          func(s *Space) { s.Towers[0].Layers = 0 },
		`towers[0].kind: quota-share`:                                         func(s *Space) { s.Towers[0].Template.Kind = treaty.QuotaShare },
		`towers[0].step: 0; allowed: money above 0`:                           func(s *Space) { s.Towers[0].Step = 0 },
		`towers[0].reinstatements: from 2 to 1`:                               func(s *Space) { s.Towers[0].Reinstatements = &ReinstatementRange{2, 1, 1} },
		`keep[0].measure: "ceded premum" is not a measure`:                    func(s *Space) { s.Keep = []Keep{{Measure: "ceded premum", AtMost: treaty.Some(1)}} },
		`keep[0]: no bound`:                                                   func(s *Space) { s.Keep = []Keep{{Measure: "ceded premium"}} },
		`search: nothing to vary`:                                             func(s *Space) { s.Vary, s.Towers = nil, nil },
	} {
		s := towerSpace()
		cession := *s.Vary[0].Cession
		s.Vary[0].Cession = &cession
		spoil(&s)
		if err := s.Validate(); err == nil || !strings.Contains(err.Error(), message) {
			t.Errorf("got %v\nwant %s", err, message)
		}
	}
	uneven := towerSpace()
	uneven.Vary[0].Cession = &Range{0, 0.45, 0.2}
	if notes := uneven.Rounded(); len(notes) != 1 || !strings.Contains(notes[0], "end at 0.4, not at 0.45") {
		t.Errorf("notes %v", notes)
	}
	for _, settings := range []SearchSettings{{Population: 1}, {Generations: -1}, {Workers: 5000}, {Patience: -2}} {
		if _, err := Search(context.Background(), shop{}, towerSpace(), settings); err == nil {
			t.Errorf("%+v was accepted", settings)
		}
	}
}

// TestSize counts the plans of a small space by enumeration.
func TestSize(t *testing.T) {
	space := Space{Towers: []Tower{{
		Name: "t", Template: treaty.Treaty{Kind: treaty.EventExcess, Curve: "w"}, Layers: 2, Retention: Range{10, 20, 0}, Top: Range{30, 50, 0}, Step: 10,
		Share: Range{0.5, 1, 0.5}, Reinstatements: &ReinstatementRange{0, 1, 1},
	}}}
	r, err := Search(context.Background(), randomAppraiser(t, 5), space, SearchSettings{})
	if err != nil {
		t.Fatal(err)
	}
	if float64(r.Evaluations) != space.Size() || r.Status != Proven {
		t.Errorf("%d programmes enumerated, size %v", r.Evaluations, space.Size())
	}
}
