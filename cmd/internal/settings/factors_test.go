package settings

import (
	"fmt"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/portfoliotest"
)

const factorName = "standard-formula-2015-35.yaml"

func shipped(t testing.TB) string {
	t.Helper()
	data, ok := ShippedFactors("eu-2015-35")
	if !ok {
		t.Fatal("eu-2015-35 does not ship")
	}
	return string(data)
}

func TestShippedFactorsRead(t *testing.T) {
	if len(ShippedFactorNames()) != len(shippedFactors) {
		t.Errorf("names %q", ShippedFactorNames())
	}
	for _, name := range ShippedFactorNames() {
		data, ok := ShippedFactors(name)
		if !ok {
			t.Errorf("%s: no file", name)
			continue
		}
		f, err := ReadFactors(data, shippedFactors[name])
		if err != nil {
			t.Error(err)
		}
		if f.Name != name {
			t.Errorf("the file of %s calls itself %q", name, f.Name)
		}
		// Every row says how it is known.
		text := string(data)
		for _, words := range []string{"Annex II, read", "Annex IV, read", "from memory", "Art. 117(3), read", "2027", "Art. 199(3), read", "Art. 121"} {
			if !strings.Contains(text, words) {
				t.Errorf("%s does not say %q", name, words)
			}
		}
	}
	if _, ok := ShippedFactors("eu-2015-36"); ok {
		t.Error("factors were found that do not ship")
	}
}

// TestShippedFactorsArePublished compares every number of the shipped file with the published values, which were written down apart from it.
func TestShippedFactorsArePublished(t *testing.T) {
	f, err := ReadFactors([]byte(shipped(t)), factorName)
	if err != nil {
		t.Fatal(err)
	}
	// Exactly the decimals of the file, save for the sums of the solvency table.
	got := map[string]float64{
		"constant multiple": f.Multiple, "constant premium and reserve": f.PremiumReserve, "constant diversification": f.Diversification,
		"constant premium and catastrophe": f.PremiumCat, "constant premium and lapse": f.PremiumLapse, "constant catastrophe and lapse": f.CatLapse,
		"constant low": f.Low, "constant high": f.High, "constant low multiple": f.LowMultiple, "constant high multiple": f.HighMultiple,
		"constant loss given": f.LossGiven, "constant loss given tied": f.LossGivenTied, "constant mitigating": f.Mitigating, "constant types cross": f.TypesCross,
	}
	for i, s := range f.Segments {
		if s.Number != i+1 {
			t.Errorf("segment %d has the number %d", i+1, s.Number)
		}
		got[fmt.Sprintf("segment %d premium", i+1)] = s.Premium
		got[fmt.Sprintf("segment %d reserve", i+1)] = s.Reserve
		got[fmt.Sprintf("segment %d non-proportional", i+1)] = s.NonProportional
		for j := range i {
			got[fmt.Sprintf("segment correlation %d and %d correlation", j+1, i+1)] = f.SegmentCorrelation[i][j]
		}
	}
	for i, name := range f.Modules {
		for j := range i {
			got[fmt.Sprintf("module correlation %s and %s correlation", f.Modules[j], name)] = f.ModuleMatrix[i][j]
		}
	}
	for i, p := range f.Steps {
		got[fmt.Sprintf("default step %d probability", i)] = p
	}
	for _, s := range f.Solvency {
		got["default solvency ratio "+strconv.FormatFloat(100*s.Ratio, 'f', 0, 64)+"% probability"] = s.Probability
	}
	for _, p := range f.Patterns {
		for i, events := range p.Alternatives {
			for j, x := range events {
				got[fmt.Sprintf("pattern %s alternative %d event %d", p.Kind, i+1, j+1)] = x
			}
		}
	}
	seen := 0
	for _, table := range []string{"constant", "segment", "segment correlation", "module correlation", "default", "pattern"} {
		for _, row := range portfoliotest.PublishedValues(t, "../../..", "standard formula "+table) {
			if row.Mark == "C" {
				continue // follows from the others; tested where it is computed
			}
			key := strings.TrimPrefix(table+" "+row.Case+" "+row.Quantity, "constant 2015/35 ")
			if table == "constant" {
				key = "constant " + row.Quantity
			}
			x, ok := got[key]
			if !ok || x != row.Value {
				t.Errorf("%s: %v in the file (there: %t), published %s", key, x, ok, row.Text)
			}
			seen++
		}
	}
	if seen != len(got) {
		t.Errorf("%d published values, %d numbers in the file", seen, len(got))
	}
	if f.CollateralUsed != 1 || strings.Join(f.ManMade, " ") != "fire motor marine aviation liability credit" {
		t.Errorf("collateral %v, man-made %q", f.CollateralUsed, f.ManMade)
	}
}

