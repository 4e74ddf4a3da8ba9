package sample

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// TestTailsAgainstTail: several levels at once give what each level gives alone, on samples with ties, in any order.
func TestTailsAgainstTail(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		most := rapid.SampledFrom([]int{60, 100_000}).Draw(t, "most") // many ties, or hardly any
		values := rapid.SliceOfN(rapid.Map(rapid.IntRange(-20, most), func(i int) float64 { return float64(i) }), 1, 1500).Draw(t, "values")
		var levels []Level
		for _, p := range rapid.SliceOfNDistinct(rapid.IntRange(0, 999), 1, 6, rapid.ID).Draw(t, "levels") {
			l, err := LevelOf(float64(p) / 1000)
			if err != nil {
				t.Fatal(err)
			}
			levels = append(levels, l)
		}
		slices.SortFunc(levels, func(a, b Level) int {
			if a.Float() < b.Float() {
				return -1
			}
			return 1
		})
		got := make([]TailFigures, len(levels))
		means := rapid.IntRange(0, len(levels)).Draw(t, "means")
		Tails(slices.Clone(values), levels, means, got)
		for i, l := range levels {
			v, tv := Tail(slices.Clone(values), l)
			if i < means {
				tv = 0
			}
			// A sum of at most 1,500 whole numbers is exact; the quotient is rounded once in each.
			if got[i].VaR != v || math.Abs(got[i].TVaR-tv) > 1e-9*(1+math.Abs(tv)) {
				t.Fatalf("%v: %+v, want %v and %v", l, got[i], v, tv)
			}
		}
	})
}

// TestTailsOfLargest: the largest values alone give what the whole sample gives, however many more than needed are handed over.
func TestTailsOfLargest(t *testing.T) {
	levels := []Level{level(t, "80%"), level(t, "90%"), level(t, "99%")}
	rapid.Check(t, func(t *rapid.T) {
		values := rapid.SliceOfN(rapid.Map(rapid.IntRange(-20, 500), func(i int) float64 { return float64(i) }), 1, 800).Draw(t, "values")
		n := len(values)
		want, got := make([]TailFigures, 3), make([]TailFigures, 3)
		Tails(slices.Clone(values), levels, 0, want)
		slices.Sort(values)
		beyond := levels[0].Beyond(n)
		if values[n-beyond] != want[0].VaR || beyond < 1 {
			t.Fatalf("%d values of %d lie at or above the quantile %v", beyond, n, want[0].VaR)
		}
		top := values[n-rapid.IntRange(beyond, n).Draw(t, "given"):]
		top = rapid.Permutation(slices.Clone(top)).Draw(t, "order")
		TailsOfLargest(top, n, levels, 0, got)
		for i := range want {
			if got[i].VaR != want[i].VaR || math.Abs(got[i].TVaR-want[i].TVaR) > 1e-9*(1+math.Abs(want[i].TVaR)) { // sums in another order
				t.Fatalf("%v: %+v, want %+v", levels[i], got[i], want[i])
			}
		}
	})
}

func TestTailsAllocatesNothing(t *testing.T) {
	values := shaped(shapes[1].at, 10_000)
	levels := []Level{level(t, "90%"), level(t, "99%"), level(t, "99.5%")}
	dst := make([]TailFigures, 3)
	if n := testing.AllocsPerRun(10, func() { Tails(values, levels, 0, dst) }); n != 0 {
		t.Errorf("%v allocations a run", n)
	}
}

// BenchmarkTails holds five levels at once against the lowest one alone.
func BenchmarkTails(b *testing.B) {
	values := shaped(shapes[1].at, 100_000)
	scratch := make([]float64, len(values))
	for _, set := range [][]string{{"90%"}, {"90%", "95%", "99%", "99.5%", "99.6%"}} {
		var levels []Level
		for _, text := range set {
			levels = append(levels, level(b, text))
		}
		dst := make([]TailFigures, len(levels))
		b.Run(set[len(set)-1], func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				copy(scratch, values)
				Tails(scratch, levels, 0, dst)
			}
		})
	}
}
