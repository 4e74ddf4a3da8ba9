package settings

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"

	"cedewright/portfolio/sample"
)

// scalar is a value that is written as one word and reads itself.
type scalar interface{ parse(text string) error }

// Money is an amount in the study's currency: a plain number, or one with k, m or bn (thousand, million, billion) behind it.
type Money float64

var units = []struct {
	suffix string
	factor float64
}{{"bn", 1e9}, {"m", 1e6}, {"k", 1e3}}

var errMoney = errors.New("money, such as 25m, 1.5bn, 750k or a plain number")

func (m *Money) parse(text string) error {
	s, factor := text, 1.0
	for _, u := range units {
		if rest, ok := strings.CutSuffix(s, u.suffix); ok {
			s, factor = strings.TrimRight(rest, " "), u.factor
			break
		}
	}
	value, err := number(s)
	if err != nil || math.IsInf(value*factor, 0) {
		return errMoney
	}
	*m = Money(scaled(s, value, factor))
	return nil
}

// scaled multiplies so that 0.3m is the number nearest to 300000: the exponent is put behind the digits before they are read.
func scaled(digits string, value, factor float64) float64 {
	if strings.ContainsAny(digits, "eE") {
		return value * factor
	}
	exact, err := strconv.ParseFloat(digits+"e"+strconv.Itoa(int(math.Round(math.Log10(factor)))), 64)
	if err != nil {
		return value * factor
	}
	return exact
}

// number reads a plain decimal number; NaN, infinities, hexadecimal and underscores are none.
func number(s string) (float64, error) {
	if s == "" || strings.Trim(s, "0123456789.eE+-") != "" {
		return 0, strconv.ErrSyntax
	}
	return strconv.ParseFloat(s, 64)
}

// Fraction is a part of one: 0.35 or 35%.
type Fraction float64

func (f *Fraction) parse(text string) error {
	s, percent := strings.CutSuffix(text, "%")
	s = strings.TrimRight(s, " ")
	value, err := number(s)
	if err != nil {
		return errors.New("a fraction, such as 35% or 0.35")
	}
	if percent {
		value = scaled(s, value/100, 0.01)
	}
	*f = Fraction(value)
	return nil
}

// Number is a plain number.
type Number float64

func (n *Number) parse(text string) error {
	value, err := number(text)
	if err != nil {
		return errors.New("a number")
	}
	*n = Number(value)
	return nil
}

// Count is a whole number of at least 0.
type Count int

func (c *Count) parse(text string) error {
	value, err := strconv.ParseUint(text, 10, 31)
	if err != nil {
		return errors.New("a whole number of at least 0")
	}
	*c = Count(value)
	return nil
}

// Seed is a whole number that starts a stream of random numbers; 0 is an ordinary seed.
type Seed uint64

func (s *Seed) parse(text string) error {
	value, err := strconv.ParseUint(text, 10, 64)
	if err != nil {
		return errors.New("a whole number of at least 0")
	}
	*s = Seed(value)
	return nil
}

// Level is a probability level, such as 99.5%, 0.995 or 1 in 200.
type Level struct{ sample.Level }

func (l *Level) parse(text string) error {
	level, err := sample.ParseLevel(text)
	if err != nil || level.Float() <= 0 {
		return errors.New("a level above 0 and below 1, such as 99.5%, 0.995 or 1 in 200")
	}
	l.Level = level
	return nil
}

// Amount is the bound of a constraint: money, a fraction or a plain number, as the measure has it.
type Amount float64

func (a *Amount) parse(text string) error {
	var m Money
	if m.parse(text) == nil {
		*a = Amount(m)
		return nil
	}
	var f Fraction
	if f.parse(text) == nil {
		*a = Amount(f)
		return nil
	}
	return fmt.Errorf("money or a fraction, such as 55m or 160%%")
}
