package settings

import (
	"bytes"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"cedewright/portfolio/fault"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
)

const good = "testdata/good/coast"

// goods name, together, every key; those of good come first, the others have what cannot stand beside them.
var goods = []string{good, "testdata/good/company", "testdata/good/owners"}

// sameStudy compares what studies say, not where they say it.
var sameStudy = cmp.Options{
	cmpopts.IgnoreUnexported(Study{}), cmpopts.IgnoreFields(Study{}, "File", "Folder", "Bytes"),
	cmp.Comparer(func(a, b Level) bool { return a == b }),
}

func load(t *testing.T, path string) Study {
	t.Helper()
	s, err := Load(path)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestFormatsAgree loads the same studies from YAML, JSON and TOML.
func TestFormatsAgree(t *testing.T) {
	for _, name := range goods {
		want := load(t, name+".yaml")
		for _, extension := range []string{".json", ".toml"} {
			if diff := cmp.Diff(want, load(t, name+extension), sameStudy...); diff != "" {
				t.Errorf("%s%s (- YAML, + other):\n%s", name, extension, diff)
			}
		}
	}
}

// TestPlacesAgreeWithTheText looks, in each format, at the line and column of a value and wants its text there.
func TestPlacesAgreeWithTheText(t *testing.T) {
	for _, extension := range []string{".yaml", ".json", ".toml"} {
		s := load(t, good+extension)
		lines := strings.Split(string(s.Bytes), "\n")
		for key, text := range map[string]string{
			"study": "Coa", "book.classes[1].premium": "1.5bn", "book.models[3].severity.xi": "0.5", "programmes[0].treaties[3].reinstatements[1]": "50%",
			"search.towers[1].event_limit": "100m", "market.own_quotes[0].rate_on_line": "12%", "capital.standards[1].level": "1 in 300",
			"capital.standards[3].formula.scenarios[1].losses[0].loss": "100m", "capital.standards[3].formula.correlations[0].correlation": "-50%",
			"capital.standards[4].covariance.charges.r5": "30m", "security.reinsurers[2].solvency_ratio": "150%", "security.panel[0].collateral": "5m",
			"programmes[0].treaties[1].panel[0].share": "100%", "search.towers[1].panel[0].reinsurer": "Dune Re", "capital.rest.correlation": "-25%",
		} {
			f := s.At(fault.Fault{Key: key})
			if f.Line < 1 || f.Line > len(lines) || f.Column < 1 || f.Column > len(lines[f.Line-1]) {
				t.Errorf("%s: %s stands at %d:%d", extension, key, f.Line, f.Column)
				continue
			}
			if at := strings.TrimLeft(lines[f.Line-1][f.Column-1:], `"`); !strings.HasPrefix(at, text) {
				t.Errorf("%s: at %d:%d, the place of %s, stands %q", extension, f.Line, f.Column, key, at)
			}
		}
		if f := s.At(fault.Fault{Key: "programmes[0].treaties[0].perils[7]"}); f.Line != s.places["programmes[0].treaties[0]"].line || f.File != s.File {
			t.Errorf("a key that is not there is placed at %s:%d", f.File, f.Line)
		}
	}
}

// TestGoodFileHasEveryKey holds the good files to name every key that a study may have, so that the tests above speak for all of them.
func TestGoodFileHasEveryKey(t *testing.T) {
	seen := map[string]bool{}
	var visit func(v reflect.Value)
	visit = func(v reflect.Value) {
		switch v.Kind() {
		case reflect.Pointer:
			if !v.IsNil() {
				visit(v.Elem())
			}
		case reflect.Slice:
			for i := range v.Len() {
				visit(v.Index(i))
			}
		case reflect.Struct:
			for _, f := range fieldsOf(v.Type()) {
				key := v.Type().Name() + "." + f.name
				if len(f.index) > 1 {
					key = v.Type().FieldByIndex(f.index[:1]).Type.Name() + "." + f.name // of an embedded struct
				}
				seen[key] = seen[key] || !v.FieldByIndex(f.index).IsZero()
				visit(v.FieldByIndex(f.index))
			}
		}
	}
	for _, name := range goods {
		visit(reflect.ValueOf(load(t, name+".yaml")))
	}
	for key, used := range seen {
		if !used {
			t.Errorf("the good files do not use %s", key)
		}
	}
	if len(seen) < 180 {
		t.Errorf("only %d keys were looked at", len(seen))
	}
}

// TestWriteAndReadAgain writes every study that loads and reads it back to an equal one.
func TestWriteAndReadAgain(t *testing.T) {
	for _, path := range []string{goods[0] + ".yaml", goods[1] + ".yaml", goods[2] + ".yaml", "../../../configs/marram-coast.yaml", "../../../configs/danish-fire.yaml"} {
		s := load(t, path)
		text, err := s.YAML()
		if err != nil {
			t.Fatal(err)
		}
		again, err := Parse(text, path)
		if err != nil {
			t.Fatalf("%s, written back:\n%s\n%v", path, text, err)
		}
		if diff := cmp.Diff(s, again, sameStudy...); diff != "" {
			t.Errorf("%s (- first, + again):\n%s", path, diff)
		}
		if twice, err := again.YAML(); err != nil || !bytes.Equal(text, twice) {
			t.Errorf("%s is written in two ways (%v)", path, err)
		}
	}
}

func TestWithRun(t *testing.T) {
	s := load(t, good+".yaml")
	seed := uint64(99)
	e := s.With(Run{Seed: &seed, Generations: 7})
	if *e.Search.Seed != 99 || *e.Search.Generations != 7 || *e.Search.Population != 50 || *s.Search.Seed != 1 || *s.Search.Generations != 20 {
		t.Errorf("effective %+v, study %+v", e.Search, s.Search)
	}
	if (Study{}).With(Run{Seed: &seed}).Search != nil {
		t.Error("a study without a search has got one")
	}
}

// TestBytesAroundText takes a byte order mark and lines that end as on other systems.
func TestBytesAroundText(t *testing.T) {
	for _, extension := range []string{".yaml", ".json", ".toml"} {
		want := load(t, good+extension)
		text := append([]byte("\xef\xbb\xbf"), bytes.ReplaceAll(want.Bytes, []byte("\n"), []byte("\r\n"))...)
		got, err := Parse(text, want.File)
		if err != nil {
			t.Errorf("%s: %v", extension, err)
			continue
		}
		if diff := cmp.Diff(want, got, sameStudy...); diff != "" {
			t.Errorf("%s:\n%s", extension, diff)
		}
		if diff := cmp.Diff(want.places, got.places, cmp.AllowUnexported(place{})); diff != "" {
			t.Errorf("%s: places:\n%s", extension, diff)
		}
	}
}

// TestAliasesAndMerges says the same twice: in full, and with anchors.
func TestAliasesAndMerges(t *testing.T) {
	const head = "study: a\ncurrency: EUR\nbook: {years: 10, classes: [{name: h, premium: 1m}], models: [{name: m, peril: w, frequency: {family: poisson, mean: 1}, severity: {family: exponential, mean: 1m}, split: [{class: h, share: 1}]}]}\n" +
		"capital: {cost: 1%, standards: [{name: s, preset: eu-one-year}]}\nmarket: {curves: [{name: c, family: wang, parameter: 0.2}]}\n"
	const full = head + `programmes:
  - name: p
    treaties:
      - {name: one, kind: event-excess, classes: [h], retention: 1m, limit: 1m, reinstatements: [1], curve: c}
      - {name: two, kind: event-excess, classes: [h], retention: 2m, limit: 3m, reinstatements: [1], curve: c}
      - {name: three, kind: event-excess, classes: [h], retention: 5m, limit: 1m, share: 50%, reinstatements: [1], curve: c}
`
	const short = head + `programmes:
  - name: p
    treaties:
      - &one {name: one, kind: event-excess, classes: &h [h], retention: 1m, limit: &m 1m, reinstatements: [1], curve: c}
      - &two {<<: *one, name: two, retention: 2m, limit: 3m}
      - {limit: *m, <<: [{name: three, share: 50%, retention: 5m}, *two], classes: *h}
`
	want, err := Parse([]byte(full), "full.yaml")
	if err != nil {
		t.Fatal(err)
	}
	got, err := Parse([]byte(short), "short.yaml")
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want, got, sameStudy...); diff != "" {
		t.Errorf("(- full, + anchors):\n%s", diff)
	}
}

