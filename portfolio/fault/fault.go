package fault

import (
	"errors"
	"fmt"
	"strings"
)

// Fault is one thing wrong with an input. Every field but Found may be empty; what is empty is left out of the message.
type Fault struct {
	File    string // path as the user wrote it
	Line    int    // 1-based line of the file, 0 = unknown
	Column  int    // 1-based column of the line, 0 = unknown
	Key     string // key of a study, such as "programmes[0].treaties[2].share", or column of a table, such as "loss"
	Found   string // what was found, in words: `"ten" is not a number`
	Allowed string // what would be right, in words: "a number of at least 0"
	Nearest string // nearest known word, for a misspelt one
	Err     error  // cause, if another error lies behind it
}

// Error gives "file:line:column: key: found; allowed: …; did you mean …?".
func (f *Fault) Error() string {
	var b strings.Builder
	if f.File != "" {
		b.WriteString(f.File)
		b.WriteString(":")
	}
	if f.Line > 0 {
		if f.File == "" {
			b.WriteString("line ")
		}
		fmt.Fprintf(&b, "%d:", f.Line)
		if f.Column > 0 {
			fmt.Fprintf(&b, "%d:", f.Column)
		}
	}
	if b.Len() > 0 {
		b.WriteString(" ")
	}
	if f.Key != "" {
		b.WriteString(f.Key)
		b.WriteString(": ")
	}
	b.WriteString(f.Found)
	if f.Err != nil {
		if f.Found != "" {
			b.WriteString(": ")
		}
		b.WriteString(f.Err.Error())
	}
	if f.Allowed != "" {
		b.WriteString("; allowed: ")
		b.WriteString(f.Allowed)
	}
	if f.Nearest != "" {
		fmt.Fprintf(&b, "; did you mean %q?", f.Nearest)
	}
	return b.String()
}

// Unwrap gives the cause.
func (f *Fault) Unwrap() error { return f.Err }

// List collects faults; its zero value is ready for use.
type List struct{ faults []*Fault }

// Add appends one fault.
func (l *List) Add(f Fault) { l.faults = append(l.faults, &f) }

// AddError appends every fault that err holds; an error that holds none becomes a fault of its own. Nil adds nothing.
func (l *List) AddError(err error) {
	if err == nil {
		return
	}
	if all := All(err); len(all) > 0 {
		l.faults = append(l.faults, all...)
		return
	}
	l.faults = append(l.faults, &Fault{Err: err})
}

// Len counts the faults.
func (l *List) Len() int { return len(l.faults) }

// Err gives nil when there are no faults, else one error that holds them all, in the order in which they were added.
func (l *List) Err() error {
	if len(l.faults) == 0 {
		return nil
	}
	all := make([]error, len(l.faults))
	for i, f := range l.faults {
		all[i] = f
	}
	return errors.Join(all...)
}

// All gives every fault inside err, in order, however it was wrapped or joined.
func All(err error) []*Fault {
	var all []*Fault
	var walk func(error)
	walk = func(err error) {
		if err == nil {
			return
		}
		if f, ok := err.(*Fault); ok {
			all = append(all, f)
			return
		}
		switch e := err.(type) {
		case interface{ Unwrap() []error }:
			for _, inner := range e.Unwrap() {
				walk(inner)
			}
		case interface{ Unwrap() error }:
			walk(e.Unwrap())
		}
	}
	walk(err)
	return all
}

// Nearest gives the known word closest to word, by number of single-letter changes, ignoring case; "" when none is close
// enough to be a likely misspelling (more than a third of the letters differ, and at least more than two, or no letter is right).
func Nearest(word string, known []string) string {
	best, bestDistance := "", 1<<30
	lower := strings.ToLower(word)
	for _, k := range known {
		if d := distance(lower, strings.ToLower(k)); d < bestDistance {
			best, bestDistance = k, d
		}
	}
	letters := len([]rune(word))
	if bestDistance > max(2, letters/3) || bestDistance >= max(letters, len([]rune(best))) {
		return ""
	}
	return best
}

// distance is the optimal string alignment distance: insertions, deletions, substitutions and swaps of neighbours.
func distance(a, b string) int {
	s, t := []rune(a), []rune(b)
	before, previous, current := make([]int, len(t)+1), make([]int, len(t)+1), make([]int, len(t)+1)
	for j := range previous {
		previous[j] = j
	}
	for i := 1; i <= len(s); i++ {
		current[0] = i
		for j := 1; j <= len(t); j++ {
			cost := 1
			if s[i-1] == t[j-1] {
				cost = 0
			}
			current[j] = min(previous[j]+1, current[j-1]+1, previous[j-1]+cost)
			if i > 1 && j > 1 && s[i-1] == t[j-2] && s[i-2] == t[j-1] {
				current[j] = min(current[j], before[j-2]+1)
			}
		}
		before, previous, current = previous, current, before
	}
	return previous[len(t)]
}
