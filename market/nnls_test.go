package market

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// bestSupport gives the least |A·x − b|² over x ≥ 0 by trying every support: the optimum is the unconstrained one of some support.
func bestSupport(rows [][]float64, b []float64) float64 {
	columns := len(rows[0])
	best := math.Inf(1)
	for support := range 1 << columns {
		var chosen []int
		for j := range columns {
			if support>>j&1 == 1 {
				chosen = append(chosen, j)
			}
		}
		x := make([]float64, columns)
		if len(chosen) > 0 {
			sub := mat.NewDense(len(rows), len(chosen), nil)
			for i, row := range rows {
				for k, j := range chosen {
					sub.Set(i, k, row[j])
				}
			}
			var z mat.VecDense
			if z.SolveVec(sub, mat.NewVecDense(len(b), append([]float64(nil), b...))) != nil {
				continue
			}
			feasible := true
			for k, j := range chosen {
				x[j] = z.AtVec(k)
				feasible = feasible && x[j] >= 0
			}
			if !feasible {
				continue
			}
		}
		best = min(best, squaredMiss(rows, b, x))
	}
	return best
}

func squaredMiss(rows [][]float64, b, x []float64) float64 {
	sum := 0.0
	for i, row := range rows {
		e := -b[i]
		for j, v := range row {
			e += v * x[j]
		}
		sum += e * e
	}
	return sum
}

// TestNonNegativeLeastSquares: against every support, cold and from the solution of another problem.
func TestNonNegativeLeastSquares(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 300 {
		m, n := 3+r.IntN(6), 1+r.IntN(6)
		rows, b := make([][]float64, m), make([]float64, m)
		for i := range rows {
			rows[i] = make([]float64, n)
			for j := range rows[i] {
				rows[i][j] = float64(r.IntN(9) - 3)
				if j > 0 && r.IntN(4) == 0 {
					rows[i][j] = rows[i][j-1] // near-dependent columns
				}
			}
			b[i] = float64(r.IntN(9) - 4)
		}
		want := bestSupport(rows, b)
		start := make([]float64, n)
		for j := range start {
			start[j] = float64(r.IntN(3))
		}
		for _, from := range [][]float64{nil, start} {
			x, err := newLeastSquares(rows, b).solve(from)
			if err != nil {
				t.Fatal(err)
			}
			for _, v := range x {
				if v < 0 {
					t.Fatalf("x = %v", x)
				}
			}
			if got := squaredMiss(rows, b, x); math.Abs(got-want) > 1e-9*(1+want) {
				t.Fatalf("rows %v, right %v, from %v: %v, want %v", rows, b, from, got, want)
			}
		}
	}
}
