package portfoliotest

import (
	"fmt"

	"pgregory.net/rapid"
)

// Row is one loss of a drawn book. It has the fields of loss.Row, so that loss.Row(row) converts it; this package imports neither losses
// nor treaties, so that the tests inside any package can use it, and its answers share no code with what they check.
type Row struct {
	Year  int    // from 1
	Event string // "" = attritional
	Class string
	Peril string
	Risk  string  // "" = no single risk
	Loss  float64 // money, ≥ 0
}

// Book is a small drawn book of losses.
type Book struct {
	Years   int
	Classes []string // 1 to 3
	Perils  []string // that may occur; not all need to
	Rows    []Row
}

// RandomBook draws a book of up to 8 years and 24 rows, with years and classes without a loss, losses of zero, attritional rows, events
// over several classes, perils and risks, many ties (money on a coarse grid) and some losses off the grid.
func RandomBook(t *rapid.T) Book {
	b := Book{
		Years:   rapid.IntRange(1, 8).Draw(t, "years"),
		Classes: []string{"household", "commercial", "motor"}[:rapid.IntRange(1, 3).Draw(t, "classes")],
		Perils:  []string{"windstorm", "fire"},
	}
	for i := range rapid.IntRange(0, 24).Draw(t, "rows") {
		draw := func(what string, from []string) string {
			return rapid.SampledFrom(from).Draw(t, fmt.Sprint(what, " of row ", i))
		}
		b.Rows = append(b.Rows, Row{
			Year:  rapid.IntRange(1, b.Years).Draw(t, fmt.Sprint("year of row ", i)),
			Event: draw("event", []string{"", "1", "2", "gale"}),
			Class: draw("class", b.Classes),
			Peril: draw("peril", b.Perils),
			Risk:  draw("risk", []string{"", "mill", "dock"}),
			Loss:  Money(t, fmt.Sprint("loss of row ", i), 0, 60),
		})
	}
	return b
}

// Money draws an amount from low to high millions: mostly whole multiples of five millions, so that sums tie and hit retentions and
// limits exactly, else a multiple of a quarter, whose sums are still exact as a float64.
func Money(t *rapid.T, label string, low, high int) float64 {
	if rapid.IntRange(0, 3).Draw(t, label+" off the grid") == 0 {
		return float64(rapid.IntRange(low*4e6, high*4e6).Draw(t, label+" in quarters")) / 4
	}
	return 5e6 * float64(rapid.IntRange((low+4)/5, high/5).Draw(t, label+" in steps of 5m"))
}
