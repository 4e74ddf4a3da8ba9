package settings

import (
	"fmt"
	"reflect"
	"slices"
	"strings"
	"unicode"

	"cedewright/portfolio/fault"

	"go.yaml.in/yaml/v3"
)

// place is where a key stands.
type place struct{ line, column int }

// mostNodes bounds the values of one file, aliases counted as often as they are used, so that a small file cannot blow up.
const mostNodes = 200_000

// decoder walks a tree of nodes along the types of Study and collects every fault.
type decoder struct {
	file    string
	faults  fault.List
	places  map[string]place
	nodes   int
	merging map[*yaml.Node]bool // mappings whose merged keys are being gathered
	broken  []string            // keys that have a fault, or would be there but for a misspelling
}

func (d *decoder) fault(n *yaml.Node, key, found, allowed, nearest string) {
	d.broken = append(d.broken, key)
	d.faults.Add(fault.Fault{File: d.file, Line: n.Line, Column: n.Column, Key: key, Found: found, Allowed: allowed, Nearest: nearest})
}

// room counts a value and tells whether the file may have it.
func (d *decoder) room(n *yaml.Node, path string) bool {
	if d.nodes++; d.nodes == mostNodes+1 {
		d.fault(n, path, "more than 200,000 values", "a study of ordinary size; losses are files of their own", "")
	}
	return d.nodes <= mostNodes
}

// decode sets v from a node; path names it.
func (d *decoder) decode(n *yaml.Node, v reflect.Value, path string) {
	if !d.room(n, path) {
		return
	}
	if n.Kind == yaml.AliasNode {
		n = n.Alias
	}
	if path != "" {
		d.places[path] = place{n.Line, n.Column}
	}
	if v.Kind() == reflect.Pointer {
		v.Set(reflect.New(v.Type().Elem()))
		v = v.Elem()
	}
	if s, ok := v.Addr().Interface().(scalar); ok {
		if d.isScalar(n, path, allowedBy(s)) {
			if err := s.parse(strings.TrimSpace(n.Value)); err != nil {
				d.fault(n, path, quoted(n.Value), err.Error(), "")
			}
		}
		return
	}
	switch v.Kind() {
	case reflect.String:
		if d.isText(n, path) {
			v.SetString(n.Value)
		}
	case reflect.Bool:
		if d.isScalar(n, path, "true or false") {
			if n.Value != "true" && n.Value != "false" {
				d.fault(n, path, quoted(n.Value), "true or false", "")
			}
			v.SetBool(n.Value == "true")
		}
	case reflect.Slice:
		d.decodeList(n, v, path)
	case reflect.Struct:
		d.decodeStruct(n, v, path)
	}
}

func (d *decoder) decodeList(n *yaml.Node, v reflect.Value, path string) {
	if n.Kind != yaml.SequenceNode {
		d.fault(n, path, "not a list but "+kindOf(n), "a list", "")
		return
	}
	length := min(len(n.Content), max(mostNodes-d.nodes, 0)+1) // the item beyond the room reports it
	v.Set(reflect.MakeSlice(v.Type(), length, length))
	for i, item := range n.Content[:length] {
		d.decode(item, v.Index(i), fmt.Sprintf("%s[%d]", path, i))
	}
}

// allowedBy gives what a scalar would accept, from the error it gives for nothing.
func allowedBy(s scalar) string {
	if err := reflect.New(reflect.TypeOf(s).Elem()).Interface().(scalar).parse(""); err != nil {
		return err.Error()
	}
	return ""
}

// quoted shows a text as found, its middle left out when it is long.
func quoted(text string) string {
	if r := []rune(text); len(r) > 80 {
		text = string(r[:60]) + "…" + string(r[len(r)-15:])
	}
	return fmt.Sprintf("%q", text)
}

// tags are those that a value may have; others ask for types that a study does not know.
var tags = []string{"!!str", "!!int", "!!float", "!!bool", "!!timestamp"}

func (d *decoder) isScalar(n *yaml.Node, path, allowed string) bool {
	switch {
	case n.Kind != yaml.ScalarNode || n.Tag == "!!null":
		d.fault(n, path, "not a value but "+kindOf(n), allowed, "")
	case !slices.Contains(tags, n.Tag):
		d.fault(n, path, "a value with the tag "+quoted(n.Tag), allowed+", without a tag", "")
	default:
		return true
	}
	return false
}

