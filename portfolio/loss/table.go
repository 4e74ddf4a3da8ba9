package loss

// NoEvent marks an attritional row: no event or risk cover answers it. NoRisk marks a row that belongs to no single risk.
const (
	NoEvent int32 = 0
	NoRisk  int32 = 0
)

// Class is a line of business of the cedant.
type Class struct {
	Name     string
	Premium  float64 // gross premium, money per year, ≥ 0
	Expenses float64 // expenses as a fraction of Premium, 0–1
}

// Book is the cedant's position before reinsurance: its classes and their simulated losses. Classes stand in the order of
// Table.Classes.
type Book struct {
	Classes []Class
	Table   *Table
}

// Table is the simulated losses of a book, in columns, sorted by year, then event, class, peril, risk and loss, so that the order
// in which rows were given never matters. It is immutable once built and safe for concurrent use.
type Table struct {
	classes []string
	perils  []string
	columns Columns
}

// Columns gives direct access to the columns of a table. They are shared, not copied: read only.
type Columns struct {
	Offset []int     // row at which each year starts, one more than there are years; year i has rows Offset[i] to Offset[i+1]-1
	Event  []int32   // NoEvent, or the number of the event within its year, from 1
	Class  []uint16  // index into Classes
	Peril  []uint16  // index into Perils
	Risk   []int32   // NoRisk, or the number of the risk, from 1 (the same number within one event is the same risk)
	Loss   []float64 // money, > 0 (rows of loss 0 are dropped)
}

// Years counts the simulated years, loss-free ones included.
func (t *Table) Years() int { return len(t.columns.Offset) - 1 }

// Len counts the rows.
func (t *Table) Len() int { return len(t.columns.Loss) }

// Classes gives the names of the classes; read only.
func (t *Table) Classes() []string { return t.classes }

// Perils gives the names of the perils that occur; the attritional peril is named "attritional" unless the source says otherwise;
// read only.
func (t *Table) Perils() []string { return t.perils }

// Columns gives the columns; read only.
func (t *Table) Columns() Columns { return t.columns }

// Reordered gives a copy of the table whose year i is year order[i] of this one; order must hold every year once.
func (t *Table) Reordered(order []int32) *Table {
	c := t.columns
	r := Columns{
		Offset: make([]int, 1, len(c.Offset)), Event: make([]int32, 0, len(c.Event)), Class: make([]uint16, 0, len(c.Class)), Peril: make([]uint16, 0, len(c.Peril)),
		Risk: make([]int32, 0, len(c.Risk)), Loss: make([]float64, 0, len(c.Loss)),
	}
	for _, y := range order {
		from, to := c.Offset[y], c.Offset[y+1]
		r.Event, r.Class, r.Peril = append(r.Event, c.Event[from:to]...), append(r.Class, c.Class[from:to]...), append(r.Peril, c.Peril[from:to]...)
		r.Risk, r.Loss = append(r.Risk, c.Risk[from:to]...), append(r.Loss, c.Loss[from:to]...)
		r.Offset = append(r.Offset, len(r.Loss))
	}
	return &Table{classes: t.classes, perils: t.perils, columns: r}
}
