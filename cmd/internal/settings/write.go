package settings

import (
	"bytes"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"
	"time"

	"cedewright/portfolio/sample"

	"go.yaml.in/yaml/v3"
)

// YAML writes the study as a file that Parse reads to an equal study (its places, File, Folder and Bytes aside). Paths stand as they were
// given. Keys at their default are left out where the study left them out.
func (s Study) YAML() ([]byte, error) {
	root, err := nodeOf(reflect.ValueOf(s))
	if err != nil {
		return nil, fmt.Errorf("settings: write study: %w", err)
	}
	var out bytes.Buffer
	encoder := yaml.NewEncoder(&out)
	encoder.SetIndent(2)
	if err := encoder.Encode(root); err != nil {
		return nil, fmt.Errorf("settings: write study: %w", err)
	}
	if err := encoder.Close(); err != nil {
		return nil, fmt.Errorf("settings: write study: %w", err)
	}
	return out.Bytes(), nil
}

// With gives the study with the seed and the budget of a run in its search section: the effective settings. A study without such a section
// is left as it is.
func (s Study) With(r Run) Study {
	if s.Search == nil {
		return s
	}
	search := *s.Search
	if r.Seed != nil {
		seed := Seed(*r.Seed)
		search.Seed = &seed
	}
	for _, b := range []struct {
		field **Count
		value int
	}{{&search.Population, r.Population}, {&search.Generations, r.Generations}, {&search.Evaluations, r.Evaluations}, {&search.Patience, r.Patience}} {
		if b.value > 0 {
			count := Count(b.value)
			*b.field = &count
		}
	}
	s.Search = &search
	return s
}

// nodeOf gives the node of a value; nil for one that is left out.
func nodeOf(v reflect.Value) (*yaml.Node, error) {
	if v.Kind() == reflect.Pointer {
		if v.IsNil() {
			return nil, nil
		}
		v = v.Elem()
	}
	if text, ok, err := written(v.Interface()); err != nil || ok {
		return &yaml.Node{Kind: yaml.ScalarNode, Value: text}, err
	}
	switch v.Kind() {
	case reflect.String:
		return &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: v.String()}, nil // the tag makes the encoder quote "1" or "true"
	case reflect.Bool:
		return &yaml.Node{Kind: yaml.ScalarNode, Value: strconv.FormatBool(v.Bool())}, nil
	case reflect.Slice:
		return listNode(v)
	case reflect.Struct:
		return structNode(v)
	}
	return nil, fmt.Errorf("no way to write a %s", v.Type())
}

func listNode(v reflect.Value) (*yaml.Node, error) {
	list := &yaml.Node{Kind: yaml.SequenceNode, Tag: "!!seq"}
	for i := range v.Len() {
		item, err := nodeOf(v.Index(i))
		if err != nil {
			return nil, err
		}
		list.Content = append(list.Content, item)
	}
	if short(list) {
		list.Style = yaml.FlowStyle
	}
	return list, nil
}

func structNode(v reflect.Value) (*yaml.Node, error) {
	group := &yaml.Node{Kind: yaml.MappingNode, Tag: "!!map"}
	for _, f := range fieldsOf(v.Type()) {
		value := v.FieldByIndex(f.index)
		if !f.required && value.IsZero() {
			continue
		}
		node, err := nodeOf(value)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", f.name, err)
		}
		group.Content = append(group.Content, &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: f.name}, node)
	}
	if short(group) && len(group.Content) <= 8 {
		group.Style = yaml.FlowStyle
	}
	return group, nil
}

// short tells whether a list or group reads well on one line: it holds only words, or what is on one line itself.
func short(n *yaml.Node) bool {
	for _, item := range n.Content {
		if item.Kind != yaml.ScalarNode && (n.Kind == yaml.SequenceNode || item.Style != yaml.FlowStyle) || strings.Contains(item.Value, "\n") {
			return false
		}
	}
	return true
}

// written gives the text of a scalar; ok is false for other values.
func written(x any) (text string, ok bool, err error) {
	switch x := x.(type) {
	case Money:
		text = moneyText(float64(x))
	case Limit:
		if text = "unlimited"; !x.Unlimited {
			text = moneyText(float64(x.Money))
		}
	case Amount:
		text = moneyText(float64(x))
	case Fraction:
		if text = shifted(float64(x), 2) + "%"; new(Fraction).parse(text) != nil || math.Abs(float64(x)) >= 1e6 {
			text = plain(float64(x))
		}
	case Number:
		text = plain(float64(x))
	case Count:
		text = strconv.Itoa(int(x))
	case Date:
		text = x.Format(time.DateOnly)
	case Seed:
		text = strconv.FormatUint(uint64(x), 10)
	case Level:
		text, ok = levelText(x.Level)
		if !ok {
			err = fmt.Errorf("level %s has too many digits", x)
		}
		return text, true, err
	default:
		return "", false, nil
	}
	return text, true, nil
}

// plain gives the shortest decimal that reads as x.
func plain(x float64) string {
	if a := math.Abs(x); a != 0 && (a < 1e-6 || a >= 1e15) {
		return strconv.FormatFloat(x, 'e', -1, 64)
	}
	return strconv.FormatFloat(x, 'f', -1, 64)
}

// moneyText gives 285m for 285000000, with the largest unit that needs at most three decimals, else the plain number.
func moneyText(x float64) string {
	for _, u := range units {
		if a := math.Abs(x); a < u.factor || a >= 1e15 {
			continue
		}
		text := shifted(x, -u.power)
		if _, decimals, _ := strings.Cut(text, "."); len(decimals) <= 3 {
			return text + u.suffix
		}
		break
	}
	return plain(x)
}

// shifted gives the shortest decimal that reads as x with its point moved to the right by a number of places, exactly.
func shifted(x float64, places int) string {
	mantissa, exponent, _ := strings.Cut(strconv.FormatFloat(x, 'e', -1, 64), "e")
	sign := ""
	if strings.HasPrefix(mantissa, "-") {
		sign, mantissa = "-", mantissa[1:]
	}
	digits := strings.Replace(mantissa, ".", "", 1)
	power, _ := strconv.Atoi(exponent) // FormatFloat writes a whole number
	point := 1 + power + places        // digits before the point
	switch {
	case strings.Trim(digits, "0") == "":
		return sign + "0"
	case point <= 0:
		return sign + "0." + strings.Repeat("0", -point) + digits
	case point >= len(digits):
		return sign + digits + strings.Repeat("0", point-len(digits))
	}
	return sign + digits[:point] + "." + digits[point:]
}

// levelText gives a text that reads as the level, exactly; ok is false when none of the usual forms does.
func levelText(l sample.Level) (text string, ok bool) {
	for _, text := range []string{l.String(), "1 in " + plain(l.ReturnPeriod()), plain(l.Float())} {
		if again, err := sample.ParseLevel(text); err == nil && again == l {
			return text, true
		}
	}
	return "", false
}
