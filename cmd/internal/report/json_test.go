package report

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"reflect"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/treaty"
)

// TestJSONOfOddResults: every document is valid JSON, whatever is no number in it, and reads back with its signs as they were.
func TestJSONOfOddResults(t *testing.T) {
	for name, s := range oddSearches() {
		for _, build := range []func(io.Writer) error{
			func(w io.Writer) error { return SearchedJSON(w, s, marramRun) },
			func(w io.Writer) error { return AppraisedJSON(w, s.Appraised) },
			func(w io.Writer) error { return FittedJSON(w, study.Fitted{Head: s.Head, Curves: s.Curves}) },
		} {
			var b bytes.Buffer
			if err := build(&b); err != nil {
				t.Errorf("%s: %v", name, err)
				continue
			}
			var document struct{ Study string }
			if err := json.Unmarshal(b.Bytes(), &document); err != nil {
				t.Errorf("%s: %v", name, err)
			}
			if document.Study != s.Title {
				t.Errorf("%s: the title %q reads back as %q", name, s.Title, document.Study)
			}
		}
	}
}

// spoil makes every float of a result NaN or infinite, but not the terms of treaties and the rules of standards, which are checked before anything is computed.
func spoil(v reflect.Value, with float64) {
	if v.Type() == reflect.TypeFor[treaty.Treaty]() || v.Type() == reflect.TypeFor[capital.Standard]() {
		return
	}
	switch v.Kind() {
	case reflect.Float64:
		v.SetFloat(with)
	case reflect.Struct:
		for i := range v.NumField() {
			if v.Field(i).CanSet() {
				spoil(v.Field(i), with)
			}
		}
	case reflect.Pointer:
		if !v.IsNil() && v.Type() == reflect.TypeFor[*optimize.Alone]() {
			spoil(v.Elem(), with)
		}
	case reflect.Slice, reflect.Array:
		for i := range v.Len() {
			spoil(v.Index(i), with)
		}
	}
}

func TestNoFigureBreaksTheDocument(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		l := marramLook()
		spoil(reflect.ValueOf(&l).Elem(), bad)
		a, company := marramAppraised(), companyAppraised()
		spoil(reflect.ValueOf(&a).Elem(), bad)
		spoil(reflect.ValueOf(&company).Elem(), bad)
		for _, build := range []func(io.Writer) error{
			func(w io.Writer) error { return LookJSON(w, l) }, func(w io.Writer) error { return AppraisedJSON(w, a) }, func(w io.Writer) error { return AppraisedJSON(w, company) },
		} {
			var b bytes.Buffer
			if err := build(&b); err != nil || !json.Valid(b.Bytes()) {
				t.Errorf("%v: %v", bad, err)
			}
		}
		var text bytes.Buffer
		PrintLook(&text, l, Style{})
		PrintAppraised(&text, a, Style{})
		PrintAppraised(&text, company, Style{})
		if s := text.String(); strings.Contains(s, "NaN") || strings.Contains(s, "Inf") {
			t.Errorf("the text holds %v:\n%s", bad, s)
		}
	}
}

// TestFieldsKeepTheirOrder: a reader finds the names first.
func TestFieldsKeepTheirOrder(t *testing.T) {
	var b bytes.Buffer
	if err := AppraisedJSON(&b, marramAppraised()); err != nil {
		t.Fatal(err)
	}
	last := -1
	for _, key := range []string{`"study"`, `"currency"`, `"years"`, `"gross"`, `"programmes"`, `"name"`, `"ceded_premium"`, `"treaties"`} {
		at := strings.Index(b.String(), key)
		if at <= last {
			t.Errorf("%s stands at %d, before %d", key, at, last)
		}
		last = at
	}
	odd, err := json.Marshal(object{{"a<b", "<&>"}, {"n", none}})
	if err != nil || !json.Valid(odd) {
		t.Errorf("%s (%v)", odd, err)
	}
}

// TestKeysAreUnique: no object of any document names a key twice.
func TestKeysAreUnique(t *testing.T) {
	for name, build := range goldens() {
		if !strings.HasSuffix(name, ".json") {
			continue
		}
		var b bytes.Buffer
		if err := build(&b); err != nil {
			t.Fatal(err)
		}
		d := json.NewDecoder(&b)
		if err := uniqueKeys(d); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// uniqueKeys reads one value and fails on a key that comes twice.
func uniqueKeys(d *json.Decoder) error {
	token, err := d.Token()
	if err != nil {
		return err
	}
	opening, ok := token.(json.Delim)
	if !ok {
		return nil
	}
	seen := map[string]bool{}
	for d.More() {
		if opening == '{' {
			key, err := d.Token()
			if err != nil {
				return err
			}
			if name := key.(string); seen[name] {
				return fmt.Errorf("the key %q comes twice", name)
			} else {
				seen[name] = true
			}
		}
		if err := uniqueKeys(d); err != nil {
			return err
		}
	}
	_, err = d.Token()
	return err
}

func TestBound(t *testing.T) {
	s := marramSearched()
	s.Bound = optimize.Bound{Known: true, TotalCost: 12, Reason: "a reason"}
	if b := bound(s); !math.IsNaN(float64(b[0].value.(number))) || b[1].value.(bool) || b[2].value.(string) != "a reason" {
		t.Errorf("a bound that is not certified: %v", b)
	}
	s.Bound.Certified = true
	if b := bound(s); float64(b[0].value.(number)) != 12 || !b[1].value.(bool) {
		t.Errorf("a certified bound: %v", b)
	}
	s.Bound.Known = false
	if b := bound(s); !math.IsNaN(float64(b[0].value.(number))) || b[1].value.(bool) {
		t.Errorf("a bound that is not known: %v", b)
	}
	if text := boundWords(s); text != "No lower bound is known: a reason." {
		t.Errorf("a bound that is not known: %q", text)
	}
	s.Result.Status = optimize.Proven
	if b := bound(s); float64(b[0].value.(number)) != s.Result.Best.TotalCost.Value {
		t.Errorf("the bound of an exhausted space: %v", b)
	}
}
