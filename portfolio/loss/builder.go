package loss

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"cedewright/portfolio/fault"
)

// Row is one loss as a source gives it.
type Row struct {
	Year  int     // from 1
	Event string  // "" = attritional
	Class string  // name of a class of the book
	Peril string  // "" = attritional
	Risk  string  // "" = no single risk
	Loss  float64 // money, ≥ 0; rows of loss 0 are dropped
}

// AttritionalPeril is the peril of rows that name none.
const AttritionalPeril = "attritional"

// Builder collects rows, in any order, for a table. Rows with the same year and the same event text belong to the same event, whichever
// table they come from.
type Builder struct {
	years   int
	classes []string
	class   map[string]uint16
	perils  names
	events  names
	risks   names
	rows    []rawRow
	years32 []int32 // year index of each row
}

// rawRow is a row with its texts replaced by numbers. Texts that are whole numbers stand for themselves, so that the canonical order
// does not depend on the order of reading; other texts are numbered by names and renumbered by alphabet before sorting.
type rawRow struct {
	event int64
	risk  int64
	loss  float64
	class uint16
	peril uint16
}

// names numbers texts in the order in which they first occur.
type names struct {
	index map[string]int32
	list  []string
}

func (n *names) number(text string) int32 {
	if i, ok := n.index[text]; ok {
		return i
	}
	if n.index == nil {
		n.index = map[string]int32{}
	}
	text = string([]byte(text)) // do not hold on to a reader's buffer
	i := int32(len(n.list))
	n.index[text] = i
	n.list = append(n.list, text)
	return i
}

// ranks gives for each numbered text its place by alphabet.
func (n *names) ranks() []int32 {
	order := make([]int32, len(n.list))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		if n.list[a] < n.list[b] {
			return -1
		}
		return 1
	})
	ranks := make([]int32, len(order))
	for rank, i := range order {
		ranks[i] = int32(rank)
	}
	return ranks
}

// NewBuilder prepares a table of that many years and those classes, at most 65,535.
func NewBuilder(years int, classes []string) *Builder {
	b := &Builder{years: years, classes: classes, class: map[string]uint16{}}
	for i, name := range classes {
		b.class[name] = uint16(i)
	}
	return b
}

// Add takes one row. It fails, and takes nothing, when the year is outside the table, the class unknown or the loss no number of at
// least 0; the key of the fault is the name of the column.
func (b *Builder) Add(r Row) error {
	class, ok := b.class[r.Class]
	switch {
	case r.Year < 1 || r.Year > b.years:
		return &fault.Fault{Key: "year", Found: strconv.Itoa(r.Year), Allowed: fmt.Sprintf("a whole number from 1 to %d", b.years)}
	case !ok:
		return &fault.Fault{Key: "class", Found: fmt.Sprintf("no class of the book is named %q", r.Class), Allowed: fmt.Sprintf("%q", b.classes), Nearest: fault.Nearest(r.Class, b.classes)}
	case !(r.Loss >= 0) || math.IsInf(r.Loss, 0):
		return &fault.Fault{Key: "loss", Found: fmt.Sprint(r.Loss), Allowed: "money of at least 0"}
	}
	if r.Loss == 0 {
		return nil
	}
	peril := r.Peril
	if peril == "" {
		peril = AttritionalPeril
	}
	number := b.perils.number(peril)
	if number > math.MaxUint16 {
		return &fault.Fault{Key: "peril", Found: "more than 65,536 perils", Allowed: "names of perils"}
	}
	b.rows = append(b.rows, rawRow{event: key(&b.events, r.Event), risk: key(&b.risks, r.Risk), loss: r.Loss, class: class, peril: uint16(number)})
	b.years32 = append(b.years32, int32(r.Year-1))
	return nil
}

// key gives 0 for no text, an odd number for a whole number written plainly, and an even one for any other text.
func key(n *names, text string) int64 {
	if text == "" {
		return 0
	}
	if len(text) <= 15 && (text[0] != '0' || len(text) == 1) {
		value := int64(0)
		plain := true
		for i := 0; i < len(text) && plain; i++ {
			plain = text[i] >= '0' && text[i] <= '9'
			value = value*10 + int64(text[i]-'0')
		}
		if plain {
			return 2*value + 1
		}
	}
	return 2 * int64(n.number(text)+1)
}

// Build gives the table of the rows taken so far.
func (b *Builder) Build() (*Table, error) { return b.Simulate(0, nil, nil, 1) }

// tabled sorts the rows taken so far by year, in place of their order of arrival, and gives where each year starts.
func (b *Builder) tabled() (offsets []int, order []int32) {
	offsets = make([]int, b.years+1)
	for _, y := range b.years32 {
		offsets[y+1]++
	}
	for y := range b.years {
		offsets[y+1] += offsets[y]
	}
	next := slices.Clone(offsets[:b.years])
	order = make([]int32, len(b.rows))
	for i, y := range b.years32 {
		order[next[y]] = int32(i)
		next[y]++
	}
	return offsets, order
}
