package settings

import (
	"math"
	"strconv"
	"testing"

	"pgregory.net/rapid"
)

func TestScalars(t *testing.T) {
	money, fraction := func() scalar { return new(Money) }, func() scalar { return new(Fraction) }
	for _, c := range []struct {
		make func() scalar
		text string
		want float64
	}{
		{money, "25m", 25e6}, {money, "1.5bn", 1.5e9}, {money, "750k", 750e3}, {money, "0", 0}, {money, "-3m", -3e6}, {money, "12.5", 12.5},
		{money, "1.15bn", 1150000000}, {money, "0.3m", 300000}, {money, "4.35k", 4350}, {money, "2e6", 2e6}, {money, "25 m", 25e6}, {money, ".5m", 500000},
		{fraction, "35%", 0.35}, {fraction, "0.35", 0.35}, {fraction, "99.5 %", 0.995}, {fraction, "0", 0}, {fraction, "160%", 1.6}, {fraction, "0.07%", 0.0007},
	} {
		s := c.make()
		if err := s.parse(c.text); err != nil {
			t.Errorf("%q: %v", c.text, err)
			continue
		}
		var got float64
		switch s := s.(type) {
		case *Money:
			got = float64(*s)
		case *Fraction:
			got = float64(*s)
		}
		if got != c.want { // exactly: the text is rounded once
			t.Errorf("%q gives %v, want %v", c.text, got, c.want)
		}
	}
}

func TestScalarsRefuse(t *testing.T) {
	for _, c := range []struct {
		s     scalar
		texts []string
	}{
		{new(Money), []string{"", "m", "ten", "25M", "25mn", "1,000", "1 000", "0x10", "nan", "NaN", ".inf", "-Inf", "1e400", "1e3m", "1_000", "25%", "m25", "--5", "2..5m", "٣m"}},
		{new(Fraction), []string{"", "%", "ten", "35%%", "nan%", "inf", "1e2%", "25m", "0x1p-2", "3,5%"}},
		{new(Number), []string{"", "abc", "nan", "Inf", "1e999", "1m", "5%", "0b1"}},
		{new(Count), []string{"", "-1", "3.0", "1e3", "2147483648", "0x10", "ten"}},
		{new(Seed), []string{"", "-1", "18446744073709551616", "1.5"}},
		{new(Level), []string{"", "0", "1", "100%", "1 in 1", "1 in 0.5", "-5%", "nan", "200", "0%", "1 of 200"}},
		{new(Limit), []string{"", "none", "inf", "Unlimited"}},
		{new(Amount), []string{"", "much", "nan", "5 EUR"}},
	} {
		for _, text := range c.texts {
			if err := c.s.parse(text); err == nil {
				t.Errorf("%T takes %q", c.s, text)
			} else if err.Error() == "" {
				t.Errorf("%T refuses %q without saying what is allowed", c.s, text)
			}
		}
	}
}

// TestScalarsWriteAndReadAgain draws values as they occur and wants them back to the last bit.
func TestScalarsWriteAndReadAgain(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		digits := rapid.IntRange(-999_999_999, 999_999_999).Draw(t, "digits")
		power := rapid.IntRange(-9, 6).Draw(t, "power")
		x, err := strconv.ParseFloat(strconv.Itoa(digits)+"e"+strconv.Itoa(power), 64)
		if err != nil {
			t.Fatal(err)
		}
		if rapid.Bool().Draw(t, "noisy") {
			x = math.Nextafter(x, math.Inf(1))
		}
		for _, value := range []any{Money(x), Fraction(x), Number(x), Amount(x), Limit{Money: Money(x)}} {
			text, ok, err := written(value)
			if err != nil || !ok {
				t.Fatalf("%v is not written: %v", value, err)
			}
			switch value := value.(type) {
			case Money:
				again(t, text, value)
			case Fraction:
				again(t, text, value)
			case Number:
				again(t, text, value)
			case Amount:
				again(t, text, value)
			case Limit:
				again(t, text, value)
			}
		}
	})
}

func again[T comparable, P interface {
	*T
	scalar
}](t *rapid.T, text string, want T) {
	var got T
	if err := P(&got).parse(text); err != nil || got != want {
		t.Fatalf("%v is written as %q and read as %v (%v)", want, text, got, err)
	}
}

// TestMoneyScales says the same amount with and without a unit.
func TestMoneyScales(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		whole := rapid.IntRange(0, 999_999).Draw(t, "whole")
		thousandths := rapid.IntRange(0, 999).Draw(t, "thousandths")
		text := strconv.Itoa(whole) + "." + strconv.Itoa(1000 + thousandths)[1:]
		var with, without Money
		if err := with.parse(text + "m"); err != nil {
			t.Fatal(err)
		}
		exact := int64(whole)*1_000_000 + int64(thousandths)*1_000
		if err := without.parse(strconv.FormatInt(exact, 10)); err != nil {
			t.Fatal(err)
		}
		if with != without {
			t.Fatalf("%sm is %v, %d is %v", text, with, exact, without)
		}
	})
}

func TestMoneyReadsWell(t *testing.T) {
	for x, want := range map[float64]string{285e6: "285m", 1.5e9: "1.5bn", 750e3: "750k", 0: "0", 123456789: "123456789", 999: "999", -40e6: "-40m", 0.25: "0.25", 1250e3: "1.25m"} {
		if got := moneyText(x); got != want {
			t.Errorf("%v is written as %q, want %q", x, got, want)
		}
	}
}

func TestLevelsWriteAndReadAgain(t *testing.T) {
	for _, text := range []string{"99.5%", "0.995", "1 in 200", "1 in 300", "1 in 1.5", "99.99%", "0.123456789012", "1 in 7", "1 in 1,000"} {
		var l, l2 Level
		if err := l.parse(text); err != nil {
			t.Errorf("%q: %v", text, err)
			continue
		}
		again, _, err := written(l)
		if err != nil {
			t.Errorf("%q: %v", text, err)
			continue
		}
		if err := l2.parse(again); err != nil || l2 != l {
			t.Errorf("%q is written as %q and read as %v (%v)", text, again, l2, err)
		}
	}
}
