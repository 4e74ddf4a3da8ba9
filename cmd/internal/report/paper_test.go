package report

import (
	"bytes"
	"encoding/csv"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

const nasty = `<script>alert("x")</script> & 'more' ]]> =1+1` + "\x1b[31m\x00"

// oddSearches are results at the edges of what a search can give.
func oddSearches() map[string]study.Searched {
	all := map[string]study.Searched{}
	add := func(name string, change func(*study.Searched)) {
		s := marramSearched()
		change(&s)
		all[name] = s
	}
	add("usual", func(*study.Searched) {})
	all["company"] = companySearched()
	flat := companySearched()
	flat.Owners, flat.CostOfCapital, flat.Rest = "", 0.09, otherRisks
	all["company, flat rate, rest as a capital figure"] = flat
	add("one standard", func(s *study.Searched) {
		s.Standards = s.Standards[:1]
		for _, p := range append(append([]*optimize.Appraisal{&s.NoCover, &s.Start, &s.Result.Best}, pointers(s.Programmes)...), pointers(s.Result.Frontier)...) {
			p.Capital, p.OwnFundsRatio = p.Capital[:1], p.OwnFundsRatio[:1]
		}
	})
	add("empty frontier", func(s *study.Searched) { s.Result.Frontier = nil })
	add("one programme on the frontier", func(s *study.Searched) { s.Result.Frontier = s.Result.Frontier[:1] })
	add("two programmes on the frontier", func(s *study.Searched) { s.Result.Frontier = s.Result.Frontier[:2] })
	add("start without cover", func(s *study.Searched) {
		s.Start, s.Programmes, s.Scales = s.NoCover, []optimize.Appraisal{s.NoCover, s.Result.Best}, [][][]float64{{}, s.Scales[1]}
	})
	add("nothing to buy", func(s *study.Searched) {
		s.Result.Best = s.NoCover
		s.Result.Best.Programme.Name, s.Result.Frontier, s.Curves, s.Scales = "best found", nil, nil, nil
	})
	add("nothing at all", func(s *study.Searched) {
		empty := optimize.Appraisal{Capital: make([]optimize.CapitalFigure, 1)}
		*s = study.Searched{Start: empty, NoCover: empty, Result: optimize.Result{Best: empty}}
	})
	add("relief below zero, margin below zero", func(s *study.Searched) {
		s.Start.Driving.Relief, s.Start.CededMargin, s.Start.RentDefined = est(-30e6, 4e6), est(-2e6, 1e5), false
	})
	add("unlimited layer, overlapping layers, odd shares", func(s *study.Searched) {
		s.Result.Best.Treaties[1].Terms.Limit = math.Inf(1)
		s.Result.Best.Treaties[2].Terms.Retention, s.Result.Best.Treaties[2].Terms.Share = 130e6, 0.37
		s.Result.Best.Treaties[3].Terms.Share = 0
	})
	add("names of every kind", func(s *study.Searched) {
		s.Title, s.Currency, s.Space, s.Notes, s.Warnings = nasty, nasty, nasty, []string{nasty}, []string{nasty}
		s.Start.Programme.Name, s.Programmes[1].Programme.Name = nasty, nasty
		s.Inputs[0].Path, s.Curves[0].Curve.Name, s.Keep[0].Standard = nasty, nasty, nasty
		s.Curve.Programmes[0], s.NoCover.Capital[0].Standard, s.Drive, s.Standards[0].Name, s.Standards[0].Source = nasty, nasty, []string{nasty}, nasty, nasty
		for i := range s.Result.Best.Treaties {
			f := &s.Result.Best.Treaties[i]
			f.Terms.Name, f.Terms.Perils, f.Terms.Classes, f.PricedBy = nasty, []string{nasty}, []string{nasty}, nasty
		}
		s.Curves[0].Chosen.Quotes[0].Name = nasty
	})
	add("no number anywhere", func(s *study.Searched) {
		nan := est(math.NaN(), math.NaN())
		b := &s.Result.Best
		b.CededPremium, b.CededMargin, b.TotalCost, b.Rent, b.NetResult.Mean, b.NetResult.StandardDeviation = nan, nan, est(1, math.Inf(1)), nan, nan, math.NaN()
		b.Capital[0].Relief, b.Capital[0].Net, b.Driving.Relief = nan, est(math.Inf(1), 1), nan
		for i := range b.Treaties {
			b.Treaties[i].AttachmentProbability, b.Treaties[i].Premium, b.Treaties[i].RateOnLine = nan, nan, math.NaN()
		}
		s.Result.Frontier[0].CededMargin, s.Curve.Net[1][3], s.OwnFunds = nan, math.NaN(), math.NaN()
		q := &s.Curves[0].Chosen.Quotes[0]
		q.Fitted, q.Residual, q.Multiple, q.LeftOut = math.NaN(), math.NaN(), math.Inf(1), math.NaN()
	})
	return all
}

func pointers(list []optimize.Appraisal) []*optimize.Appraisal {
	var all []*optimize.Appraisal
	for i := range list {
		all = append(all, &list[i])
	}
	return all
}

func wellFormed(t *testing.T, what, text string) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader("<all>" + text + "</all>"))
	for {
		if _, err := d.Token(); errors.Is(err, io.EOF) {
			return
		} else if err != nil {
			t.Errorf("%s: %v\n%.400s", what, err, text)
			return
		}
	}
}

