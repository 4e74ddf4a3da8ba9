package loss

import (
	"cmp"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"golang.org/x/sync/errgroup"
)

// block is the count of years that share one stream of random numbers.
const block = 1024

// Share is the part of an event's loss that falls on a class.
type Share struct {
	Class    string
	Fraction float64 // above 0; the fractions of a split add up to 1
}

// Model simulates the events of one peril.
type Model struct {
	Name      string // of its own; the stream of random numbers hangs on it
	Peril     string
	Frequency Frequency
	Severity  Severity // of the whole event; nil when History is given
	Split     []Share  // over classes; empty when History is given
	History   *EventHistory
	PerRisk   bool // every event strikes one risk
}

// Validate reports the first fault of a model for a book with these classes.
func (m Model) Validate(classes []string) error {
	if m.Name == "" || m.Peril == "" || m.Frequency == nil {
		return fmt.Errorf("loss: model %q needs a name, a peril and a frequency", m.Name)
	}
	if m.History != nil {
		return m.History.validate(m.Name, classes)
	}
	if m.Severity == nil || len(m.Split) == 0 {
		return fmt.Errorf("loss: model %q needs a severity and a split over classes", m.Name)
	}
	sum := 0.0
	for _, s := range m.Split {
		if !slices.Contains(classes, s.Class) {
			return fmt.Errorf("loss: model %q: no class of the book is named %q", m.Name, s.Class)
		}
		if !(s.Fraction > 0 && s.Fraction <= 1) {
			return fmt.Errorf("loss: model %q: share of class %q is %v, must be above 0 and at most 1", m.Name, s.Class, s.Fraction)
		}
		sum += s.Fraction
	}
	if math.Abs(sum-1) > 1e-9 {
		return fmt.Errorf("loss: model %q: the shares of its split add up to %.6g, must be 1", m.Name, sum)
	}
	return nil
}

// stream gives the random numbers of one model in one block of years: they depend on nothing else than the seed.
func stream(seed uint64, name string, number int) *rand.Rand {
	var head [16]byte
	binary.LittleEndian.PutUint64(head[:8], seed)
	binary.LittleEndian.PutUint64(head[8:], uint64(number))
	sum := sha256.Sum256(append(head[:], name...))
	return rand.New(rand.NewPCG(binary.LittleEndian.Uint64(sum[:8]), binary.LittleEndian.Uint64(sum[8:16])))
}

// Simulate adds to the rows taken so far the events of models and the attritional losses (nil = none), and gives the table. The figures
// depend on the seed, the models and the years only, not on the number of workers (at least 1), nor does a further model change those
// of another.
func (b *Builder) Simulate(seed uint64, models []Model, attritional *Attritional, workers int) (*Table, error) {
	if b.years < 1 || b.years > math.MaxInt32 {
		return nil, fmt.Errorf("loss: simulate: %d years, must be from 1 to %d", b.years, math.MaxInt32)
	}
	if len(b.classes) == 0 || len(b.classes) > math.MaxUint16 {
		return nil, fmt.Errorf("loss: simulate: %d classes, must be from 1 to %d", len(b.classes), math.MaxUint16)
	}
	plan := &simulation{b: b, seed: seed, models: slices.Clone(models)}
	slices.SortFunc(plan.models, func(x, y Model) int { return cmp.Compare(x.Name, y.Name) })
	for i, m := range plan.models {
		if err := m.Validate(b.classes); err != nil {
			return nil, err
		}
		if i > 0 && m.Name == plan.models[i-1].Name {
			return nil, fmt.Errorf("loss: simulate: two models named %q", m.Name)
		}
	}
	if attritional != nil {
		prepared, err := attritional.prepare(b.class)
		if err != nil {
			return nil, err
		}
		plan.attritional = prepared
	}
	plan.number()
	plan.offsets, plan.order = b.tabled()
	blocks := make([]Columns, (b.years+block-1)/block)
	var group errgroup.Group
	group.SetLimit(max(workers, 1))
	for i := range blocks {
		group.Go(func() (err error) {
			blocks[i], err = plan.block(i)
			return err
		})
	}
	if err := group.Wait(); err != nil {
		return nil, err
	}
	return &Table{classes: slices.Clone(b.classes), perils: plan.perils, columns: joined(blocks, b.years)}, nil
}

// simulation is what the blocks of years share.
type simulation struct {
	b           *Builder
	seed        uint64
	models      []Model // by name
	attritional *attritionalPlan
	perils      []string // all, by alphabet
	tablePeril  []uint16 // of the builder's perils, their place in perils
	modelPeril  []uint16
	quietPeril  uint16 // place of the attritional peril
	eventRank   []int32
	riskRank    []int32
	offsets     []int
	order       []int32
}

// number sets the places of all perils, and of events and risks with texts, by alphabet.
func (p *simulation) number() {
	all := slices.Clone(p.b.perils.list)
	for _, m := range p.models {
		all = append(all, m.Peril)
	}
	if p.attritional != nil {
		all = append(all, AttritionalPeril)
	}
	slices.Sort(all)
	p.perils = slices.Compact(all)
	place := func(name string) uint16 {
		i, _ := slices.BinarySearch(p.perils, name)
		return uint16(i)
	}
	for _, name := range p.b.perils.list {
		p.tablePeril = append(p.tablePeril, place(name))
	}
	for _, m := range p.models {
		p.modelPeril = append(p.modelPeril, place(m.Peril))
	}
	p.quietPeril = place(AttritionalPeril)
	p.eventRank, p.riskRank = p.b.events.ranks(), p.b.risks.ranks()
}

