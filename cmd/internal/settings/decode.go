package settings

import (
	"fmt"
	"reflect"
	"slices"
	"strings"

	"cedewright/portfolio/fault"

	"go.yaml.in/yaml/v3"
)

// place is where a key stands.
type place struct{ line, column int }

// mostNodes bounds the values of one file, aliases counted as often as they are used, so that a small file cannot blow up.
const mostNodes = 200_000

// decoder walks a tree of nodes along the types of Study and collects every fault.
type decoder struct {
	file   string
	faults fault.List
	places map[string]place
	nodes  int
}

func (d *decoder) fault(n *yaml.Node, key, found, allowed, nearest string) {
	d.faults.Add(fault.Fault{File: d.file, Line: n.Line, Column: n.Column, Key: key, Found: found, Allowed: allowed, Nearest: nearest})
}

// decode sets v from a node; path names it.
func (d *decoder) decode(n *yaml.Node, v reflect.Value, path string) {
	if d.nodes++; d.nodes > mostNodes {
		if d.nodes == mostNodes+1 {
			d.fault(n, path, "more than 200,000 values", "a study of ordinary size", "")
		}
		return
	}
	for n.Kind == yaml.AliasNode {
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
				d.fault(n, path, fmt.Sprintf("%q", n.Value), err.Error(), "")
			}
		}
		return
	}
	switch v.Kind() {
	case reflect.String:
		if d.isScalar(n, path, "text") {
			v.SetString(n.Value)
		}
	case reflect.Bool:
		if d.isScalar(n, path, "true or false") {
			if n.Value != "true" && n.Value != "false" {
				d.fault(n, path, fmt.Sprintf("%q", n.Value), "true or false", "")
			}
			v.SetBool(n.Value == "true")
		}
	case reflect.Slice:
		if n.Kind != yaml.SequenceNode {
			d.fault(n, path, "not a list but "+kindOf(n), "a list", "")
			return
		}
		v.Set(reflect.MakeSlice(v.Type(), len(n.Content), len(n.Content)))
		for i, item := range n.Content {
			d.decode(item, v.Index(i), fmt.Sprintf("%s[%d]", path, i))
		}
	case reflect.Struct:
		d.decodeStruct(n, v, path)
	}
}

// allowedBy gives what a scalar would accept, from the error it gives for nothing.
func allowedBy(s scalar) string {
	if err := reflect.New(reflect.TypeOf(s).Elem()).Interface().(scalar).parse(""); err != nil {
		return err.Error()
	}
	return ""
}

func (d *decoder) isScalar(n *yaml.Node, path, allowed string) bool {
	if n.Kind != yaml.ScalarNode || n.Tag == "!!null" {
		d.fault(n, path, "not a value but "+kindOf(n), allowed, "")
		return false
	}
	return true
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
	return fmt.Sprintf("%q", n.Value)
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
	seen := map[string]bool{}
	for _, pair := range d.pairs(n, path) {
		key, value := pair[0], pair[1]
		at := joined(path, key.Value)
		i := slices.Index(names, key.Value)
		switch {
		case i < 0:
			d.fault(key, at, "unknown key", "keys "+strings.Join(names, ", "), fault.Nearest(key.Value, names))
		case seen[key.Value]:
			d.fault(key, at, "the key stands twice", "each key once", "")
		default:
			seen[key.Value] = true
			d.decode(value, v.FieldByIndex(fields[i].index), at)
		}
	}
	for _, f := range fields {
		if f.required && !seen[f.name] {
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

// pairs gives keys and values of a mapping, those of merged mappings (<<) after its own, which they do not override.
func (d *decoder) pairs(n *yaml.Node, path string) [][2]*yaml.Node {
	var own, merged [][2]*yaml.Node
	for i := 0; i+1 < len(n.Content); i += 2 {
		key, value := n.Content[i], n.Content[i+1]
		if key.Kind != yaml.ScalarNode {
			d.fault(key, path, "a key that is not a word", "words as keys", "")
			continue
		}
		if key.Tag != "!!merge" {
			own = append(own, [2]*yaml.Node{key, value})
			continue
		}
		for value.Kind == yaml.AliasNode {
			value = value.Alias
		}
		if value.Kind != yaml.MappingNode {
			d.fault(value, joined(path, "<<"), "not a group of keys", "an alias of a group of keys", "")
			continue
		}
		if d.nodes++; d.nodes <= mostNodes {
			merged = append(merged, d.pairs(value, path)...)
		}
	}
	for _, pair := range merged {
		if !slices.ContainsFunc(own, func(o [2]*yaml.Node) bool { return o[0].Value == pair[0].Value }) {
			own = append(own, pair)
		}
	}
	return own
}