// TestOddResults: every picture of every odd result is well-formed XML with a name for those who cannot see it, and no form of output
// holds a raw name or what is no number.
func TestOddResults(t *testing.T) {
	for name, s := range oddSearches() {
		pictures := []string{frontierPicture(s), exceedancePicture(s), capitalPicture(s), towersPicture(s.Currency, s.Scales, s.Start, s.Result.Best)}
		for _, c := range s.Curves {
			pictures = append(pictures, curvePicture(c), standalone(curvePicture(c)))
		}
		for _, picture := range pictures {
			wellFormed(t, name, picture)
			if n := strings.Count(picture, "<svg"); strings.Count(picture, `role="img"`) != n || strings.Count(picture, "<desc>") != n {
				t.Errorf("%s: a picture has no name", name)
			}
		}
		var page, text, csvText bytes.Buffer
		if err := Paper(&page, s, marramRun); err != nil {
			t.Errorf("%s: %v", name, err)
		}
		PrintSearched(&text, s, Style{})
		if err := FrontierCSV(&csvText, s); err != nil {
			t.Errorf("%s: %v", name, err)
		}
		for form, b := range map[string]string{"page": page.String(), "text": text.String(), "csv": csvText.String()} {
			for _, never := range []string{"NaN", "Inf", "%!", "\x1b", "\x00"} {
				if strings.Contains(b, never) {
					at := strings.Index(b, never)
					t.Errorf("%s: the %s holds %q: …%s…", name, form, never, b[max(0, at-60):min(len(b), at+20)])
				}
			}
		}
		if strings.Contains(page.String(), "<script") {
			t.Errorf("%s: a name reached the page as markup", name)
		}
		if !strings.Contains(page.String(), "not a regulatory filing") || !strings.Contains(text.String(), "not a regulatory filing") {
			t.Errorf("%s: the caution is missing", name)
		}
	}
}

// TestPaperStandsAlone: the page loads nothing.
func TestPaperStandsAlone(t *testing.T) {
	var b bytes.Buffer
	if err := Paper(&b, marramSearched(), nil); err != nil {
		t.Fatal(err)
	}
	text := strings.ReplaceAll(b.String(), `xmlns="http://www.w3.org/2000/svg"`, "")
	for _, outside := range []string{"http:", "https:", "src=", "href=", "<script", "@import", "url("} {
		if strings.Contains(text, outside) {
			t.Errorf("the page holds %q", outside)
		}
	}
}

