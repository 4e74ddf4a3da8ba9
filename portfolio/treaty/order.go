package treaty

import (
	"fmt"
	"slices"
	"strings"

	"cedewright/portfolio/fault"
)

// Order gives the places of the treaties in an order in which each stands after those that inure to it; ties keep the order of the
// list. It fails on a name that no treaty has and on a cycle, which it names.
func (p Programme) Order() ([]int, error) {
	place := make(map[string]int, len(p.Treaties))
	for i, t := range p.Treaties {
		place[t.Name] = i
	}
	const unseen, open, done = 0, 1, 2
	state := make([]int, len(p.Treaties))
	order := make([]int, 0, len(p.Treaties))
	var path []string
	var visit func(i int) error
	visit = func(i int) error {
		t := p.Treaties[i]
		path = append(path, t.Name)
		defer func() { path = path[:len(path)-1] }()
		switch state[i] {
		case done:
			return nil
		case open:
			return &fault.Fault{Key: t.Name + ".after", Found: "a cycle: " + strings.Join(cycle(path), " after "), Allowed: "treaties that inure to one another in one direction"}
		}
		state[i] = open
		for _, name := range t.After {
			j, ok := place[name]
			if !ok {
				f := p.unknown(t, name)
				return &f
			}
			if err := visit(j); err != nil {
				return err
			}
		}
		state[i] = done
		order = append(order, i)
		return nil
	}
	for i := range p.Treaties {
		if err := visit(i); err != nil {
			return nil, err
		}
	}
	return order, nil
}

// cycle cuts a path that ends where it has been before down to the part that repeats.
func cycle(path []string) []string {
	return path[slices.Index(path, path[len(path)-1]):]
}

// unknown is the fault of a name in After that no treaty has.
func (p Programme) unknown(t Treaty, name string) fault.Fault {
	others := slices.DeleteFunc(p.names(), func(n string) bool { return n == t.Name })
	return fault.Fault{Key: t.Name + ".after", Found: fmt.Sprintf("no treaty of the programme is named %q", name), Nearest: fault.Nearest(name, others)}
}

func (p Programme) names() []string {
	names := make([]string, len(p.Treaties))
	for i, t := range p.Treaties {
		names[i] = t.Name
	}
	return names
}

// SubjectPremium gives the premium on which quota share i takes its share, in money per year: the premiums of its classes, each net of
// what the quota shares that inure to it cede of that class. Classes and premiums stand side by side. A quota share restricted to some
// perils still takes its share of the whole premium of its classes.
func (p Programme) SubjectPremium(i int, classes []string, premiums []float64) float64 {
	sum := 0.0
	for c, class := range classes {
		if t := p.Treaties[i]; t.covers(class) {
			sum += float64(premiums[c] * p.keptOf(i, class))
		}
	}
	return sum
}

// SubjectFraction gives the fraction of a class's premium on which quota share i takes its share: what the quota shares that inure to it leave, and 0 for
// a class that it does not cover.
func (p Programme) SubjectFraction(i int, class string) float64 {
	if !p.Treaties[i].covers(class) {
		return 0
	}
	return p.keptOf(i, class)
}

// keptOf gives the fraction of a class's premium that is left after the quota shares that inure to treaty i.
func (p Programme) keptOf(i int, class string) float64 {
	kept := 1.0
	for _, name := range p.Treaties[i].After {
		for j, u := range p.Treaties {
			if u.Name == name && u.Kind == QuotaShare && u.covers(class) {
				kept -= float64(u.Cession * p.keptOf(j, class))
			}
		}
	}
	return max(kept, 0)
}

func (t Treaty) covers(class string) bool {
	if len(t.Classes) == 0 {
		return true
	}
	for _, c := range t.Classes {
		if c == class {
			return true
		}
	}
	return false
}
