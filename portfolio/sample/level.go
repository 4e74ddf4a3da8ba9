package sample

import (
	"fmt"
	"math/big"
	"math/bits"
	"strconv"
	"strings"
)

// Level is a probability level p, 0 ≤ p < 1, kept as an exact fraction, so that the rank of a quantile is never off by one: ⌈p·n⌉ in
// floating point is wrong for many levels (0.07·100 gives 8). The zero value is the level 0. Levels can be compared with ==.
type Level struct {
	numerator   uint64 // of p in lowest terms
	denominator uint64 // 0 stands for 1, so that the zero value is p = 0
}

// ParseLevel reads "99.5%", "0.995" or "1 in 200" (p = 1 − 1/200). It accepts 0 ≤ p < 1; the T of "1 in T" is above 1.
func ParseLevel(text string) (Level, error) {
	s := strings.TrimSpace(text)
	if rest, ok := strings.CutPrefix(s, "1 in "); ok {
		period, err := parseDecimal(strings.ReplaceAll(strings.TrimSpace(rest), ",", ""))
		if err != nil || period.Cmp(big.NewRat(1, 1)) <= 0 {
			return Level{}, fmt.Errorf("sample: level %q: the return period must be a number above 1", text)
		}
		return levelOf(new(big.Rat).Sub(big.NewRat(1, 1), period.Inv(period)), text)
	}
	number, percent := strings.CutSuffix(s, "%")
	p, err := parseDecimal(strings.TrimSpace(number))
	if err != nil {
		return Level{}, fmt.Errorf("sample: level %q is not of the form 99.5%%, 0.995 or 1 in 200", text)
	}
	if percent {
		p.Quo(p, big.NewRat(100, 1))
	}
	return levelOf(p, text)
}

// LevelOf gives the level whose shortest decimal prints as p: LevelOf(0.995) is exactly 199/200. It accepts 0 ≤ p < 1, and refuses a p so
// small or so finely written that its decimal does not fit: one of up to 19 decimals always fits.
func LevelOf(p float64) (Level, error) {
	text := strconv.FormatFloat(p, 'g', -1, 64)
	exact, ok := new(big.Rat).SetString(text)
	if !ok { // NaN and infinities
		return Level{}, fmt.Errorf("sample: level %v must be at least 0 and below 1", p)
	}
	return levelOf(exact, text)
}

// parseDecimal reads a plain decimal number exactly. Fractions, hexadecimal and huge exponents are refused.
func parseDecimal(s string) (*big.Rat, error) {
	if s == "" || len(s) > 40 || strings.Trim(s, "0123456789.-") != "" {
		return nil, strconv.ErrSyntax
	}
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		return nil, strconv.ErrSyntax
	}
	return r, nil
}

func levelOf(p *big.Rat, text string) (Level, error) {
	if p.Sign() < 0 || p.Cmp(big.NewRat(1, 1)) >= 0 {
		return Level{}, fmt.Errorf("sample: level %q must be at least 0 and below 1", text)
	}
	if !p.Num().IsUint64() || !p.Denom().IsUint64() {
		return Level{}, fmt.Errorf("sample: level %q has too many digits: at most 19 decimals are kept exactly", text)
	}
	if p.Sign() == 0 {
		return Level{}, nil // so that == holds with the zero value
	}
	l := Level{p.Num().Uint64(), p.Denom().Uint64()}
	if l.Float() == 1 {
		return Level{}, fmt.Errorf("sample: level %q is too close to 1 to be told from it", text)
	}
	return l, nil
}

func (l Level) fraction() (numerator, denominator uint64) {
	if l.denominator == 0 {
		return 0, 1
	}
	return l.numerator, l.denominator
}

// Float gives p, rounded once; it is below 1.
func (l Level) Float() float64 {
	n, d := l.fraction()
	return quotient(n, d)
}

// Tail gives 1 − p, rounded once; it is above 0.
func (l Level) Tail() float64 {
	n, d := l.fraction()
	return quotient(d-n, d)
}

// ReturnPeriod gives 1/(1 − p) in years, rounded once.
func (l Level) ReturnPeriod() float64 {
	n, d := l.fraction()
	return quotient(d, d-n)
}

// quotient gives a/b rounded once, also where a or b does not fit the 53 bits of a float64.
func quotient(a, b uint64) float64 {
	if a|b < 1<<53 {
		return float64(a) / float64(b)
	}
	q, _ := new(big.Rat).SetFrac(new(big.Int).SetUint64(a), new(big.Int).SetUint64(b)).Float64()
	return q
}

// String gives the level in per cent, "99.5%": to twelve digits, or to more where twelve would show a level of 100 %. ParseLevel reads it
// back, to the same level if its decimals end within those digits.
func (l Level) String() string {
	n, d := l.fraction()
	exact := new(big.Rat).SetFrac(new(big.Int).SetUint64(n), new(big.Int).SetUint64(d))
	percent, _ := exact.Mul(exact, big.NewRat(100, 1)).Float64()
	text := strconv.FormatFloat(percent, 'g', 12, 64)
	if text == "100" || strings.Contains(text, "e") {
		text = strconv.FormatFloat(percent, 'f', -1, 64)
	}
	return text + "%"
}

// Rank gives the rank, from 1 (smallest) to n, of the order statistic that is the quantile at this level of a sample of n equally
// likely values: the smallest k with k ≥ p·n, and 1 for p = 0. It is exact for every n. It is the one rank function of the program.
// A sample of no values has no rank: n must be at least 1.
func (l Level) Rank(n int) int {
	numerator, denominator := l.fraction()
	high, low := bits.Mul64(numerator, uint64(n))
	k, remainder := bits.Div64(high, low, denominator)
	if remainder > 0 {
		k++
	}
	return max(int(k), 1)
}

// Excess gives Rank(n) − p·n, rounded once: the part, in values, of the quantile itself that belongs to the tail beyond it.
func (l Level) Excess(n int) float64 {
	numerator, denominator := l.fraction()
	high, low := bits.Mul64(numerator, uint64(n))
	k, remainder := bits.Div64(high, low, denominator)
	switch {
	case remainder > 0:
		return quotient(denominator-remainder, denominator)
	case k == 0:
		return 1
	default:
		return 0
	}
}