// TestSmallFilesDoNotBlowUp gives a file of few bytes that stands for very many values.
func TestSmallFilesDoNotBlowUp(t *testing.T) {
	list := func(item string) string { return "[" + strings.Repeat(item+", ", 999) + item + "]" }
	for name, text := range map[string]string{
		"aliases": "study: a\nx: &a " + list("{name: t}") + "\nprogrammes: " + list("{name: p, treaties: *a}") + "\ny: &p {name: p, treaties: *a}\n",
		"merges":  "study: a\nx: &a {a1: 1, a2: 1, a3: 1}\ny: &b {<<: " + list("*a") + "}\nz: &c {<<: " + list("*b") + "}\nbook: {<<: " + list("*c") + "}\n",
		"unknown": "study: a\nbook: {" + strings.Repeat("? x\n, ", 3000) + "}\n",
	} {
		_, err := Parse([]byte(text), "bomb.yaml")
		all := fault.All(err)
		if len(all) == 0 || len(all) > mostFaults+1 {
			t.Errorf("%s: %d faults", name, len(all))
		}
		if name != "unknown" && !strings.Contains(err.Error(), "more than 200,000 values") && !strings.Contains(err.Error(), "more faults") {
			t.Errorf("%s: %v", name, all[0])
		}
	}
}

