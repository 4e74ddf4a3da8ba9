package sample

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
)

// TestIntervalRanks: ranks and coverages from the binomial law (testdata/published, table interval).
func TestIntervalRanks(t *testing.T) {
	rows := portfoliotest.PublishedValues(t, ".", "interval")
	for i := 0; i < len(rows); i += 3 {
		var n int
		var text string
		if _, err := fmt.Sscan(rows[i].Case, &n, &text); err != nil {
			t.Fatal(err)
		}
		low, high, coverage := intervalRanks(level(t, text), n)
		closeTo(t, rows[i].Case+" low", float64(low), portfoliotest.Find(t, rows, rows[i].Case, "low").Value, 0)
		closeTo(t, rows[i].Case+" high", float64(high), portfoliotest.Find(t, rows, rows[i].Case, "high").Value, 0)
		closeTo(t, rows[i].Case+" coverage", coverage, portfoliotest.Find(t, rows, rows[i].Case, "coverage").Value, 0.5e-5+1e-9) // printed with five decimals
	}
}

// TestIntervalCoverage compares with the binomial law of a library, for every interval of small samples: it covers enough, and one rank
// less on either side would not.
func TestIntervalCoverage(t *testing.T) {
	for _, n := range []int{1, 2, 5, 10, 37, 100, 400} {
		for _, text := range []string{"1%", "20%", "50%", "90%", "99.5%"} {
			l := level(t, text)
			low, high, coverage := intervalRanks(l, n)
			b := distuv.Binomial{N: float64(n), P: l.Float()}
			covered := func(low, high int) float64 { return b.CDF(float64(high-1)) - b.CDF(float64(low-1)) }
			closeTo(t, fmt.Sprintf("%s of %d: coverage", text, n), coverage, covered(low, high), 1e-9)
			if coverage < 0.95 {
				t.Errorf("%s of %d: ranks %d to %d cover %v", text, n, low, high, coverage)
			}
			if k := l.Rank(n); low < k-1 && high > k+1 && covered(low+1, high-1) >= 0.95 {
				t.Errorf("%s of %d: ranks %d to %d are wider than needed", text, n, low, high)
			}
		}
	}
}

// TestIntervalHoldsTheQuantile: the known coverage of n = 1,000 at 99.5 % is that of samples drawn.
func TestIntervalHoldsTheQuantile(t *testing.T) {
	const runs = 1500
	want := portfoliotest.Find(t, portfoliotest.PublishedValues(t, ".", "interval"), "1000 99.5%", "coverage").Value
	r := rand.New(rand.NewPCG(10, 10))
	l, values, held := level(t, "99.5%"), make([]float64, 1000), 0
	for range runs {
		for i := range values {
			values[i] = r.Float64()
		}
		if low, high := sampleOf(t, values...).VaRInterval(l); low <= 0.995 && 0.995 <= high {
			held++
		}
	}
	closeTo(t, "coverage", float64(held)/runs, want, 4*math.Sqrt(want*(1-want)/runs)) // four standard errors
}

func ExampleSample_VaRInterval() {
	values := make([]float64, 1000)
	for i := range values {
		values[i] = float64(i + 1)
	}
	s, _ := New(values)
	l, _ := ParseLevel("99.5%")
	low, high := s.VaRInterval(l)
	fmt.Println(s.VaR(l), "from", low, "to", high)
	l, _ = ParseLevel("99.9%") // one year in a thousand: the sample cannot bound it
	low, high = s.VaRInterval(l)
	fmt.Println(s.VaR(l), "from", low, "to", high)
	// Output:
	// 995 from 990 to 1000
	// 999 from 997 to +Inf
}
