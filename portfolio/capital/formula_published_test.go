package capital

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"
)

const projectRoot = "../.."

// publishedFactors builds the factors from the published values alone, so that these tests lean on no file of the program.
func publishedFactors(t testing.TB) Factors {
	t.Helper()
	table := func(name string) []portfoliotest.Published {
		return portfoliotest.PublishedValues(t, projectRoot, "standard formula "+name)
	}
	constants := table("constant")
	constant := func(name string) float64 { return portfoliotest.Find(t, constants, "2015/35", name).Value }
	f := Factors{
		Name: "published", Version: "published values", PremiumReserve: constant("premium and reserve"), Multiple: constant("multiple"),
		Diversification: constant("diversification"), ManMade: manMadeKinds, PremiumCat: constant("premium and catastrophe"),
		PremiumLapse: constant("premium and lapse"), CatLapse: constant("catastrophe and lapse"), Modules: moduleNames,
		LossGiven: constant("loss given"), LossGivenTied: constant("loss given tied"), Mitigating: constant("mitigating"), CollateralUsed: 1,
		Low: constant("low"), High: constant("high"), LowMultiple: constant("low multiple"), HighMultiple: constant("high multiple"),
		TypesCross: constant("types cross"),
	}
	segments := table("segment")
	for number := 1; number <= 12; number++ {
		value := func(quantity string) float64 {
			return portfoliotest.Find(t, segments, strconv.Itoa(number), quantity).Value
		}
		f.Segments = append(f.Segments, Segment{number, "segment " + strconv.Itoa(number), value("premium"), value("reserve"), value("non-proportional")})
	}
	f.SegmentCorrelation = publishedMatrix(t, table("segment correlation"), segmentNumbers())
	f.ModuleMatrix = publishedMatrix(t, table("module correlation"), moduleNames)
	for _, row := range table("default") {
		ratio, rated := strings.CutPrefix(row.Case, "solvency ratio ")
		switch {
		case !rated:
			f.Steps = append(f.Steps, row.Value)
		case row.Mark == "R":
			f.Solvency = append(f.Solvency, SolvencyStep{percent(t, ratio), row.Value})
		}
	}
	for _, row := range table("pattern") {
		n := portfoliotest.Numbers(row.Quantity)
		if len(f.Patterns) == 0 || f.Patterns[len(f.Patterns)-1].Kind != row.Case {
			f.Patterns = append(f.Patterns, Pattern{Kind: row.Case})
		}
		p := &f.Patterns[len(f.Patterns)-1]
		if int(n[0]) > len(p.Alternatives) {
			p.Alternatives = append(p.Alternatives, nil)
		}
		last := len(p.Alternatives) - 1
		p.Alternatives[last] = append(p.Alternatives[last], row.Value)
	}
	return f
}

func segmentNumbers() []string {
	var list []string
	for i := 1; i <= 12; i++ {
		list = append(list, strconv.Itoa(i))
	}
	return list
}

func publishedMatrix(t testing.TB, rows []portfoliotest.Published, names []string) [][]float64 {
	t.Helper()
	matrix := make([][]float64, len(names))
	for i := range matrix {
		matrix[i] = make([]float64, len(names))
		matrix[i][i] = 1
		for j := range i {
			matrix[i][j] = portfoliotest.Find(t, rows, names[j]+" and "+names[i], "correlation").Value
			matrix[j][i] = matrix[i][j]
		}
	}
	return matrix
}

func percent(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(strings.TrimSuffix(text, "%"), 64)
	if err != nil {
		t.Fatal(err)
	}
	return x / 100
}

// agrees compares a figure with a published one to half a unit of its last digit.
func agrees(t *testing.T, got float64, want portfoliotest.Published) {
	t.Helper()
	_, decimals, _ := strings.Cut(want.Text, ".")
	if !(math.Abs(got-want.Value) <= 0.5000001*math.Pow10(-len(decimals))) {
		t.Errorf("%s, %s: got %.10g, published %s (%s)", want.Case, want.Quantity, got, want.Text, want.Citation)
	}
}

func TestPublishedFactorsAreValid(t *testing.T) {
	f := publishedFactors(t)
	if err := f.Validate(); err != nil {
		t.Fatal(err)
	}
	if len(f.Segments) != 12 || len(f.Steps) != 7 || len(f.Solvency) != 8 || len(f.Patterns) != 5 {
		t.Fatalf("%d segments, %d steps, %d rows of solvency, %d patterns", len(f.Segments), len(f.Steps), len(f.Solvency), len(f.Patterns))
	}
	rows := portfoliotest.PublishedValues(t, projectRoot, "standard formula segment correlation")
	values := eigenvalues(f.SegmentCorrelation)
	agrees(t, values[0], portfoliotest.Find(t, rows, "all", "smallest eigenvalue"))
	agrees(t, values[11], portfoliotest.Find(t, rows, "all", "largest eigenvalue"))
}

func TestUnratedProbability(t *testing.T) {
	f := publishedFactors(t)
	looked := 0
	for _, row := range portfoliotest.PublishedValues(t, projectRoot, "standard formula default") {
		if ratio, ok := strings.CutPrefix(row.Case, "solvency ratio "); ok {
			looked++
			// Rounding of one division and one product.
			if got := f.UnratedProbability(percent(t, ratio)); math.Abs(got-row.Value) > 1e-15 {
				t.Errorf("%s: %v, want %v", row.Case, got, row.Value)
			}
		}
	}
	if looked != 13 {
		t.Errorf("%d ratios were looked at", looked)
	}
	if got := f.UnratedProbability(math.NaN()); got != 0.042 {
		t.Errorf("without a ratio: %v", got)
	}
}

