package sample

import (
	"fmt"
	"math"
	"math/big"
	"testing"
)

// TestRankIsExact compares ranks with exact rational arithmetic for all levels of one, two and three decimals and many sample sizes, and
// shows that ⌈p·n⌉ by floating point is wrong for some of them.
func TestRankIsExact(t *testing.T) {
	wrong := 0
	for _, digits := range []int{1, 2, 3} {
		whole := int(math.Pow10(digits))
		for i := 1; i < whole; i++ {
			text := fmt.Sprintf("0.%0*d", digits, i)
			l, err := ParseLevel(text)
			if err != nil {
				t.Fatal(err)
			}
			for _, n := range []int{1, 2, 3, 7, 10, 40, 45, 97, 100, 365, 999, 1000, 2167, 10000, 100000, 1000000} {
				exact := new(big.Rat).Mul(big.NewRat(int64(i), int64(whole)), big.NewRat(int64(n), 1))
				want := new(big.Int).Quo(new(big.Int).Add(exact.Num(), new(big.Int).Sub(exact.Denom(), big.NewInt(1))), exact.Denom()).Int64()
				want = max(want, 1)
				if got := l.Rank(n); int64(got) != want {
					t.Fatalf("rank of %s in %d values is %d, want %d", text, n, got, want)
				}
				part, _ := new(big.Rat).Sub(new(big.Rat).SetInt64(want), exact).Float64()
				if got := l.Excess(n); math.Abs(got-part) > 1e-15 {
					t.Fatalf("excess of %s in %d values is %v, want %v", text, n, got, part)
				}
				if int64(math.Ceil(float64(i)/float64(whole)*float64(n))) != want {
					wrong++
				}
			}
		}
	}
	if wrong == 0 {
		t.Error("floating point was never wrong: the comparison is no test")
	}
}

func TestParseLevel(t *testing.T) {
	for text, want := range map[string]float64{
		"99.5%": 0.995, "0.995": 0.995, "1 in 200": 0.995, " 99 % ": 0.99, "0": 0, "1 in 2": 0.5, "1 in 1,000": 0.999, "99.97%": 0.9997,
	} {
		l, err := ParseLevel(text)
		if err != nil || l.Float() != want {
			t.Errorf("%q is %v, %v, want %v", text, l.Float(), err, want)
		}
		if again, err := ParseLevel(l.String()); err != nil || again != l {
			t.Errorf("%q is written as %q, which reads as %v, %v", text, l, again, err)
		}
	}
	for _, text := range []string{"", "1", "100%", "-0.1", "1.5", "NaN", "Inf", "1 in 1", "1 in 0", "1 in x", "0x1p-1", "1/200", "0.1e-1", "99,5%"} {
		if l, err := ParseLevel(text); err == nil {
			t.Errorf("%q was read as %v", text, l)
		}
	}
	if l, err := LevelOf(0.07); err != nil || l.Rank(100) != 7 {
		t.Errorf("rank of 0.07 in 100 values is %d, want 7 (%v)", l.Rank(100), err)
	}
	for _, p := range []float64{1, -0.5, math.NaN(), math.Inf(1)} {
		if _, err := LevelOf(p); err == nil {
			t.Errorf("level %v was accepted", p)
		}
	}
	if l, _ := ParseLevel("1 in 200"); l.ReturnPeriod() != 200 || l.Tail() != 0.005 {
		t.Errorf("1 in 200 has return period %v and tail %v", l.ReturnPeriod(), l.Tail())
	}
}

func FuzzParseLevel(f *testing.F) {
	for _, seed := range []string{"99.5%", "0.995", "1 in 200", "1 in ", "%", "-", "0.000000000000000000001"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		l, err := ParseLevel(text)
		if err != nil {
			return
		}
		if p := l.Float(); !(p >= 0 && p <= 1) {
			t.Errorf("%q gives %v", text, p)
		}
		if k := l.Rank(1000); k < 1 || k > 1000 {
			t.Errorf("%q gives rank %d of 1000", text, k)
		}
	})
}

func ExampleLevel_Rank() {
	l, _ := ParseLevel("1 in 200")
	fmt.Println(l, "of 10,000 years is rank", l.Rank(10000))
	// Output: 99.5% of 10,000 years is rank 9950
}
