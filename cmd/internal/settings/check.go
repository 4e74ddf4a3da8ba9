package settings

import (
	"fmt"
	"math"
	"strings"

	"cedewright/portfolio/fault"
)

// checker collects what the keys of a study say against one another. What follows from a fault of decoding is left out: a rule about keys
// of which one could not be read says nothing new.
type checker struct {
	s          Study
	d          *decoder
	classes    names
	curves     names
	standards  names
	reinsurers names
	perilsOf   names // perils of the book; broken when only its tables can tell them
}

// mostBroken bounds the keys with a fault beyond which rules are no longer looked at.
const mostBroken = 1000

// check looks at every rule of the study that needs nothing but the study.
func (s Study) check(d *decoder) {
	if len(d.broken) > mostBroken {
		return
	}
	c := &checker{s: s, d: d}
	c.classes = c.names("book.classes", len(s.Book.Classes), func(i int) string { return s.Book.Classes[i].Name })
	c.curves = c.names("market.curves", len(s.Market.Curves), func(i int) string { return s.Market.Curves[i].Name })
	c.standards = c.names("capital.standards", len(s.Capital.Standards), func(i int) string { return s.Capital.Standards[i].Name })
	if s.Security != nil {
		c.reinsurers = c.names("security.reinsurers", len(s.Security.Reinsurers), func(i int) string { return s.Security.Reinsurers[i].Name })
	}
	perils, ok := s.perils()
	c.perilsOf = names{list: perils, has: set(perils), broken: !ok || c.broken("book")}
	c.book()
	c.market()
	c.programmes()
	c.capital()
	c.security()
	if s.Search != nil {
		c.search(*s.Search)
	}
}

// names are those of a list of the study.
type names struct {
	list   []string
	has    map[string]bool
	broken bool // the list or a name in it could not be read, so that a name may be missing
}

// names gathers the names of a list and reports those that occur twice.
func (c *checker) names(key string, count int, name func(i int) string) names {
	n := names{has: map[string]bool{}, broken: c.namesBroken(key)}
	for i := range count {
		if name(i) != "" && n.has[name(i)] {
			c.add(fmt.Sprintf("%s[%d].name", key, i), quoted(name(i))+" is the name of another", "names of their own")
		}
		n.has[name(i)] = true
		n.list = append(n.list, name(i))
	}
	return n
}

// namesBroken tells whether a list, an item of it or the name of an item could not be read.
func (c *checker) namesBroken(key string) bool {
	for _, b := range c.d.broken {
		rest, inside := strings.CutPrefix(b, key+"[")
		_, rest, _ = strings.Cut(rest, "]")
		if inside && (rest == "" || rest == ".name") || !inside && len(b) <= len(key) && related(b, key) {
			return true
		}
	}
	return false
}

// broken tells whether a fault of decoding touches a key.
func (c *checker) broken(key string) bool {
	for _, b := range c.d.broken {
		if related(b, key) {
			return true
		}
	}
	return false
}

// take adds a fault unless a fault of decoding explains it.
func (c *checker) take(f fault.Fault) {
	if c.d.faults.Len() > mostBroken || c.broken(f.Key) {
		return
	}
	c.d.faults.Add(c.s.At(f))
}

func (c *checker) add(key, found, allowed string) {
	c.take(fault.Fault{Key: key, Found: found, Allowed: allowed})
}

// word reports a word that is none of a fixed list.
func (c *checker) word(key, what, word string, known []string) {
	c.known(key, what, word, names{list: known, has: set(known)})
}

func set(list []string) map[string]bool {
	has := make(map[string]bool, len(list))
	for _, word := range list {
		has[word] = true
	}
	return has
}

// known reports a name that a list does not have. An empty name was reported as missing.
func (c *checker) known(key, what, name string, n names) {
	if name == "" || n.broken || n.has[name] || c.d.faults.Len() > mostBroken {
		return
	}
	allowed := "none exists"
	if len(n.list) > 0 {
		allowed = fmt.Sprintf("%q", n.list[:min(len(n.list), 20)])
	}
	c.take(fault.Fault{Key: key, Found: fmt.Sprintf("no %s is named %s", what, quoted(name)), Allowed: allowed, Nearest: fault.Nearest(name, n.list)})
}

// once reports a word that a list has twice.
func (c *checker) once(key, name string, seen map[string]bool) {
	if name != "" && seen[name] {
		c.add(key, quoted(name)+" twice", "each once")
	}
	seen[name] = true
}

// within reports a number outside low ≤ x ≤ high; a bound that open says is none itself.
func (c *checker) within(key string, x, low, high float64, openLow, openHigh bool, allowed string) {
	if !(x >= low && x <= high) || openLow && x == low || openHigh && x == high || math.IsInf(x, 0) {
		c.add(key, plain(x), allowed)
	}
}

func (c *checker) fraction(key string, x Fraction) {
	c.within(key, float64(x), 0, 1, false, false, "a fraction from 0 to 1")
}

func (c *checker) money(key string, x Money) {
	c.within(key, float64(x), 0, math.Inf(1), false, false, "money of at least 0")
}

func (c *checker) moneyAbove(key string, x Money) {
	c.within(key, float64(x), 0, math.Inf(1), true, false, "money above 0")
}
