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

// lpTolerance is the reduced cost below which the simplex method stops; rows are scaled to entries of about 1.
const lpTolerance = 1e-11

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

// solve gives the least cost and a point that has it. It fails with errInfeasible when there is none, and checks what it gives.
func (p *linearProgramme) solve() (value float64, x []float64, err error) {
	defer func() {
		if fault := recover(); fault != nil { // the library panics on shapes that it does not like
			err = fmt.Errorf("market: linear programme: %v", fault)
		}
	}()
	a := mat.NewDense(len(p.rows), len(p.cost), nil)
	right := append([]float64(nil), p.right...)
	for i, row := range p.rows {
		scale := 0.0
		for _, v := range row {
			scale = max(scale, math.Abs(v))
		}
		if scale == 0 {
			scale = 1
		}
		if right[i] < 0 { // the library wants right sides of at least 0 in its first phase
			scale = -scale
		}
		for j, v := range row {
			a.Set(i, j, v/scale)
		}
		right[i] /= scale
	}
	value, x, err = lp.Simplex(p.cost, a, right, lpTolerance, nil)
	if errors.Is(err, lp.ErrInfeasible) {
		return 0, nil, errInfeasible
	}
	if err != nil {
		return 0, nil, fmt.Errorf("market: linear programme: %w", err)
	}
	for i, row := range p.rows {
		sum := -p.right[i]
		size := math.Abs(p.right[i])
		for j, v := range row {
			sum += float64(v * x[j])
			size = max(size, math.Abs(v*x[j]))
		}
		if math.Abs(sum) > 1e-7*max(size, 1e-12) {
			return 0, nil, fmt.Errorf("market: linear programme: row %d is missed by %v", i, sum)
		}
	}
	return value, x, nil
}
