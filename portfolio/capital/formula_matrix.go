package capital

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"

	"gonum.org/v1/gonum/mat"
)

// smallestEigenvalue is the bound below which a matrix is not positive semidefinite: far beyond the rounding of the decomposition (about n·1e-16 times
// the largest eigenvalue, which is at most n), far below what a coefficient written by hand can do.
const smallestEigenvalue = -1e-10

// checkCorrelations reports every fault of a correlation matrix: it must be square with a row for each of names, symmetric, with 1 on the
// diagonal, within −1 to 1 and positive semidefinite. Keys are key[i] and key[i][j].
func checkCorrelations(faults *fault.List, key string, matrix [][]float64, names []string) {
	before := faults.Len()
	n := len(names)
	if n == 0 {
		return // that there are no names is a fault of its own
	}
	if len(matrix) != n {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("%d rows", len(matrix)), Allowed: fmt.Sprintf("%d, one for each of %q", n, names)})
	}
	for i, row := range matrix {
		if len(row) != n {
			at := fmt.Sprintf("%s[%d]", key, i)
			faults.Add(fault.Fault{Key: at, Found: fmt.Sprintf("%d correlations", len(row)), Allowed: fmt.Sprintf("%d: the matrix is square", n)})
		}
	}
	if faults.Len() > before {
		return
	}
	for i, row := range matrix {
		for j, x := range row {
			at := fmt.Sprintf("%s[%d][%d]", key, i, j)
			switch {
			case !(x >= -1 && x <= 1):
				faults.Add(fault.Fault{Key: at, Found: fmt.Sprint(x), Allowed: "a correlation from -1 to 1"})
			case i == j && x != 1:
				faults.Add(fault.Fault{Key: at, Found: fmt.Sprint(x), Allowed: "1 on the diagonal"})
			case j < i && x != matrix[j][i]:
				faults.Add(fault.Fault{Key: at, Found: fmt.Sprintf("%g, but %g the other way round", x, matrix[j][i]), Allowed: "a symmetric matrix"})
			}
		}
	}
	if faults.Len() > before {
		return
	}
	if smallest := eigenvalues(matrix)[0]; !(smallest >= smallestEigenvalue) {
		faults.Add(notSemidefinite(key, smallest))
	}
}

func notSemidefinite(key string, smallest float64) fault.Fault {
	return fault.Fault{
		Key: key, Found: fmt.Sprintf("no matrix of correlations: its smallest eigenvalue is %.4g", smallest),
		Allowed: "a positive semidefinite matrix, so that no combination has a variance below 0",
	}
}

// eigenvalues gives those of a symmetric matrix, in rising order; NaN for a matrix whose decomposition fails.
func eigenvalues(matrix [][]float64) []float64 {
	n := len(matrix)
	symmetric := mat.NewSymDense(n, nil)
	for i, row := range matrix {
		for j := i; j < n; j++ {
			symmetric.SetSym(i, j, row[j])
		}
	}
	var decomposition mat.EigenSym
	if !decomposition.Factorize(symmetric, false) {
		return []float64{math.NaN()}
	}
	return decomposition.Values(nil)
}