// canonical is a row on its way to its place: event and risk are keys that sort the same whatever the order of reading.
type canonical struct {
	source int32 // 0 = tables, then the models by name
	event  int64 // 0 = attritional
	risk   int64
	class  uint16
	peril  uint16
	loss   float64
}

func compareRows(a, b canonical) int {
	return cmp.Or(cmp.Compare(a.source, b.source), cmp.Compare(a.event, b.event), cmp.Compare(a.class, b.class),
		cmp.Compare(a.peril, b.peril), cmp.Compare(a.risk, b.risk), cmp.Compare(a.loss, b.loss))
}

// ranked replaces the number of a text by its place by alphabet; whole numbers stand for themselves.
func ranked(key int64, ranks []int32) int64 {
	if key == 0 || key%2 == 1 {
		return key
	}
	return 2 * int64(ranks[key/2-1]+1)
}

// errTooManyEvents stops a frequency that would fill the memory.
var errTooManyEvents = errors.New("more than 100,000 events in a year: the frequency is too high for a model of single events; use attritional losses")

// block simulates the years of one block, sorts them and gives them as columns with offsets from 0.
func (p *simulation) block(number int) (Columns, error) {
	first := number * block
	last := min(first+block, p.b.years)
	byYear := make([][]canonical, last-first)
	for y := first; y < last; y++ {
		for _, i := range p.order[p.offsets[y]:p.offsets[y+1]] {
			r := p.b.rows[i]
			byYear[y-first] = append(byYear[y-first], canonical{
				event: ranked(r.event, p.eventRank), risk: ranked(r.risk, p.riskRank), class: r.class, peril: p.tablePeril[r.peril], loss: r.loss})
		}
	}
	for m, model := range p.models {
		r := stream(p.seed, "model "+model.Name, number)
		for y := range byYear {
			events := model.Frequency.Draw(r)
			if events > 100000 {
				return Columns{}, fmt.Errorf("loss: model %q: %w", model.Name, errTooManyEvents)
			}
			for e := range events {
				row := canonical{source: int32(m + 1), event: int64(e + 1), peril: p.modelPeril[m]}
				if model.PerRisk {
					row.risk = 1
				}
				byYear[y] = model.appendEvent(byYear[y], row, p.b.class, r)
			}
		}
	}
	if p.attritional != nil {
		r := stream(p.seed, "attritional", number)
		for y := range byYear {
			byYear[y] = p.attritional.appendYear(byYear[y], p.quietPeril, r)
		}
	}
	return columnsOf(byYear), nil
}

// appendEvent draws one event and appends its rows.
func (m Model) appendEvent(rows []canonical, row canonical, class map[string]uint16, r *rand.Rand) []canonical {
	if m.History != nil {
		return m.History.appendEvent(rows, row, class, r)
	}
	total := m.Severity.Draw(r)
	for _, s := range m.Split {
		if row.class, row.loss = class[s.Class], total*s.Fraction; row.loss > 0 {
			rows = append(rows, row)
		}
	}
	return rows
}

// columnsOf sorts the rows of each year and numbers the events and risks within it.
func columnsOf(byYear [][]canonical) Columns {
	count := 0
	for _, rows := range byYear {
		count += len(rows)
	}
	c := Columns{
		Offset: make([]int, 1, len(byYear)+1),
		Event:  make([]int32, 0, count), Class: make([]uint16, 0, count), Peril: make([]uint16, 0, count),
		Risk: make([]int32, 0, count), Loss: make([]float64, 0, count),
	}
	for _, rows := range byYear {
		slices.SortFunc(rows, compareRows)
		event := int32(0)
		var risks []int64
		for i, r := range rows {
			if r.event != 0 && (i == 0 || r.source != rows[i-1].source || r.event != rows[i-1].event) {
				event++
				risks = risks[:0]
			}
			number, risk := NoEvent, NoRisk
			if r.event != 0 {
				number = event
			}
			if r.risk != 0 {
				k := slices.Index(risks, r.risk)
				if k < 0 {
					k = len(risks)
					risks = append(risks, r.risk)
				}
				risk = int32(k + 1)
			}
			c.Event, c.Class, c.Peril = append(c.Event, number), append(c.Class, r.class), append(c.Peril, r.peril)
			c.Risk, c.Loss = append(c.Risk, risk), append(c.Loss, r.loss)
		}
		c.Offset = append(c.Offset, len(c.Loss))
	}
	return c
}

// joined puts the blocks one after another.
func joined(blocks []Columns, years int) Columns {
	count := 0
	for _, b := range blocks {
		count += len(b.Loss)
	}
	c := Columns{
		Offset: make([]int, 1, years+1),
		Event:  make([]int32, 0, count), Class: make([]uint16, 0, count), Peril: make([]uint16, 0, count),
		Risk: make([]int32, 0, count), Loss: make([]float64, 0, count),
	}
	for i, b := range blocks {
		start := len(c.Loss)
		for _, o := range b.Offset[1:] {
			c.Offset = append(c.Offset, start+o)
		}
		c.Event, c.Class, c.Peril = append(c.Event, b.Event...), append(c.Class, b.Class...), append(c.Peril, b.Peril...)
		c.Risk, c.Loss = append(c.Risk, b.Risk...), append(c.Loss, b.Loss...)
		blocks[i] = Columns{}
	}
	return c
}
