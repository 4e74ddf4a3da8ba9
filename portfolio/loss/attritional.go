package loss

import (
	"fmt"
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/mathext"
)

// AttritionalLoss is the annual sum of small losses of one class.
type AttritionalLoss struct {
	Class string
	Mean  float64 // money per year, > 0
	CV    float64 // standard deviation over mean, > 0
}

// Attritional simulates the annual sums of small losses: no event, no risk, one row a year and class.
type Attritional struct {
	Family      string // "lognormal" or "gamma"
	Losses      []AttritionalLoss
	Correlation [][]float64 // of the normal scores (Gaussian copula), in the order of Losses; nil = independent
}

// attritionalPlan is a checked Attritional.
type attritionalPlan struct {
	family string
	class  []uint16
	logs   []LogNormal
	gammas []Gamma
	root   *mat.Dense // correlation = root·rootᵀ
}

func (a Attritional) prepare(class map[string]uint16) (*attritionalPlan, error) {
	if a.Family != "lognormal" && a.Family != "gamma" {
		return nil, fmt.Errorf("loss: attritional: family %q, must be lognormal or gamma", a.Family)
	}
	p := &attritionalPlan{family: a.Family}
	seen := map[string]bool{}
	for _, l := range a.Losses {
		index, ok := class[l.Class]
		if !ok {
			return nil, fmt.Errorf("loss: attritional: no class of the book is named %q", l.Class)
		}
		if seen[l.Class] {
			return nil, fmt.Errorf("loss: attritional: class %q twice", l.Class)
		}
		seen[l.Class] = true
		log, err := NewLogNormalOf(l.Mean, l.CV)
		if err != nil {
			return nil, fmt.Errorf("attritional losses of class %q: %w", l.Class, err)
		}
		gamma, err := NewGammaOf(l.Mean, l.CV)
		if err != nil {
			return nil, fmt.Errorf("attritional losses of class %q: %w", l.Class, err)
		}
		p.class, p.logs, p.gammas = append(p.class, index), append(p.logs, log), append(p.gammas, gamma)
	}
	var err error
	p.root, err = correlationRoot(a.Correlation, len(a.Losses))
	return p, err
}

// correlationRoot gives a matrix whose product with its transpose is the correlation matrix. It refuses one that is not symmetric, has
// no unit diagonal or a negative eigenvalue (beyond rounding, 1e-9).
func correlationRoot(c [][]float64, n int) (*mat.Dense, error) {
	root := mat.NewDense(max(n, 1), max(n, 1), nil)
	if c == nil {
		for i := range n {
			root.Set(i, i, 1)
		}
		return root, nil
	}
	if len(c) != n {
		return nil, fmt.Errorf("loss: attritional: the correlation matrix has %d rows for %d classes", len(c), n)
	}
	m := mat.NewSymDense(n, nil)
	for i := range n {
		if len(c[i]) != n {
			return nil, fmt.Errorf("loss: attritional: row %d of the correlation matrix has %d entries, not %d", i+1, len(c[i]), n)
		}
		for j := range n {
			if !(c[i][j] >= -1 && c[i][j] <= 1) || c[i][j] != c[j][i] || (i == j && c[i][j] != 1) {
				return nil, fmt.Errorf("loss: attritional: entry %d, %d of the correlation matrix is %v: it must be symmetric with unit diagonal, from −1 to 1", i+1, j+1, c[i][j])
			}
			m.SetSym(i, j, c[i][j])
		}
	}
	var e mat.EigenSym
	if !e.Factorize(m, true) {
		return nil, fmt.Errorf("loss: attritional: the correlation matrix has no eigenvalues")
	}
	values := e.Values(nil)
	if values[0] < -1e-9 {
		return nil, fmt.Errorf("loss: attritional: the correlations contradict one another: the matrix has the negative eigenvalue %.4g", values[0])
	}
	var vectors mat.Dense
	e.VectorsTo(&vectors)
	for i := range n {
		for j := range n {
			root.Set(i, j, vectors.At(i, j)*math.Sqrt(max(values[j], 0)))
		}
	}
	return root, nil
}

// appendYear draws the sums of one year.
func (p *attritionalPlan) appendYear(rows []canonical, peril uint16, r *rand.Rand) []canonical {
	scores := make([]float64, len(p.class))
	for i := range scores {
		scores[i] = r.NormFloat64()
	}
	for i, class := range p.class {
		z := 0.0
		for j, score := range scores {
			z += float64(p.root.At(i, j) * score)
		}
		loss := 0.0
		if p.family == "lognormal" {
			loss = math.Exp(p.logs[i].Mu + p.logs[i].Sigma*z)
		} else {
			loss = gammaAt(p.gammas[i], z)
		}
		if loss > 0 {
			rows = append(rows, canonical{class: class, peril: peril, loss: loss})
		}
	}
	return rows
}

// gammaAt gives the quantile of a gamma law at the probability of a normal score, from whichever tail is nearer.
func gammaAt(s Gamma, z float64) float64 {
	if z > 0 {
		return s.Scale * mathext.GammaIncRegCompInv(s.Shape, normalSurvival(z))
	}
	return s.Scale * mathext.GammaIncRegInv(s.Shape, normalSurvival(-z))
}