// TestManyFaultsAreCut tells a hundred and says how many more there are.
func TestManyFaultsAreCut(t *testing.T) {
	// 150 premiums, 149 names and no standard
	text := "study: a\ncurrency: EUR\nbook: {years: 1, classes: [" + strings.Repeat("{name: a, premium: x}, ", 150) + "]}\ncapital: {cost: 0, standards: []}\n"
	_, err := Parse([]byte(text), "many.yaml")
	all := fault.All(err)
	if len(all) != mostFaults+1 || !strings.Contains(all[mostFaults].Found, "and 200 more faults") {
		t.Errorf("%d faults, the last %v", len(all), all[len(all)-1])
	}
}

func TestLoadSaysWhichFile(t *testing.T) {
	folder := t.TempDir()
	big := filepath.Join(folder, "big.yaml")
	if err := os.WriteFile(big, bytes.Repeat([]byte("# a comment\n"), largestStudy/12+1), 0o600); err != nil {
		t.Fatal(err)
	}
	for path, want := range map[string]string{
		folder:                              "is a folder",
		big:                                 "more than 16 MiB",
		filepath.Join(folder, "bgi.yaml"):   fmt.Sprintf("no such file; allowed: the path of a study file; did you mean %q?", big),
		filepath.Join(folder, "x", "y.yml"): "no such file",
	} {
		if _, err := Load(path); err == nil || !strings.Contains(err.Error(), want) || !strings.HasPrefix(err.Error(), path) {
			t.Errorf("%s: got %v, want %q", path, err, want)
		}
	}
}

func TestPathsResolveAgainstTheStudy(t *testing.T) {
	s := Study{Folder: filepath.Join("some", "folder")}
	if got, want := s.Path("../losses.csv"), filepath.Join("some", "losses.csv"); got != want {
		t.Errorf("got %s, want %s", got, want)
	}
	absolute, err := filepath.Abs("losses.csv")
	if err != nil {
		t.Fatal(err)
	}
	if got := s.Path(absolute); got != absolute {
		t.Errorf("an absolute path has become %s", got)
	}
}

// FuzzParse feeds the loader of each format; it may refuse, but not panic, and what it takes it must write and read again.
func FuzzParse(f *testing.F) {
	for _, pattern := range []string{"testdata/good/*.yaml", "testdata/good/*.json", "testdata/good/*.toml", "testdata/bad/*"} {
		paths, err := filepath.Glob(pattern)
		if err != nil {
			f.Fatal(err)
		}
		for _, path := range paths {
			data, err := os.ReadFile(path)
			if err != nil {
				f.Fatal(err)
			}
			f.Add(data, filepath.Ext(path))
		}
	}
	f.Fuzz(func(t *testing.T, data []byte, extension string) {
		path := "study.yaml"
		if extension == ".json" || extension == ".toml" {
			path = "study" + extension
		}
		s, err := Parse(data, path)
		if err != nil {
			for _, one := range fault.All(err) {
				if one.File != path || one.Error() == "" {
					t.Fatalf("a fault without file or words: %#v", one)
				}
			}
			return
		}
		text, err := s.YAML()
		if err != nil {
			t.Fatal(err)
		}
		again, err := Parse(text, path[:5]+".yaml")
		if err != nil {
			t.Fatalf("written back:\n%s\n%v", text, err)
		}
		if !cmp.Equal(s, again, sameStudy...) {
			t.Fatalf("read again as another study:\n%s\n%s", text, cmp.Diff(s, again, sameStudy...))
		}
	})
}

func TestTermsTakeDefaults(t *testing.T) {
	s := load(t, good+".yaml")
	p := s.Programmes[0].Terms()
	if got := p.Treaties[0]; got.Share != 0 || got.Cession != 0.2 || got.Commission.Value != 0.27 || !got.Commission.Given {
		t.Errorf("quota share: %+v", got)
	}
	if got := p.Treaties[1]; got.Share != 0.9 || got.Reinstatements == nil || len(got.Reinstatements) != 0 {
		t.Errorf("an empty list of reinstatements is none, not absent: %+v", got)
	}
	if got := p.Treaties[2]; got.Share != 1 || got.Reinstatements != nil || !math.IsInf(got.Limit, 1) || !got.Premium.Given {
		t.Errorf("unlimited layer: %+v", got)
	}
	if got := p.Treaties[4]; got.Share != 1 || got.Curve != "casualty" {
		t.Errorf("stop: %+v", got)
	}
	if source := s.Capital.Standards[0].Rule().Source; !strings.Contains(source, "2009/138/EC") {
		t.Errorf("source of the preset is %q", source)
	}
	other := s.Capital.Standards[0]
	other.Basis = "deviation"
	if source := other.Rule().Source; source != "set in the study, from the preset eu-one-year" {
		t.Errorf("a preset that the study changes has the source %q", source)
	}
	m := s.Book.Attritional.Matrix()
	if m[0][0] != 1 || m[0][1] != -0.3 || m[1][0] != -0.3 || m[0][2] != 0.1 || m[2][1] != 0.1 {
		t.Errorf("correlations %v", m)
	}
	space, err := s.Space()
	if err != nil || len(space.Vary) != 3 || len(space.Towers) != 2 || len(space.Keep) != 2 || space.Towers[1].Template.EventLimit != 100e6 {
		t.Errorf("space %+v, %v", space, err)
	}
}