func TestRecommendation(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*study.Searched)
		wants  []string
	}{
		"usual": {func(*study.Searched) {}, []string{
			"Buy “best found”: 5 treaties for EUR 8.68m ± 0.08m of premium a year, which costs a margin of 5.53m ± 0.06m a year and frees 96m ± 5m of required capital (one-year), a rent of 5.8 % ± 0.5 % against a cost of capital of 9 %.",
			"30.0m ± 0.6m a year, against 38.0m ± 0.6m with “expiring” (a difference of −8.0m ± 0.3m) and 33.1m ± 0.6m without cover."}},
		"noise": {func(s *study.Searched) { s.Differences[2].TotalCost = est(-0.4e6, 0.3e6) }, []string{"which the simulation cannot tell from none"}},
		"keep": {func(s *study.Searched) {
			s.Result.Best = s.Start
			s.Result.Best.Programme.Name = "best found"
		}, []string{"Keep “expiring”: 5 treaties", "against 33.1m ± 0.6m without cover."}},
		"nothing": {func(s *study.Searched) { s.Result.Best = s.NoCover }, []string{"Buy nothing", "with “expiring”"}},
		"no rent": {func(s *study.Searched) { s.Result.Best.RentDefined = false }, []string{"(one-year). Margin"}},
		"infeasible": {func(s *study.Searched) {
			s.Result.Feasible = false
			s.Result.Shortfalls = []optimize.Shortfall{
				{Keep: optimize.Keep{Measure: "own funds ratio", Standard: "tail", AtLeast: treaty.Some(1.6)}, Value: 1.2},
				{Keep: optimize.Keep{Measure: "ceded premium", AtMost: treaty.Some(5)}, Value: 7},
			}
		}, []string{"No programme of the space keeps every constraint; the one shown breaks them least. In the way: own funds ratio under tail is 120 %, at least 160 % is asked; ceded premium is 7, at most 5 is asked."}},
	} {
		s := marramSearched()
		c.change(&s)
		for _, want := range c.wants {
			if text := Recommendation(s); !strings.Contains(text, want) {
				t.Errorf("%s: %q does not say %q", name, text, want)
			}
		}
	}
}

func TestFrontierCSV(t *testing.T) {
	s := marramSearched()
	for i := range s.Result.Frontier {
		s.Result.Frontier[i].Programme.Name, s.Result.Frontier[i].Treaties[0].Terms.Name = "=cmd", "@x"
	}
	s.Result.Frontier[0].RentDefined = false
	var b bytes.Buffer
	if err := FrontierCSV(&b, s); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != len(s.Result.Frontier)+1 || rows[1][0] != "'=cmd" || !strings.HasPrefix(rows[1][12], "'@x: ") || rows[1][10] != "" {
		t.Errorf("frontier.csv starts with %q", rows[:2])
	}
}

// TestPanelsGroupBySubject: the order in which classes are named makes no other subject; kinds and perils do.
func TestPanelsGroupBySubject(t *testing.T) {
	a := layer("a", treaty.EventExcess, 10e6, 10e6, 1, 1e6, 5e5, 0.1, 0.05, 1e6)
	b := layer("b", treaty.EventExcess, 20e6, 10e6, 1, 1e6, 5e5, 0.1, 0.05, 1e6)
	b.Terms.Classes = []string{"commercial", "household"}
	other, unplaced := a, a
	other.Terms.Kind = treaty.RiskExcess
	unplaced.Terms.Perils, unplaced.Terms.Share = []string{"hail"}, 0
	list := panels([]optimize.Appraisal{{Treaties: []optimize.TreatyFigure{a, other, unplaced}}, {Treaties: []optimize.TreatyFigure{b}}}, [][][]float64{{nil, nil, nil}, {{1, 2}}})
	if len(list) != 2 || len(list[0].treaties[0]) != 1 || len(list[0].treaties[1]) != 1 || len(list[0].scale) != 2 || list[0].top() != 30e6 {
		t.Errorf("panels %+v", list)
	}
}

func TestQuoteMarks(t *testing.T) {
	f := &market.Fit{InSample: 0.02}
	for want, q := range map[string]market.FittedQuote{
		"weight 0, not used":      {Residual: 0.3},
		"cheap against the curve": {Quote: market.Quote{Weight: 1}, Residual: 0.05},
		"dear against the curve":  {Quote: market.Quote{Weight: 1}, Residual: -0.05},
		"alone in its range":      {Quote: market.Quote{Weight: 1}, Residual: 0.01, BelowRange: true},
		"":                        {Quote: market.Quote{Weight: 1}, Residual: 0.03},
	} {
		if got := quoteMark(f, q); got != want {
			t.Errorf("residual %v is marked %q, want %q", q.Residual, got, want)
		}
	}
}