// TestPremiumAndReserve works the published cases out, each a class of its own for every segment.
func TestPremiumAndReserve(t *testing.T) {
	rows := portfoliotest.PublishedValues(t, projectRoot, "standard formula premium and reserve")
	for _, c := range []struct {
		name              string
		segments          []int
		premium, reserves []float64
	}{
		{"segment 4 Vp 100 Vr 50", []int{4}, []float64{100}, []float64{50}},
		{"segments 1 4 5 Vp 100 200 50 Vr 150 80 120", []int{1, 4, 5}, []float64{100, 200, 50}, []float64{150, 80, 120}},
		{"all segments Vp 100 Vr 100 each", []int{1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12}, repeated(100, 12), repeated(100, 12)},
	} {
		f := Formula{Factors: publishedFactors(t), NonProportional: Always}
		var classes []string
		for i, number := range c.segments {
			classes = append(classes, fmt.Sprint("class ", number))
			f.Classes = append(f.Classes, FormulaClass{Segment: number - 1, Reserves: c.reserves[i], Diversification: 1})
		}
		if err := f.Validate(classes, 0); err != nil {
			t.Fatal(err)
		}
		var s FormulaScratch
		r := f.Require(FormulaPosition{Premium: c.premium}, 0, &s)
		looked := 0
		for _, row := range rows {
			if row.Case != c.name {
				continue
			}
			looked++
			switch row.Quantity {
			case "σ":
				agrees(t, r.Sigma, row)
			case "volume":
				agrees(t, r.Volume, row)
			case "requirement":
				agrees(t, r.PremiumReserve, row)
				agrees(t, r.Total, row)
			default:
				v := s.segments[int(portfoliotest.Numbers(row.Quantity)[0])-1]
				agrees(t, v.deviation/(v.premium+v.reserve), row)
			}
		}
		if looked < 2 {
			t.Errorf("%s: %d published values", c.name, looked)
		}
	}
}

func repeated(x float64, n int) []float64 {
	list := make([]float64, n)
	for i := range list {
		list[i] = x
	}
	return list
}

func TestModules(t *testing.T) {
	rows := portfoliotest.PublishedValues(t, projectRoot, "standard formula modules")
	f := Formula{Factors: publishedFactors(t), Lapse: 20, OtherCatastrophe: 80}
	// Reserves of segment 4 alone, whose deviation is 10 %: 3 · 10 % · 1000/3 = 100.
	f.Classes = []FormulaClass{{Segment: 3, Reserves: 1000.0 / 3, Diversification: 1}}
	r := f.Require(FormulaPosition{Premium: []float64{0}}, 0, &FormulaScratch{})
	agrees(t, r.NonLife, portfoliotest.Find(t, rows, "premium and reserve 100 catastrophe 80 lapse 20", "non-life"))

	// The law lets lapse stand alone; with correlations of 0.3 and 0.1 the square is larger by 2·(0.3·100 + 0.1·80)·20.
	f.Factors.PremiumLapse, f.Factors.CatLapse = 0.3, 0.1
	r = f.Require(FormulaPosition{Premium: []float64{0}}, 0, &FormulaScratch{})
	if want := math.Sqrt(20800 + 2*(0.3*100+0.1*80)*20); math.Abs(r.NonLife-want) > 1e-12*want { // a dozen roundings
		t.Errorf("correlated lapse: %v, want %v", r.NonLife, want)
	}

	f = Formula{Factors: publishedFactors(t), Market: 100, TypeTwo: 20, Lapse: 150}
	r = f.Require(FormulaPosition{}, 0, &FormulaScratch{})
	agrees(t, r.Basic, portfoliotest.Find(t, rows, "market 100 default 20 non-life 150", "basic"))
	f.Intangible, f.Operational, f.Adjustment = 5, 30, -12
	again := f.Require(FormulaPosition{}, 0, &FormulaScratch{})
	if math.Abs(again.Total-(r.Basic+23)) > 1e-12 || math.Abs(again.Basic-(r.Basic+5)) > 1e-12 { // one rounding
		t.Errorf("with 5 of intangibles, 30 operational and 12 absorbed: %+v", again)
	}
	f.Adjustment = -1000
	if r := f.Require(FormulaPosition{}, 0, &FormulaScratch{}); r.Total != 0 {
		t.Errorf("an adjustment beyond everything leaves %v", r.Total)
	}
}

// TestTypeOne works out losses given default named in the published cases, such as "LGD 100 at 0.01% and 200 at 0.05%".
func TestTypeOne(t *testing.T) {
	f := publishedFactors(t)
	rows := portfoliotest.PublishedValues(t, projectRoot, "standard formula type 1")
	for _, row := range rows {
		var losses, probabilities []float64
		for _, word := range strings.Fields(row.Case) {
			if strings.HasSuffix(word, "%") {
				probabilities = append(probabilities, percent(t, word))
			} else if x, err := strconv.ParseFloat(word, 64); err == nil {
				losses = append(losses, x)
			}
		}
		r := f.DefaultRequirement(losses, probabilities)
		switch row.Quantity {
		case "requirement":
			agrees(t, r.Requirement, row)
		case "deviation":
			agrees(t, r.Deviation, row)
		case "between":
			agrees(t, r.Between, row)
		case "within":
			agrees(t, r.Within, row)
		case "variance":
			agrees(t, r.Between+r.Within, row)
		default:
			t.Errorf("unknown quantity %q", row.Quantity)
		}
	}
	if len(rows) < 15 {
		t.Errorf("%d published values", len(rows))
	}
}
