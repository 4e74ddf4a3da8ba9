package market

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// leastSquares is the problem of x ≥ 0 with the least |A·x − b|. Rows of A and entries of b should be of similar size.
type leastSquares struct {
	rows, columns int
	a             []float64 // column after column
	b             []float64
}

// newLeastSquares takes A row by row.
func newLeastSquares(rows [][]float64, b []float64) leastSquares {
	l := leastSquares{rows: len(rows), columns: len(rows[0]), b: b}
	l.a = make([]float64, l.rows*l.columns)
	for i, row := range rows {
		for j, v := range row {
			l.a[j*l.rows+i] = v
		}
	}
	return l
}

func (l leastSquares) column(j int) []float64 { return l.a[j*l.rows : (j+1)*l.rows] }

var errDependent = errors.New("market: non-negative least squares: dependent columns")

// solve gives a global optimum by the method of Lawson and Hanson (1974, chapter 23); columns that depend on others stay at 0. It starts from
// the support of start, the solution of a similar problem, when there is one: that saves steps and changes nothing else.
func (l leastSquares) solve(start []float64) ([]float64, error) {
	s := activeSet{leastSquares: l, x: make([]float64, l.columns), passive: make([]bool, l.columns), barred: make([]bool, l.columns)}
	if start != nil {
		for j, v := range start {
			s.x[j], s.passive[j] = v, v > 0
		}
		if s.descend(-1) != nil {
			clear(s.x)
			clear(s.passive)
		}
	}
	largest := 0.0
	for _, v := range l.a {
		largest = max(largest, math.Abs(v))
	}
	tolerance := 1e-13 * largest * float64(l.rows) // of a gradient: rounding of one inner product
	for range 30 * l.columns {
		enter := s.steepest(tolerance)
		if enter < 0 {
			return s.x, nil
		}
		s.passive[enter] = true
		if s.descend(enter) != nil { // it depends on the others, or rounding alone drew it in
			s.passive[enter], s.barred[enter] = false, true
		} else {
			clear(s.barred)
		}
	}
	return nil, errors.New("market: non-negative least squares: no end after 30 rounds a column")
}

// activeSet is where the method stands.
type activeSet struct {
	leastSquares
	x       []float64
	passive []bool // columns whose entry of x is free to be above 0
	barred  []bool // columns that could not enter since the last move
}

// descend moves x to the unconstrained optimum on the passive columns, dropping those that would fall below 0. It fails, with x unmoved, when the
// column that has just entered cannot rise from 0 or the columns are dependent.
func (s *activeSet) descend(enter int) error {
	for {
		z, err := s.optimum()
		if err != nil {
			return err
		}
		if enter >= 0 && z[enter] <= 0 && s.x[enter] == 0 {
			return errDependent
		}
		step, leave := 1.0, -1
		for j := range z {
			if s.passive[j] && z[j] <= 0 {
				if f := s.x[j] / (s.x[j] - z[j]); leave < 0 || f < step {
					step, leave = min(f, step), j
				}
			}
		}
		for j := range z {
			if s.passive[j] {
				s.x[j] += float64(step * (z[j] - s.x[j]))
			}
		}
		if leave < 0 {
			return nil
		}
		for j := range s.x {
			if s.passive[j] && (j == leave || s.x[j] <= 0) {
				s.x[j], s.passive[j] = 0, false
			}
		}
	}
}

// steepest gives the column outside the passive set along which the residual falls most; −1 when none does.
func (s *activeSet) steepest(tolerance float64) int {
	residual := append([]float64(nil), s.b...)
	for j, v := range s.x {
		if v != 0 {
			for i, a := range s.column(j) {
				residual[i] -= float64(a * v)
			}
		}
	}
	best, most := -1, tolerance
	for j := range s.columns {
		if s.passive[j] || s.barred[j] {
			continue
		}
		g := 0.0
		for i, a := range s.column(j) {
			g += float64(a * residual[i])
		}
		if g > most {
			best, most = j, g
		}
	}
	return best
}

// mostCondition is the condition number beyond which a solution has no correct digit.
const mostCondition = 1e14

// optimum gives the unconstrained least squares solution on the passive columns, zero elsewhere, by QR.
func (s *activeSet) optimum() ([]float64, error) {
	var chosen []int
	for j, p := range s.passive {
		if p {
			chosen = append(chosen, j)
		}
	}
	if len(chosen) == 0 || len(chosen) > s.rows {
		return nil, errDependent
	}
	data := make([]float64, s.rows*len(chosen))
	for k, j := range chosen {
		for i, a := range s.column(j) {
			data[i*len(chosen)+k] = a
		}
	}
	var qr mat.QR
	qr.Factorize(mat.NewDense(s.rows, len(chosen), data))
	if qr.Cond() > mostCondition {
		return nil, errDependent
	}
	var solution mat.VecDense
	if err := qr.SolveVecTo(&solution, false, mat.NewVecDense(s.rows, append([]float64(nil), s.b...))); err != nil {
		var condition mat.Condition
		if !errors.As(err, &condition) {
			return nil, err
		}
	}
	z := make([]float64, s.columns)
	for k, j := range chosen {
		z[j] = solution.AtVec(k)
	}
	return z, nil
}
