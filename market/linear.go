package market

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// linearProgramme minimises cost·x over x ≥ 0 with rows·x = right. Rows are few (tens): the simplex method of the library is dense.
type linearProgramme struct {
	cost  []float64
	rows  [][]float64
	right []float64
}

// errInfeasible says that no x keeps the rows.
var errInfeasible = errors.New("market: no distortion keeps the bounds")

// addColumns gives every row that many new columns of 0 and returns the place of the first.
func (p *linearProgramme) addColumns(count int) int {
	first := len(p.cost)
	p.cost = append(p.cost, make([]float64, count)...)
	for i := range p.rows {
		p.rows[i] = append(p.rows[i], make([]float64, count)...)
	}
	return first
}

// addRow adds a row whose first entries are given.
func (p *linearProgramme) addRow(entries []float64, right float64) []float64 {
	row := make([]float64, len(p.cost))
	copy(row, entries)
	p.rows, p.right = append(p.rows, row), append(p.right, right)
	return row
}

const (
	// lpTolerance is the reduced cost below which the simplex method stops, where a missed row costs 1.
	lpTolerance = 1e-13
	// lpNudge is by how much right sides are moved apart, relative to entries of 1. Without it several constraints meet in one point, as they do
	// for consistent quotes, and the simplex method of the library stops at a singular basis.
	lpNudge = 1e-12
	// lpMissed is what a row may miss its right side by.
	lpMissed = 1e-7
	// lpAttempts is how often a singular basis is met with a nudge ten times as large: none was left in 1,500 random lists of quotes.
	lpAttempts = 4
)

// solve gives the least cost and a point that has it. It fails with errInfeasible when there is none, and checks what it gives.
//
// The first phase of the library calls some feasible problems infeasible or singular, so every row has a column of its own to miss it, at a cost far
// above the others, and these columns are the basis to start from. When rows remain missed, the cost was too small or nothing keeps them all.
func (p *linearProgramme) solve() (value float64, x []float64, err error) {
	largest := 0.0
	for _, c := range p.cost {
		largest = max(largest, math.Abs(c))
	}
	err = errInfeasible
	for _, missing := range []float64{1e4, 1e7} { // of the largest cost
		for attempt := range lpAttempts {
			scale := missing * largest
			if largest == 0 {
				scale = 1
			}
			x, err = p.attempt(scale, lpNudge*math.Pow(10, float64(attempt)))
			if err == nil {
				for j, c := range p.cost {
					value += float64(c * x[j])
				}
				return value, x, nil
			}
			if errors.Is(err, errInfeasible) {
				break
			}
		}
	}
	return 0, nil, err
}

// attempt solves with costs divided by scale and right sides moved apart by up to nudge.
func (p *linearProgramme) attempt(scale, nudge float64) (x []float64, err error) {
	defer func() {
		if fault := recover(); fault != nil { // the library panics on a basis that rounding has made infeasible
			err = fmt.Errorf("market: linear programme: %v", fault)
		}
	}()
	rows, columns := len(p.rows), len(p.cost)
	a := mat.NewDense(rows, columns+rows, nil)
	right, cost, basis := make([]float64, rows), make([]float64, columns+rows), make([]int, rows)
	for j, c := range p.cost {
		cost[j] = c / scale
	}
	for i, row := range p.rows {
		size := 0.0
		for _, v := range row {
			size = max(size, math.Abs(v))
		}
		if size == 0 {
			size = 1
		}
		if p.right[i] < 0 {
			size = -size
		}
		for j, v := range row {
			a.Set(i, j, v/size)
		}
		_, part := math.Modf(float64(i+1) * math.Phi)
		right[i] = p.right[i]/size + nudge*(1+part)
		basis[i], cost[columns+i] = columns+i, 1
		a.Set(i, columns+i, 1)
	}
	_, x, err = lp.Simplex(cost, a, right, lpTolerance, basis)
	if err != nil {
		return nil, fmt.Errorf("market: linear programme: %w", err)
	}
	x = x[:columns]
	for i, row := range p.rows {
		sum, size := -p.right[i], math.Abs(p.right[i])
		for j, v := range row {
			sum += float64(v * x[j])
			size = max(size, math.Abs(v))
		}
		if !(math.Abs(sum) <= lpMissed*size) {
			return nil, errInfeasible
		}
	}
	return x, nil
}
