package report

import (
	"bytes"
	"encoding/json"
	"io"
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// number writes null for what is no number: JSON has no NaN and no infinity.
type number float64

// MarshalJSON writes the number.
func (n number) MarshalJSON() ([]byte, error) {
	if !finite(float64(n)) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(n))
}

// numbers does so for a list.
func numbers(list []float64) []number {
	all := make([]number, len(list))
	for i, x := range list {
		all[i] = number(x)
	}
	return all
}

// none is a figure without a value.
var none = number(math.NaN())

// field is one key of an object and its value.
type field struct {
	key   string
	value any
}

// object is a JSON object whose keys keep their order, so that a reader finds the name first.
type object []field

// MarshalJSON writes the fields in their order.
func (o object) MarshalJSON() ([]byte, error) {
	var b bytes.Buffer
	b.WriteByte('{')
	for i, f := range o {
		if i > 0 {
			b.WriteByte(',')
		}
		if err := encode(&b, f.key, ""); err != nil {
			return nil, err
		}
		b.WriteByte(':')
		if err := encode(&b, f.value, ""); err != nil {
			return nil, err
		}
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// encode writes a value with its signs as they are, not escaped for HTML.
func encode(w io.Writer, value any, indent string) error {
	e := json.NewEncoder(w)
	e.SetIndent("", indent)
	e.SetEscapeHTML(false)
	return e.Encode(value)
}

func write(w io.Writer, o object) error { return encode(w, o, "  ") }

// objects gives an object for each item, and an empty list for none.
func objects[T any](items []T, of func(T) object) []object {
	all := make([]object, len(items))
	for i, item := range items {
		all[i] = of(item)
	}
	return all
}

// texts gives an empty list, not null, for nil.
func texts(list []string) []string {
	if list == nil {
		return []string{}
	}
	return list
}

func estimate(e optimize.Estimate) object {
	return object{{"value", number(e.Value)}, {"standard_error", number(e.StandardError)}}
}

// head is what every document starts with.
func head(h study.Head) object {
	return object{
		{"study", h.Title}, {"currency", h.Currency}, {"years", h.Years}, {"book_seed", h.Seed}, {"program", Version()}, {"caution", Caution},
		{"notes", texts(h.Notes)}, {"warnings", texts(h.Warnings)},
		{"inputs", objects(h.Inputs, func(in study.Input) object {
			return object{{"path", in.Path}, {"sha256", in.SHA256}, {"rows", in.Rows}}
		})},
	}
}
