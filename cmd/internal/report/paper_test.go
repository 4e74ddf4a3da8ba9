package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// appraisalOf gives an appraisal with figures of plausible size.
func appraisalOf(name string, margin, relief float64, treaties ...treaty.Treaty) optimize.Appraisal {
	a := optimize.Appraisal{
		Programme: treaty.Programme{Name: name, Treaties: treaties},
		Capital:   []optimize.CapitalFigure{{Standard: "one-year", Gross: optimize.Estimate{Value: 300e6, StandardError: 9e6}, Net: optimize.Estimate{Value: 300e6 - relief, StandardError: 8e6}, Relief: optimize.Estimate{Value: relief, StandardError: 4e6}}},
	}
	a.CededMargin = optimize.Estimate{Value: margin, StandardError: 1e5}
	a.TotalCost = optimize.Estimate{Value: margin + 0.09*(300e6-relief), StandardError: 7e5}
	a.Rent, a.RentDefined = optimize.Estimate{Value: margin / relief, StandardError: 0.01}, relief > 0
	for _, u := range treaties {
		a.Treaties = append(a.Treaties, optimize.TreatyFigure{Terms: u, Premium: optimize.Estimate{Value: 1e6, StandardError: 2e4}, AttachmentProbability: optimize.Estimate{Value: 0.04}})
	}
	return a
}

// found gives the result of a search whose names hold what HTML must escape.
func found(frontier int, names ...string) study.Searched {
	layer := treaty.Treaty{Name: names[0], Kind: treaty.EventExcess, Retention: 40e6, Limit: 60e6, Share: 0.5, Perils: []string{names[0]}}
	none, start := appraisalOf("no cover", 0, 0), appraisalOf(names[0], 8e6, 60e6, layer)
	best := appraisalOf("best found", 5e6, 90e6, layer, treaty.Treaty{Name: "q", Kind: treaty.QuotaShare, Cession: 0.1})
	s := study.Searched{
		Appraised: study.Appraised{Head: study.Head{Title: names[0], Currency: "EUR", Years: 1000, Warnings: []string{names[0]}}, CostOfCapital: 0.09, Programmes: []optimize.Appraisal{none, start, best}},
		NoCover:   none, Start: start,
		Curve:  study.ExceedanceCurves{ReturnPeriods: []float64{2, 10, 100}, Gross: []float64{10e6, 50e6, 200e6}, Programmes: []string{names[0], "best found"}, Net: [][]float64{{9e6, 30e6, 90e6}, {9e6, 40e6, 80e6}}},
		Curves: []study.CurveFit{{Curve: market.Curve{Name: names[0], Distortion: market.Wang{Lambda: 0.4}}}},
	}
	s.Scales = [][][]float64{{{1, 2, 3, 10e6, 20e6, 40e6, 80e6, 200e6, 400e6}}, {{1, 2, 3, 10e6, 20e6, 40e6, 80e6, 200e6, 400e6}, nil}}
	s.Differences = []study.Difference{{Programme: "best found", Against: names[0], TotalCost: optimize.Estimate{Value: -6e6, StandardError: 3e5}}}
	s.Result = optimize.Result{Best: best, Feasible: true, Status: optimize.Settled}
	for i := range frontier {
		s.Result.Frontier = append(s.Result.Frontier, appraisalOf("frontier", float64(i)*1e6, float64(i)*10e6, layer))
	}
	return s
}

const nasty = `<script>alert("x")</script> & 'more' =1+1`

// TestPaperIsWellFormed: every picture is well-formed and nothing of a name reaches the page unescaped, for empty, short and full frontiers.
func TestPaperIsWellFormed(t *testing.T) {
	for _, n := range []int{0, 1, 2, 40} {
		s := found(n, nasty)
		var b bytes.Buffer
		if err := Paper(&b, s, nil); err != nil {
			t.Fatal(err)
		}
		if strings.Contains(b.String(), "<script") {
			t.Error("a name reached the page unescaped")
		}
		if strings.Contains(b.String(), "NaN") {
			t.Error("the page holds NaN")
		}
		for _, picture := range []string{frontierPicture(s), exceedancePicture(s), curvePicture(s.Curves[0]), towersPicture("EUR", s.Scales, s.Start, s.Result.Best), standalone(curvePicture(s.Curves[0]))} {
			d := xml.NewDecoder(strings.NewReader("<all>" + picture + "</all>"))
			for {
				if _, err := d.Token(); errors.Is(err, io.EOF) {
					break
				} else if err != nil {
					t.Fatalf("picture with %d points: %v\n%s", n, err, picture)
				}
			}
			if !strings.Contains(picture, "<title>") || !strings.Contains(picture, `role="img"`) {
				t.Error("a picture has no title")
			}
		}
		var text bytes.Buffer
		PrintSearched(&text, s, Style{})
		for _, want := range []string{"Buy “best found”", "a difference of −6.0m ± 0.3m", Caution[:40]} {
			if !strings.Contains(text.String(), want) {
				t.Errorf("the terminal does not say %q", want)
			}
		}
	}
	s := found(0, "start")
	s.Result.Feasible = false
	s.Result.Shortfalls = []optimize.Shortfall{{Keep: optimize.Keep{Measure: "own funds ratio", AtLeast: treaty.Some(1.6)}, Value: 1.2}}
	if text := Recommendation(s); !strings.Contains(text, "No programme of the space keeps every constraint") || !strings.Contains(text, "own funds ratio is 120 %, at least 160 % is asked") {
		t.Errorf("infeasible: %s", text)
	}
}

func TestFrontierCSV(t *testing.T) {
	s := found(3, "=cmd")
	for i := range s.Result.Frontier {
		s.Result.Frontier[i].Programme.Name = "=cmd"
	}
	var b bytes.Buffer
	if err := FrontierCSV(&b, s); err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(b.String()), "\n")
	if len(lines) != 4 || !strings.HasPrefix(lines[1], "'=cmd,") || !strings.Contains(lines[1], "'=cmd: 60m xs 40m") {
		t.Errorf("frontier.csv:\n%s", b.String())
	}
}

func TestWriteFolder(t *testing.T) {
	parent := t.TempDir()
	folder := filepath.Join(parent, "run")
	good := []File{{Name: marker, Write: func(w io.Writer) error { _, err := io.WriteString(w, `{"program":"cedewright"}`); return err }}}
	if err := WriteFolder(folder, false, good); err != nil {
		t.Fatal(err)
	}
	if err := WriteFolder(folder, false, good); err == nil {
		t.Error("results were overwritten without being asked")
	}
	failing := append(good, File{Name: "x", Write: func(io.Writer) error { return errors.New("disk full") }})
	if err := WriteFolder(folder, true, failing); err == nil || !strings.Contains(err.Error(), "disk full") {
		t.Errorf("a failure while writing: %v", err)
	}
	if data, err := os.ReadFile(filepath.Join(folder, marker)); err != nil || !strings.Contains(string(data), "cedewright") {
		t.Errorf("the old results are gone: %v", err)
	}
	if entries, err := os.ReadDir(parent); err != nil || len(entries) != 1 {
		t.Errorf("half-written files stay behind: %v", entries)
	}
	if err := WriteFolder(folder, true, good); err != nil {
		t.Errorf("--replace: %v", err)
	}
}
