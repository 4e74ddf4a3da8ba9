package fault

import (
	"errors"
	"fmt"
	"io/fs"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestError(t *testing.T) {
	for want, f := range map[string]Fault{
		`study.yaml:4:12: book.years: "ten"; allowed: a whole number`: {File: "study.yaml", Line: 4, Column: 12, Key: "book.years", Found: `"ten"`, Allowed: "a whole number"},
		`line 3: loss: the field is empty`:                            {Line: 3, Key: "loss", Found: "the field is empty"},
		`shrae: unknown key; did you mean "share"?`:                   {Key: "shrae", Found: "unknown key", Nearest: "share"},
		`a.csv: cannot be read: file does not exist`:                  {File: "a.csv", Found: "cannot be read", Err: fs.ErrNotExist},
		`a.csv: file does not exist`:                                  {File: "a.csv", Err: fs.ErrNotExist},
	} {
		if got := f.Error(); got != want {
			t.Errorf("got  %s\nwant %s", got, want)
		}
	}
	if f := (&Fault{Err: fs.ErrNotExist}); !errors.Is(f, fs.ErrNotExist) {
		t.Error("the cause cannot be found")
	}
}

func TestList(t *testing.T) {
	var l List
	if l.Err() != nil || l.Len() != 0 {
		t.Error("an empty list is an error")
	}
	l.AddError(nil)
	l.Add(Fault{Found: "one"})
	var inner List
	inner.Add(Fault{Found: "two"})
	inner.Add(Fault{Found: "three"})
	l.AddError(fmt.Errorf("wrapped: %w", inner.Err()))
	l.AddError(errors.New("four"))
	all := All(fmt.Errorf("outside: %w", errors.Join(l.Err(), nil)))
	if len(all) != 4 || all[0].Found != "one" || all[2].Found != "three" || all[3].Error() != "four" {
		t.Errorf("faults %v", all)
	}
	if All(errors.New("plain")) != nil || All(nil) != nil {
		t.Error("an error without faults has some")
	}
}

func TestNearest(t *testing.T) {
	known := []string{"retention", "limit", "share", "reinstatements"}
	for word, want := range map[string]string{"shrae": "share", "Limits": "limit", "retenton": "retention", "reinstatement": "reinstatements", "premium": "", "": "", "xyz": "", "hsare": "share"} {
		if got := Nearest(word, known); got != want {
			t.Errorf("nearest to %q is %q, want %q", word, got, want)
		}
	}
	for _, word := range []string{"", "by"} { // no letter in common
		if got := Nearest(word, []string{"to"}); got != "" {
			t.Errorf("nearest to %q is %q, want none", word, got)
		}
	}
}

// TestDistance compares with the plain recursion of the definition (optimal string alignment), for all pairs of short words.
func TestDistance(t *testing.T) {
	var plain func(a, b string) int
	plain = func(a, b string) int {
		switch {
		case a == "":
			return len(b)
		case b == "":
			return len(a)
		case a[0] == b[0]:
			return plain(a[1:], b[1:])
		}
		least := 1 + min(plain(a[1:], b), plain(a, b[1:]), plain(a[1:], b[1:]))
		if len(a) > 1 && len(b) > 1 && a[0] == b[1] && a[1] == b[0] {
			least = min(least, 1+plain(a[2:], b[2:]))
		}
		return least
	}
	words := []string{""}
	for i := 0; len(words) < 121; i++ { // all words of up to four letters of a, b and c
		for _, letter := range "abc" {
			words = append(words, words[i]+string(letter))
		}
	}
	for _, a := range words {
		for _, b := range words {
			if got, want := distance(a, b), plain(a, b); got != want || got != distance(b, a) {
				t.Fatalf("distance of %q and %q is %d, and %d the other way, want %d", a, b, got, distance(b, a), want)
			}
		}
	}
	if d := distance("café", "cafe"); d != 1 {
		t.Errorf("a letter outside ASCII counts as %d changes", d)
	}
}

// TestNearestByProperty: a known word is its own nearest, and so is the word when one letter of a long word is wrong.
func TestNearestByProperty(t *testing.T) {
	known := []string{"retention", "limit", "share", "reinstatements", "annual_deductible", "annual_limit", "event_limit", "cession", "commission"}
	rapid.Check(t, func(t *rapid.T) {
		word := rapid.SampledFrom(known).Draw(t, "word")
		if got := Nearest(strings.ToUpper(word), known); got != word {
			t.Fatalf("nearest to %q itself is %q", word, got)
		}
		i := rapid.IntRange(0, len(word)-1).Draw(t, "letter")
		for _, wrong := range []string{word[:i] + word[i+1:], word[:i] + "x" + word[i+1:], word[:i] + "x" + word[i:]} {
			if got := Nearest(wrong, known); got != word {
				t.Fatalf("nearest to %q is %q, want %q", wrong, got, word)
			}
		}
	})
}

// TestErrorKeepsEverything: joined faults give one line each, in order, and their causes are found through any wrapping.
func TestErrorKeepsEverything(t *testing.T) {
	var l List
	for i := range 30 {
		l.Add(Fault{File: "losses.csv", Line: i + 2, Found: "a negative loss"})
	}
	l.Add(Fault{Found: "unreadable", Err: fs.ErrPermission})
	err := fmt.Errorf("loss: read: %w", fmt.Errorf("again: %w", l.Err()))
	if lines := strings.Split(l.Err().Error(), "\n"); len(lines) != 31 || lines[29] != "losses.csv:31: a negative loss" {
		t.Errorf("%d lines: %q", len(lines), lines)
	}
	if all := All(err); len(all) != 31 || all[7].Line != 9 {
		t.Errorf("%d faults", len(all))
	}
	var first *Fault
	if !errors.As(err, &first) || first.Line != 2 || !errors.Is(err, fs.ErrPermission) {
		t.Error("a fault or its cause is lost in wrapping")
	}
}

func ExampleFault() {
	fmt.Println(&Fault{File: "losses.csv", Line: 7, Key: "loss", Found: `"ten" is not a number`, Allowed: "money of at least 0"})
	// Output: losses.csv:7: loss: "ten" is not a number; allowed: money of at least 0
}