// TestBadFactorFiles changes the shipped file in one place.
func TestBadFactorFiles(t *testing.T) {
	text := shipped(t)
	lineOf := func(part string) int {
		before, _, ok := strings.Cut(text, part)
		if !ok {
			t.Fatalf("the file has no %q", part)
		}
		return strings.Count(before, "\n") + 1
	}
	for _, c := range []struct{ old, new, key, words string }{
		{"multiple: 3\n", "multiple: three\n", "multiple", `"three"; allowed: a number`},
		{"multiple: 3\n", "multiple: 0\n", "multiple", "above 0"},
		{"multiple: 3\n", "multipel: 3\n", "multipel", `did you mean "multiple"?`},
		{"high: 20%\n", "high: 5%\n", "high", "more than low"},
		{"high: 20%\n", "high: 20%\nhigh: 20%\n", "high", "stands twice"},
		{"number: 12,", "number: 11,", "segments[11].number", "11 is the number of another"},
		{"premium: 6.4%", "premium: 640%", "segments[7].premium", "6.4; allowed"},
		{"reserve: 17.2%, ", "", "segments[5].reserve", "the key is missing"},
		{"kind: hail", "kind: hale", "patterns[3].kind", `did you mean "hail"?`},
		{"[70%, 50%]", "[70%, -50%]", "patterns[3].alternatives[0][1]", "-0.5"},
		{"aviation,", "aviaton,", "man_made[3]", `did you mean "aviation"?`},
		{"[market, default, life,", "[market, life, default,", "modules", "in this order"},
		{"[0.25,  0.5,    0,    0,    1]", "[0.25,  0.5,    0,    0]", "module_matrix[4]", "4 correlations"},
		{"1.2%, 4.2%, 4.2%]", "1.2%, 4.2%, 4.1%]", "steps[6]", "0.041 after 0.042"},
		{"ratio: 122%", "ratio: 125%", "solvency[4].ratio", "1.25 after 1.25"},
		{"name: eu-2015-35", "name: 2015", "name", "not text"},
	} {
		line := lineOf(c.old)
		if strings.Contains(c.words, "twice") {
			line++
		}
		_, err := ReadFactors([]byte(strings.Replace(text, c.old, c.new, 1)), "mine.yaml")
		all := fault.All(err)
		if len(all) != 1 || all[0].Key != c.key || all[0].Line != line || all[0].File != "mine.yaml" || !strings.Contains(all[0].Error(), c.words) {
			t.Errorf("%q for %q: %v, want one fault of %s on line %d with %q", c.new, c.old, err, c.key, line, c.words)
		}
	}
	// All at once, in the order of the file.
	three := strings.NewReplacer("multiple: 3\n", "multiple: 0\n", "low: 7%", "low: x", "premium: 6.4%", "premium: 0%").Replace(text)
	_, err := ReadFactors([]byte(three), "mine.yaml")
	var keys []string
	for _, f := range fault.All(err) {
		keys = append(keys, f.Key)
	}
	if got := strings.Join(keys, " "); got != "segments[7].premium multiple low low_multiple" && got != "segments[7].premium multiple low" {
		t.Errorf("faults of %q: %v", got, err)
	}
}

func TestFilesThatHoldNoFactors(t *testing.T) {
	for name, c := range map[string]struct{ text, words string }{
		"empty":     {" \n", "the file is empty"},
		"comments":  {"# nothing\n", "nothing but comments"},
		"two":       {"name: a\n---\nname: b\n", "a second document"},
		"binary":    {"name: \x00", "not text in UTF-8"},
		"latin":     {"name: Pr\xe4mie", "not text in UTF-8"},
		"a list":    {"[1, 2]\n", "not a group of keys"},
		"syntax":    {"name: [a\n", "well-formed YAML"},
		"too large": {strings.Repeat("#", largestStudy+1), "more than 16 MiB"},
	} {
		f, err := ReadFactors([]byte(c.text), "mine.yaml")
		if err == nil || !strings.Contains(err.Error(), c.words) || !strings.HasPrefix(err.Error(), "mine.yaml:") || strings.Contains(err.Error(), "study") {
			t.Errorf("%s: %v, want %q", name, err, c.words)
		}
		if f.Name != "" || f.Segments != nil {
			t.Errorf("%s: factors beside an error: %+v", name, f)
		}
	}
	// A file as other systems write it is the same file.
	text := strings.ReplaceAll(shipped(t), "\n", "\r\n")
	if _, err := ReadFactors([]byte("\xef\xbb\xbf"+text), "mine.yaml"); err != nil {
		t.Error(err)
	}
}

// ExampleReadFactors asks the shipped factors for the probability of default of a reinsurer without a rating.
func ExampleReadFactors() {
	data, _ := ShippedFactors("eu-2015-35")
	factors, err := ReadFactors(data, "standard-formula-2015-35.yaml")
	if err != nil {
		fmt.Println(err)
		return
	}
	var scratch capital.FormulaScratch
	formula := capital.Formula{
		Factors: factors, NonProportional: capital.Always,
		Classes: []capital.FormulaClass{{Segment: 3, Reserves: 50, Diversification: 1}}, // fire and other property
	}
	figures := formula.Require(capital.FormulaPosition{Premium: []float64{100}}, 0, &scratch)
	fmt.Printf("ratio 162.5 %%: %.3f %%\n", 100*factors.UnratedProbability(1.625))
	fmt.Printf("premium and reserve risk: %.4f\n", figures.PremiumReserve)
	// Output:
	// ratio 162.5 %: 0.075 %
	// premium and reserve risk: 29.6924
}
