package sample

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// shapes are inputs on which a careless selection is slow or wrong, of n values each.
var shapes = []struct {
	name string
	at   func(r *rand.Rand, i, n int) float64
}{
	{"random", func(r *rand.Rand, i, n int) float64 { return r.NormFloat64() }},
	{"lognormal", func(r *rand.Rand, i, n int) float64 { return math.Exp(2 * r.NormFloat64()) }},
	{"four values", func(r *rand.Rand, i, n int) float64 { return float64(r.IntN(4)) }},
	{"equal", func(r *rand.Rand, i, n int) float64 { return 7 }},
	{"rising", func(r *rand.Rand, i, n int) float64 { return float64(i) }},
	{"falling", func(r *rand.Rand, i, n int) float64 { return float64(-i) }},
	{"organ pipe", func(r *rand.Rand, i, n int) float64 { return float64(min(i, n-i)) }},
	{"valley", func(r *rand.Rand, i, n int) float64 { return float64(max(i, n-i)) }},
	{"saw", func(r *rand.Rand, i, n int) float64 { return float64(i % 37) }},
	{"rising with the smallest last", func(r *rand.Rand, i, n int) float64 { return float64((i + 1) % n) }},
	{"two runs", func(r *rand.Rand, i, n int) float64 { return float64(i % max(n/2, 1)) }},
	{"zeros and a tail", func(r *rand.Rand, i, n int) float64 {
		if r.IntN(20) == 0 {
			return r.ExpFloat64()
		}
		return 0
	}},
	{"a limit that most reach", func(r *rand.Rand, i, n int) float64 { return min(3*r.ExpFloat64(), 1) }},
}

func shaped(at func(r *rand.Rand, i, n int) float64, n int) []float64 {
	r := rand.New(rand.NewPCG(3, 4))
	v := make([]float64, n)
	for i := range v {
		v[i] = at(r, i, n)
	}
	return v
}

// selected checks Select on a copy of v against its sorted values.
func selected(t *testing.T, what string, v, sorted []float64, k int) {
	t.Helper()
	w := slices.Clone(v)
	if got := Select(w, k); got != sorted[k-1] {
		t.Fatalf("%s, n %d: %d-th smallest is %v, want %v", what, len(v), k, got, sorted[k-1])
	}
	for i, x := range w {
		if i < k-1 && x > w[k-1] || i > k-1 && x < w[k-1] {
			t.Fatalf("%s, n %d: value %d stands on the wrong side of rank %d", what, len(v), i, k)
		}
	}
	slices.Sort(w)
	if !slices.Equal(w, sorted) {
		t.Fatalf("%s, n %d, k %d: the values themselves changed", what, len(v), k)
	}
}

func TestSelect(t *testing.T) {
	for _, shape := range shapes {
		for _, n := range []int{1, 2, 3, 10, 599, 600, 601, 602, 5000, 50000} { // 600 is where sampling starts
			v := shaped(shape.at, n)
			sorted := slices.Clone(v)
			slices.Sort(sorted)
			for _, k := range []int{1, min(2, n), (n + 1) / 2, n - n/10, n - n/200, max(n-1, 1), n} {
				selected(t, shape.name, v, sorted, k)
			}
		}
	}
}

// TestSelectExhaustively: every sequence of up to six values from 0 to 3, every rank.
func TestSelectExhaustively(t *testing.T) {
	for n := 1; n <= 6; n++ {
		v := make([]float64, n)
		for code := range 1 << (2 * n) {
			for i := range v {
				v[i] = float64(code >> (2 * i) & 3)
			}
			sorted := slices.Clone(v)
			slices.Sort(sorted)
			for k := 1; k <= n; k++ {
				selected(t, "exhaustive", v, sorted, k)
			}
		}
	}
}

// TestTailAgainstSorting: the hot path on every shape against the sorted sample.
func TestTailAgainstSorting(t *testing.T) {
	for _, shape := range shapes {
		for _, n := range []int{1, 3, 199, 200, 201, 1000, 20_011} {
			v := shaped(shape.at, n)
			s := sampleOf(t, v...)
			for _, text := range []string{"0", "50%", "93%", "99%", "99.5%", "1 in 300"} {
				l := level(t, text)
				value, mean := Tail(slices.Clone(v), l)
				// The same numbers added in another order, compensated.
				if value != s.VaR(l) || math.Abs(mean-s.TVaR(l)) > 1e-12*(1+math.Abs(s.TVaR(l))) {
					t.Errorf("%s, n %d, %s: %v and %v, want %v and %v", shape.name, n, text, value, mean, s.VaR(l), s.TVaR(l))
				}
			}
		}
	}
}

func TestHotPathAllocatesNothing(t *testing.T) {
	v := shaped(shapes[0].at, 10_000)
	scratch := make([]float64, len(v))
	l := level(t, "99.5%")
	if n := testing.AllocsPerRun(20, func() {
		copy(scratch, v)
		Tail(scratch, l)
		TVaRInfluence(v, l, scratch)
		VaRInfluence(v, l, scratch)
		MeanInfluence(v, scratch)
	}); n != 0 {
		t.Errorf("%v allocations a run", n)
	}
}

// FuzzSelect reads values from bytes, NaN and infinities among them: without NaN the answer is that of sorting; with NaN there is no
// right answer, but no panic either.
func FuzzSelect(f *testing.F) {
	f.Add([]byte{1, 2, 3, 4, 5, 6, 7, 8, 0, 0, 0, 0, 0, 0, 240, 127, 0, 0, 0, 0, 0, 0, 240, 255}, uint16(1), uint16(700))
	f.Add([]byte{0, 0, 0, 0, 0, 0, 248, 127, 1, 1, 1, 1, 1, 1, 1, 1}, uint16(0), uint16(900))
	f.Add([]byte{255, 255, 255, 255, 255, 255, 255, 255}, uint16(3), uint16(2000))
	f.Fuzz(func(t *testing.T, data []byte, rank, size uint16) {
		var seen []float64
		for ; len(data) >= 8; data = data[8:] {
			seen = append(seen, math.Float64frombits(binary.LittleEndian.Uint64(data)))
		}
		if len(seen) == 0 {
			return
		}
		v := make([]float64, 1+int(size)%3000) // repeated to be long enough for the sampling branch
		for i := range v {
			v[i] = seen[i*7%len(seen)]
		}
		k := 1 + int(rank)%len(v)
		sorted := slices.Clone(v)
		slices.Sort(sorted)
		if got := Select(v, k); !math.IsNaN(sorted[0]) && got != sorted[k-1] { // sorting puts NaN first
			t.Errorf("%d-th smallest is %v, want %v", k, got, sorted[k-1])
		}
	})
}

func BenchmarkSelect(b *testing.B) {
	for _, shape := range shapes {
		values := shaped(shape.at, 100_000)
		scratch := make([]float64, len(values))
		b.Run(shape.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				copy(scratch, values)
				Select(scratch, 99_500)
			}
		})
	}
}

func BenchmarkTail(b *testing.B) {
	for _, size := range []struct {
		name string
		n    int
	}{{"10k", 10_000}, {"100k", 100_000}, {"1M", 1_000_000}} {
		values := shaped(shapes[1].at, size.n)
		scratch := make([]float64, size.n)
		for _, text := range []string{"90%", "99.5%"} {
			l := level(b, text)
			b.Run(size.name+"/"+text, func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					copy(scratch, values)
					Tail(scratch, l)
				}
			})
		}
	}
}
