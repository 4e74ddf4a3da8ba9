package fault

import (
	"errors"
	"fmt"
	"io/fs"
	"testing"
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
}

func ExampleFault() {
	fmt.Println(&Fault{File: "losses.csv", Line: 7, Key: "loss", Found: `"ten" is not a number`, Allowed: "money of at least 0"})
	// Output: losses.csv:7: loss: "ten" is not a number; allowed: money of at least 0
}