// isText tells whether a value is text. A number, a date or a truth value in its place is most likely a slip, and every format would
// write it back in its own way (1.10 as 1.1). Names go to terminals and reports: control characters have no place in them.
func (d *decoder) isText(n *yaml.Node, path string) bool {
	if !d.isScalar(n, path, "text") {
		return false
	}
	inner := strings.TrimSpace(n.Value)
	switch {
	case n.Tag != "!!str":
		what := map[string]string{"!!bool": "a truth value", "!!timestamp": "a date"}[n.Tag]
		if what == "" {
			what = "a number"
		}
		d.fault(n, path, quoted(n.Value)+" is "+what+", not text", "text, in quotes if it looks like something else", "")
	case inner == "":
		d.fault(n, path, "an empty text", "text, or leave the key out", "")
	case strings.ContainsFunc(n.Value, func(r rune) bool { return unicode.IsControl(r) && (path != "notes" || r != '\n') }):
		d.fault(n, path, quoted(n.Value), "text on one line, without control characters", "")
	case inner != n.Value && path != "notes":
		d.fault(n, path, quoted(n.Value), "text without blanks around it", inner)
	default:
		return true
	}
	return false
}

func kindOf(n *yaml.Node) string {
	switch {
	case n.Kind == yaml.SequenceNode:
		return "a list"
	case n.Kind == yaml.MappingNode:
		return "a group of keys"
	case n.Tag == "!!null":
		return "nothing"
	}
	return quoted(n.Value)
}

// field is a key of a struct.
type field struct {
	name     string
	required bool
	index    []int
}

func fieldsOf(t reflect.Type) []field {
	var list []field
	for i := range t.NumField() {
		f := t.Field(i)
		if f.Anonymous {
			for _, inner := range fieldsOf(f.Type) {
				inner.index = append([]int{i}, inner.index...)
				list = append(list, inner)
			}
			continue
		}
		name, options, _ := strings.Cut(f.Tag.Get("key"), ",")
		if name != "" && name != "-" {
			list = append(list, field{name, options == "required", []int{i}})
		}
	}
	return list
}

func (d *decoder) decodeStruct(n *yaml.Node, v reflect.Value, path string) {
	fields := fieldsOf(v.Type())
	names := make([]string, len(fields))
	for i, f := range fields {
		names[i] = f.name
	}
	if n.Kind != yaml.MappingNode {
		d.fault(n, path, "not a group of keys but "+kindOf(n), "keys "+strings.Join(names, ", "), "")
		return
	}
	line, meant := map[string]int{}, map[string]bool{}
	for _, pair := range d.pairs(n, path) {
		key, value := pair[0], pair[1]
		at := joined(path, key.Value)
		i := slices.Index(names, key.Value)
		first, twice := line[key.Value]
		switch {
		case i < 0:
			nearest := fault.Nearest(key.Value, names)
			d.fault(key, joined(path, strings.Trim(quoted(key.Value), `"`)), "unknown key", "keys "+strings.Join(names, ", "), nearest)
			if nearest != "" {
				meant[nearest] = true
				d.broken = append(d.broken, joined(path, nearest))
			}
		case twice:
			d.fault(key, at, fmt.Sprintf("the key stands twice, first on line %d", first), "each key once", "")
		default:
			line[key.Value] = key.Line
			d.decode(value, v.FieldByIndex(fields[i].index), at)
		}
	}
	for _, f := range fields {
		if _, seen := line[f.name]; f.required && !seen && !meant[f.name] {
			d.fault(n, joined(path, f.name), "the key is missing", "", "")
		}
	}
}

func joined(path, key string) string {
	if path == "" {
		return key
	}
	return path + "." + key
}

// related tells whether two keys are the same or one holds the other.
func related(a, b string) bool {
	if len(a) > len(b) {
		a, b = b, a
	}
	return a == "" || strings.HasPrefix(b, a) && (len(a) == len(b) || b[len(a)] == '.' || b[len(a)] == '[')
}
