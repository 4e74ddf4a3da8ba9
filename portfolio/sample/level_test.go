package sample

import (
	"fmt"
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"
)

// TestRankIsExact compares ranks with exact rational arithmetic for all levels of one to three decimals and many sample sizes, round and not:
// ours is never wrong, and ⌈p·n⌉ by floating point is, often.
func TestRankIsExact(t *testing.T) {
	sizes := []int{1, 2, 3, 7, 10, 25, 40, 45, 50, 75, 97, 100, 150, 200, 250, 300, 365, 400, 500, 600, 750, 999, 1000, 1500, 2000, 2167, 2500, 3000,
		5000, 10_000, 20_000, 25_000, 50_000, 100_000, 200_000, 999_983, 1_000_000, 10_000_000, math.MaxInt32, math.MaxInt64 / 1000}
	whole, floating, complement := 0, 0, 0
	for i := 1; i < 1000; i++ {
		l := level(t, fmt.Sprintf("0.%03d", i))
		if same := level(t, fmt.Sprintf("%d.%d%%", i/10, i%10)); same != l {
			t.Fatalf("%v is not %v", same, l)
		}
		if same, err := LevelOf(float64(i) / 1000); err != nil || same != l {
			t.Fatalf("LevelOf gives %v, %v, want %v", same, err, l)
		}
		for _, n := range sizes {
			exact := new(big.Rat).Mul(big.NewRat(int64(i), 1000), new(big.Rat).SetInt64(int64(n)))
			up := new(big.Int).Sub(exact.Denom(), big.NewInt(1))
			want := max(new(big.Int).Quo(up.Add(up, exact.Num()), exact.Denom()).Int64(), 1)
			if got := l.Rank(n); int64(got) != want {
				t.Fatalf("rank of %v in %d values is %d, want %d", l, n, got, want)
			}
			part, _ := new(big.Rat).Sub(new(big.Rat).SetInt64(want), exact).Float64()
			if got := l.Excess(n); got != part { // both are rounded once
				t.Fatalf("excess of %v in %d values is %v, want %v", l, n, got, part)
			}
			if exact.IsInt() && n <= 1_000_000 { // where the answer is a whole number, floating point may fall on either side
				whole++
				if int64(math.Ceil(float64(i)/1000*float64(n))) != want {
					floating++
				}
				if int64(math.Ceil((1-float64(1000-i)/1000)*float64(n))) != want {
					complement++
				}
			}
		}
	}
	t.Logf("of %d pairs with a whole p·n, ours is wrong in 0, ⌈p·n⌉ in %d, ⌈(1−q)·n⌉ in %d", whole, floating, complement)
	if floating < 100 || complement < 100 {
		t.Error("floating point was hardly ever wrong: the comparison is no test")
	}
}

// TestRankByProperty: levels of any decimals and return periods, any sample size, against the definition.
func TestRankByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var p *big.Rat
		var text string
		if rapid.Bool().Draw(t, "as a return period") {
			period := rapid.Int64Range(2, 10_000_000).Draw(t, "period")
			text, p = fmt.Sprintf("1 in %d", period), big.NewRat(period-1, period)
		} else {
			digits := rapid.Int64Range(0, 1e15-1).Draw(t, "digits")
			text, p = fmt.Sprintf("0.%015d", digits), big.NewRat(digits, 1e15)
		}
		l, err := ParseLevel(text)
		if err != nil {
			t.Fatal(err)
		}
		n := rapid.IntRange(1, 100_000_000).Draw(t, "n")
		k := int64(l.Rank(n))
		pn := new(big.Rat).Mul(p, big.NewRat(int64(n), 1))
		if k < 1 || k > int64(n) || pn.Cmp(big.NewRat(k, 1)) > 0 || k > 1 && pn.Cmp(big.NewRat(k-1, 1)) <= 0 {
			t.Fatalf("rank of %s in %d values is %d", text, n, k)
		}
		part, _ := pn.Sub(big.NewRat(k, 1), pn).Float64()
		if got := l.Excess(n); got != part { // both are rounded once
			t.Fatalf("excess of %s in %d values is %v, want %v", text, n, got, part)
		}
	})
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
	for _, text := range []string{"", "1", "100%", "-0.1", "1.5", "NaN", "Inf", "1 in 1", "1 in 0", "1 in x", "0x1p-1", "1/200", "0.1e-1", "99,5%",
		"99.99999999999999999%", "0.00000000000000000000001", "1 in -3", "1 in 1e3"} {
		if l, err := ParseLevel(text); err == nil {
			t.Errorf("%q was read as %v", text, l)
		}
	}
	if l, err := LevelOf(0.07); err != nil || l.Rank(100) != 7 {
		t.Errorf("rank of 0.07 in 100 values is %d, want 7 (%v)", l.Rank(100), err)
	}
	for _, p := range []float64{0, 1e-18, 0.1, 1 - 0x1p-53, 1.0 / 3, 0.9733333333333334} {
		if l, err := LevelOf(p); err != nil || l.Float() != p {
			t.Errorf("LevelOf(%v) is %v, %v", p, l.Float(), err)
		}
	}
	if l := level(t, "0.0"); l != (Level{}) || l.Rank(10) != 1 || l.Excess(10) != 1 || l.String() != "0%" {
		t.Errorf("level 0 is %#v", l)
	}
	for _, p := range []float64{1, -0.5, math.NaN(), math.Inf(1), math.Inf(-1), 1e-300, math.MaxFloat64} {
		if _, err := LevelOf(p); err == nil {
			t.Errorf("level %v was accepted", p)
		}
	}
	if l, _ := ParseLevel("1 in 200"); l.ReturnPeriod() != 200 || l.Tail() != 0.005 {
		t.Errorf("1 in 200 has return period %v and tail %v", l.ReturnPeriod(), l.Tail())
	}
}

func FuzzParseLevel(f *testing.F) {
	for _, seed := range []string{"99.5%", "0.995", "1 in 200", "1 in ", "%", "-", "0.000000000000000000001", "0.0000001", "1 in 99999999999999", "1 in 7"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		l, err := ParseLevel(text)
		if err != nil {
			return
		}
		if p := l.Float(); !(p >= 0 && p < 1) || !(l.Tail() > 0) {
			t.Errorf("%q gives %v, tail %v", text, p, l.Tail())
		}
		if again, err := ParseLevel(l.String()); err != nil || math.Abs(again.Float()-l.Float()) > 1e-12 { // written to twelve digits
			t.Errorf("%q is written as %q, which reads as %v, %v", text, l, again, err)
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
