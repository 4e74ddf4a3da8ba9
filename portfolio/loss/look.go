package loss

// Annual gives the sum of the losses of each year, of the chosen class and peril; a number below 0 chooses all.
func (t *Table) Annual(class, peril int) []float64 {
	sums := make([]float64, t.Years())
	t.each(class, peril, func(year, row int) { sums[year] += t.columns.Loss[row] })
	return sums
}

// Largest gives the loss of the largest event of each year, counting the rows of the chosen class and peril; 0 in a year without one.
func (t *Table) Largest(class, peril int) []float64 {
	largest := make([]float64, t.Years())
	t.eachEvent(class, peril, func(year int, loss float64) { largest[year] = max(largest[year], loss) })
	return largest
}

// Events counts the events with a loss in the chosen class and peril, over all years.
func (t *Table) Events(class, peril int) int {
	count := 0
	t.eachEvent(class, peril, func(int, float64) { count++ })
	return count
}

func (t *Table) each(class, peril int, visit func(year, row int)) {
	c := t.columns
	for y := range t.Years() {
		for row := c.Offset[y]; row < c.Offset[y+1]; row++ {
			if (class < 0 || int(c.Class[row]) == class) && (peril < 0 || int(c.Peril[row]) == peril) {
				visit(y, row)
			}
		}
	}
}

// eachEvent visits the sum of each event's chosen rows; attritional rows belong to none.
func (t *Table) eachEvent(class, peril int, visit func(year int, loss float64)) {
	event, at, sum := NoEvent, -1, 0.0
	flush := func() {
		if event != NoEvent && sum > 0 {
			visit(at, sum)
		}
		sum = 0
	}
	t.each(class, peril, func(year, row int) {
		if e := t.columns.Event[row]; year != at || e != event {
			flush()
			event, at = e, year
		}
		sum += t.columns.Loss[row]
	})
	flush()
}
