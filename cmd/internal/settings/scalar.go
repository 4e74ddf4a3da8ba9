package settings

import (
	"errors"
	"fmt"
	"strconv"
	"strings"
	"time"

	"cedewright/portfolio/sample"
)

// scalar is a value that is written as one word and reads itself.
type scalar interface{ parse(text string) error }

// Money is an amount in the study's currency: a plain number, or one with k, m or bn (thousand, million, billion) behind it.
type Money float64

// units are what may stand behind money, largest first.
var units = []struct {
	suffix string
	factor float64
	power  int // factor = 10^power
}{{"bn", 1e9, 9}, {"m", 1e6, 6}, {"k", 1e3, 3}}

var errMoney = errors.New("money, such as 25m, 1.5bn, 750k or a plain number")

func (m *Money) parse(text string) error {
	power := 0
	for _, u := range units {
		if rest, ok := strings.CutSuffix(text, u.suffix); ok {
			text, power = strings.TrimRight(rest, " "), u.power
			break
		}
	}
	value, err := scaled(text, power)
	if err != nil {
		return errMoney
	}
	*m = Money(value)
	return nil
}

// scaled reads a plain decimal number times a power of ten, rounded once: 1.15bn is exactly 1150000000.
func scaled(digits string, power int) (float64, error) {
	if power != 0 {
		if strings.ContainsAny(digits, "eE") {
			return 0, strconv.ErrSyntax // 1e3m is more likely a slip than a thousand millions
		}
		if _, err := number(digits); err != nil {
			return 0, err
		}
		digits += "e" + strconv.Itoa(power)
	}
	return number(digits)
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
	digits, percent := strings.CutSuffix(text, "%")
	power := 0
	if percent {
		digits, power = strings.TrimRight(digits, " "), -2
	}
	value, err := scaled(digits, power)
	if err != nil {
		return errors.New("a fraction, such as 35% or 0.35")
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
	if _, ok := levelText(level); !ok {
		return errors.New("a level with fewer digits, such as 99.5%, 0.995 or 1 in 200")
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

// Date is a day, such as 2026-11-30.
type Date struct{ time.Time }

func (d *Date) parse(text string) error {
	day, err := time.Parse(time.DateOnly, text)
	if err != nil {
		return errors.New("a date, such as 2026-11-30")
	}
	d.Time = day
	return nil
}
