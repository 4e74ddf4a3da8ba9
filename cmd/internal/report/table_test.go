package report

import (
	"strings"
	"testing"
)

func printed(g *grid, s Style) string {
	var b strings.Builder
	g.print(&b, s)
	return b.String()
}

func TestGridAlignsFiguresAndErrors(t *testing.T) {
	g := newGrid("Title", "name", "figure", "note")
	g.left[2] = true
	g.add("保険 a", "12.35m ± 0.13m", "x")
	g.add("b", "3m", "longer")
	g.add("c", "0", "")
	g.rule()
	g.add("\x1b[31mred", "−1.2m ± 0.6m", "y")
	want := `Title
name             figure  note
───────────────────────────────
保険 a   12.35m ± 0.13m  x
b            3m          longer
c             0
───────────────────────────────
[31mred   −1.2m ± 0.6m   y

`
	if got := printed(g, Style{}); got != want {
		t.Errorf("printed\n%s\nwant\n%s", got, want)
	}
}

func TestGridBreaksIntoParts(t *testing.T) {
	g := newGrid("", "name", strings.Repeat("a", 30), strings.Repeat("b", 30), strings.Repeat("c", 80))
	g.add("x", "1", "2", "3")
	got := printed(g, Style{Width: 72})
	if n := strings.Count(got, "name"); n != 2 {
		t.Errorf("%d parts, want 2:\n%s", n, got)
	}
	for _, cell := range []string{"1", "2", "3"} {
		if strings.Count(got, cell) != 1 {
			t.Errorf("the cell %s is lost or doubled:\n%s", cell, got)
		}
	}
	alone := newGrid("", "only")
	alone.add("x")
	if got := printed(alone, Style{}); !strings.Contains(got, "only\n────\nx\n") {
		t.Errorf("a table of one column is printed\n%s", got)
	}
}

func TestStyle(t *testing.T) {
	if got := (Style{}).in(bold, "x"); got != "x" {
		t.Errorf("plain text is %q", got)
	}
	if got := (Style{Colour: true}).in(bold, "x"); got != "\x1b[1mx\x1b[0m" {
		t.Errorf("bold text is %q", got)
	}
	for width, want := range map[int]int{0: defaultWidth, 10: leastWidth, 100: 100, 500: mostWidth} {
		if got := (Style{Width: width}).width(); got != want {
			t.Errorf("width %d becomes %d, want %d", width, got, want)
		}
	}
	g := newGrid("", "name", "a", "b")
	g.best = 2
	g.add("x", "1", "2")
	if got := printed(g, Style{Colour: true}); !strings.Contains(got, "\x1b[1m2\x1b[0m") || strings.Contains(got, "\x1b[1m1") {
		t.Errorf("the best column is printed %q", got)
	}
}

func TestWrapped(t *testing.T) {
	var b strings.Builder
	wrapped(&b, "one two  three\nfour", "  ", 9)
	if got, want := b.String(), "one two\n  three\n  four\n"; got != want {
		t.Errorf("wrapped to %q, want %q", got, want)
	}
	b.Reset()
	wrapped(&b, "about 5.1 % ± 0.4 % or 12 %", "", 12)
	if got, want := b.String(), "about\n5.1 % ± 0.4 %\nor 12 %\n"; got != want {
		t.Errorf("wrapped to %q, want %q", got, want)
	}
}

func TestExcerpt(t *testing.T) {
	for _, n := range []int{0, 1, 9, 10, 11, 60, 1000} {
		places := excerpt(n, 10)
		if len(places) != min(n, 10) {
			t.Fatalf("%d of %d places", len(places), n)
		}
		for i, p := range places {
			if i > 0 && p <= places[i-1] {
				t.Errorf("of %d: %v", n, places)
			}
		}
		if n > 0 && (places[0] != 0 || places[len(places)-1] != n-1) {
			t.Errorf("the ends of %d are not in %v", n, places)
		}
	}
}
