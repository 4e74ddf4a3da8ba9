package settings

import (
	"fmt"
	"strings"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// Names that the program gives to programmes of its own.
const (
	NoCover   = "no cover"
	BestFound = "best found"
)

func (c *checker) programmes() {
	c.names("programmes", len(c.s.Programmes), func(i int) string { return c.s.Programmes[i].Name })
	for i, p := range c.s.Programmes {
		key := fmt.Sprintf("programmes[%d]", i)
		if p.Name == NoCover || p.Name == BestFound {
			c.add(key+".name", quoted(p.Name), "a name that the program does not use itself")
		}
		before := c.d.faults.Len()
		treaties := c.names(key+".treaties", len(p.Treaties), func(j int) string { return p.Treaties[j].Name })
		for j, t := range p.Treaties {
			at := fmt.Sprintf("%s.treaties[%d]", key, j)
			c.treaty(at, t)
			c.subject(at, t)
			c.panel(at+".panel", t.Panel)
			for k, name := range t.After {
				c.known(fmt.Sprintf("%s.after[%d]", at, k), "treaty of the programme", name, treaties)
			}
			c.known(at+".curve", "curve", t.Curve, c.curves)
			if t.Curve == "" && t.Premium == nil && t.Commission == nil {
				c.add(at, "the treaty has no price", "a curve, or a quoted premium (a commission for a quota share)")
			}
		}
		if c.d.faults.Len() == before && !treaties.broken {
			c.programme(key, p)
		}
	}
}

// programme checks a programme, whose treaties have no fault by themselves, as a whole.
func (c *checker) programme(key string, p Programme) {
	terms := p.Terms()
	var classes, perils []string // those of the treaties themselves: subject has checked them
	for _, t := range terms.Treaties {
		classes, perils = append(classes, t.Classes...), append(perils, t.Perils...)
	}
	for _, f := range fault.All(terms.Validate(classes, perils)) {
		at, longest := key, -1
		for j, t := range p.Treaties { // a name may be the start of another
			if rest, ok := cutName(f.Key, t.Name); ok && len(t.Name) > longest {
				at, longest = fmt.Sprintf("%s.treaties[%d]%s", key, j, rest), len(t.Name)
			}
		}
		c.take(placed(*f, at))
	}
}

// placed gives a fault another key.
func placed(f fault.Fault, key string) fault.Fault {
	f.Key = key
	return f
}

// cutName takes the name of a treaty off the front of a fault's key.
func cutName(key, name string) (rest string, ok bool) {
	rest, ok = strings.CutPrefix(key, name)
	return rest, ok && (rest == "" || rest[0] == '.')
}

// subject checks the names of what a treaty looks at.
func (c *checker) subject(key string, t Treaty) {
	seen := map[string]bool{}
	for i, name := range t.Classes {
		at := fmt.Sprintf("%s.classes[%d]", key, i)
		c.known(at, "class", name, c.classes)
		c.once(at, name, seen)
	}
	c.perils(key, t.Perils)
	if t.Kind == treaty.QuotaShare.String() && !c.classes.broken {
		premium, covered := 0.0, false
		for _, class := range c.s.Book.Classes {
			if len(t.Classes) == 0 || seen[class.Name] {
				premium, covered = premium+float64(class.Premium), true
			}
		}
		if covered && premium == 0 {
			c.add(key, "a quota share of classes without premium", "classes that earn a premium, of which it takes its share")
		}
	}
}

// perils checks names of perils, where the study alone can tell which there are.
func (c *checker) perils(key string, perils []string) {
	seen := map[string]bool{}
	for i, name := range perils {
		at := fmt.Sprintf("%s.perils[%d]", key, i)
		c.known(at, "peril of the book", name, c.perilsOf)
		c.once(at, name, seen)
	}
}

// treaty checks the terms of one treaty by themselves.
func (c *checker) treaty(key string, t Treaty) {
	if _, err := treaty.ParseKind(t.Kind); err != nil {
		c.word(key+".kind", "kind of treaty", t.Kind, treaty.KindNames())
		return
	}
	excess := t.Kind != treaty.QuotaShare.String()
	missing := map[string]bool{}
	for _, need := range []struct {
		key    string
		given  bool
		wanted bool
	}{
		{"cession", t.Cession != nil, !excess}, {"retention", t.Retention != nil, excess}, {"limit", t.Limit != nil, excess},
	} {
		if need.wanted && !need.given {
			missing[need.key] = true
			c.add(key+"."+need.key, "the key is missing", "")
		}
	}
	if t.AnnualLimit != nil && *t.AnnualLimit == 0 {
		c.add(key+".annual_limit", "0", "money above 0, or leave the key out")
	}
	if t.EventLimit != nil && *t.EventLimit == 0 {
		c.add(key+".event_limit", "0", "money above 0, or leave the key out")
	}
	for _, f := range fault.All(t.Terms().Validate()) {
		if !missing[f.Key] && f.Key != "name" {
			c.take(placed(*f, key+"."+f.Key))
		}
	}
}
