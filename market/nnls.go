package market

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// nonNegativeLeastSquares gives x ≥ 0 that minimises |A·x − b| (Lawson and Hanson 1974, chapter 23). The optimum is global; columns that
// depend on others stay at 0. Rows of A and entries of b should be of similar size.
func nonNegativeLeastSquares(a *mat.Dense, b []float64) ([]float64, error) {
	rows, columns := a.Dims()
	scale := 0.0
	for i := range rows {
		for j := range columns {
			scale = max(scale, math.Abs(a.At(i, j)))
		}
	}
	tolerance := 1e-13 * scale * float64(rows) // of a gradient: rounding of one inner product
	x := make([]float64, columns)
	passive := make([]bool, columns)
	barred := make([]bool, columns) // columns that could not enter since the last move
	residual := append([]float64(nil), b...)
	for range 30 * columns {
		enter := steepest(a, residual, passive, barred, tolerance)
		if enter < 0 {
			return x, nil
		}
		passive[enter] = true
		for {
			z, err := passiveSolution(a, b, passive)
			if err != nil || (z[enter] <= 0 && x[enter] == 0) { // depends on the others, or rounding alone drew it in
				passive[enter], barred[enter] = false, true
				break
			}
			step, leave := 1.0, -1
			for j := range z {
				if passive[j] && z[j] <= 0 {
					if s := x[j] / (x[j] - z[j]); s < step || leave < 0 {
						step, leave = min(s, step), j
					}
				}
			}
			for j := range z {
				if passive[j] {
					x[j] += step * (z[j] - x[j])
				}
			}
			if leave < 0 {
				clear(barred)
				break
			}
			for j := range x {
				if passive[j] && (j == leave || x[j] <= 0) {
					x[j], passive[j] = 0, false
				}
			}
		}
		for i := range residual {
			residual[i] = b[i] - float64(mat.Dot(a.RowView(i), mat.NewVecDense(columns, x)))
		}
	}
	return nil, errors.New("market: non-negative least squares: no end after 30 rounds a column")
}

// steepest gives the column outside the passive set along which the residual falls most; −1 when none does.
func steepest(a *mat.Dense, residual []float64, passive, barred []bool, tolerance float64) int {
	best, most := -1, tolerance
	_, columns := a.Dims()
	for j := range columns {
		if passive[j] || barred[j] {
			continue
		}
		g := 0.0
		for i, r := range residual {
			g += float64(a.At(i, j) * r)
		}
		if g > most {
			best, most = j, g
		}
	}
	return best
}

// passiveSolution gives the unconstrained least squares solution on the passive columns, zero elsewhere, by QR.
func passiveSolution(a *mat.Dense, b []float64, passive []bool) ([]float64, error) {
	rows, columns := a.Dims()
	var chosen []int
	for j := range columns {
		if passive[j] {
			chosen = append(chosen, j)
		}
	}
	if len(chosen) > rows {
		return nil, errors.New("market: more columns than rows")
	}
	sub := mat.NewDense(rows, len(chosen), nil)
	for k, j := range chosen {
		for i := range rows {
			sub.Set(i, k, a.At(i, j))
		}
	}
	var qr mat.QR
	qr.Factorize(sub)
	if qr.Cond() > 1e14 { // beyond it the solution has no correct digit
		return nil, errors.New("market: dependent columns")
	}
	var solution mat.VecDense
	if err := qr.SolveVecTo(&solution, false, mat.NewVecDense(rows, append([]float64(nil), b...))); err != nil {
		var condition mat.Condition
		if !errors.As(err, &condition) {
			return nil, err
		}
	}
	z := make([]float64, columns)
	for k, j := range chosen {
		z[j] = solution.AtVec(k)
	}
	return z, nil
}
