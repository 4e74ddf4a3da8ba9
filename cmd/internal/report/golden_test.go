package report

import (
	"bytes"
	"flag"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
)

var update = flag.Bool("update", false, "write the golden files anew; explain every changed figure in the commit")

const goldenFolder = "testdata/golden"

// marramRun is a run's effective settings.
var marramRun = []Setting{{"seed", "1", "search.seed"}, {"population", "100", "default"}, {"generations", "200", "--generations"}}

// goldens are the outputs that are compared letter by letter, by file.
func goldens() map[string]func(io.Writer) error {
	text := func(print func(io.Writer)) func(io.Writer) error {
		return func(w io.Writer) error { print(w); return nil }
	}
	s, a, f, l := marramSearched(), marramAppraised(), study.Fitted{Head: marramHead(), Curves: marramCurves()}, marramLook()
	files := map[string]func(io.Writer) error{
		"look.txt":            text(func(w io.Writer) { PrintLook(w, l, Style{}) }),
		"fit.txt":             text(func(w io.Writer) { PrintFitted(w, f, Style{}) }),
		"appraise.txt":        text(func(w io.Writer) { PrintAppraised(w, a, Style{}) }),
		"search.txt":          text(func(w io.Writer) { PrintSearched(w, s, Style{}) }),
		"search-narrow.txt":   text(func(w io.Writer) { PrintSearched(w, s, Style{Width: 72}) }),
		"appraise-colour.txt": text(func(w io.Writer) { PrintAppraised(w, a, Style{Colour: true}) }),
		"look.json":           func(w io.Writer) error { return LookJSON(w, l) },
		"fit.json":            func(w io.Writer) error { return FittedJSON(w, f) },
		"appraise.json":       func(w io.Writer) error { return AppraisedJSON(w, a) },
		"search.json":         func(w io.Writer) error { return SearchedJSON(w, s, marramRun) },
		"report.html":         func(w io.Writer) error { return Paper(w, s, marramRun) },
		"frontier.csv":        func(w io.Writer) error { return FrontierCSV(w, s) },
	}
	company := companySearched()
	files["appraise-company.txt"] = text(func(w io.Writer) { PrintAppraised(w, company.Appraised, Style{Width: 110}) })
	files["search-company.txt"] = text(func(w io.Writer) { PrintSearched(w, company, Style{Width: 110}) })
	files["appraise-company.json"] = func(w io.Writer) error { return AppraisedJSON(w, companyAppraised()) }
	files["report-company.html"] = func(w io.Writer) error { return Paper(w, company, marramRun) }
	for _, picture := range CurvePictures(s.Curves) {
		if strings.HasSuffix(picture.Name, ".svg") { // a PNG has no lines to compare; see TestCurvePNG
			files[picture.Name] = picture.Write
		}
	}
	return files
}

// TestGolden compares every output with its file; the version of program and Go is not part of it.
func TestGolden(t *testing.T) {
	for name, build := range goldens() {
		var b bytes.Buffer
		if err := build(&b); err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		got := strings.ReplaceAll(b.String(), Version(), "cedewright VERSION")
		path := filepath.Join(goldenFolder, name)
		if *update {
			if err := os.MkdirAll(goldenFolder, 0o755); err != nil {
				t.Fatal(err)
			}
			if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
			continue
		}
		want, err := os.ReadFile(path)
		if err != nil {
			t.Errorf("%s is missing; run the test with -update and look at it: %v", name, err)
			continue
		}
		if wanted := strings.ReplaceAll(string(want), "\r\n", "\n"); got != wanted {
			t.Errorf("%s differs from its golden file:\n%s", name, firstDifference(got, wanted))
		}
	}
}

// TestNoOrphanGolden: no golden file stands there that no test compares.
func TestNoOrphanGolden(t *testing.T) {
	entries, err := os.ReadDir(goldenFolder)
	if err != nil {
		t.Fatal(err)
	}
	known := goldens()
	for _, e := range entries {
		if known[e.Name()] == nil {
			t.Errorf("%s is compared with nothing", e.Name())
		}
	}
	if len(entries) != len(known) {
		t.Errorf("%d golden files for %d outputs", len(entries), len(known))
	}
}

func firstDifference(got, want string) string {
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range min(len(g), len(w)) {
		if g[i] != w[i] {
			return "line " + thousands(i+1) + "\n got " + g[i] + "\nwant " + w[i]
		}
	}
	return thousands(len(g)) + " lines, want " + thousands(len(w))
}
