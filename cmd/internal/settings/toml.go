package settings

import (
	"errors"
	"fmt"

	"cedewright/portfolio/fault"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
	"go.yaml.in/yaml/v3"
)

// tomlNodes parses TOML into the same kind of tree as YAML, positions included.
func tomlNodes(text []byte, path string) (*yaml.Node, error) {
	// The ordinary decoder checks what the parser of expressions does not: keys set twice, tables mixed with values.
	var checked any
	if err := toml.Unmarshal(text, &checked); err != nil {
		f := &fault.Fault{File: path, Found: err.Error(), Allowed: "well-formed TOML"}
		var decode *toml.DecodeError
		if errors.As(err, &decode) {
			f.Line, f.Column = decode.Position()
		}
		return nil, f
	}
	t := &tomlTree{text: text}
	t.parser.Reset(text)
	root := t.mapping(1, 1)
	table := root
	for t.parser.NextExpression() {
		e := t.parser.Expression()
		switch e.Kind {
		case unstable.Table:
			table = t.descend(root, e.Key(), false)
		case unstable.ArrayTable:
			table = t.descend(root, e.Key(), true)
		case unstable.KeyValue:
			t.set(table, e)
		}
	}
	if err := t.parser.Error(); err != nil {
		return nil, &fault.Fault{File: path, Found: err.Error(), Allowed: "well-formed TOML"}
	}
	return root, nil
}

type tomlTree struct {
	parser unstable.Parser
	text   []byte
}

// position gives line and column of a piece of the text.
func (t *tomlTree) position(raw unstable.Range) (line, column int) {
	line, column = 1, 1
	for _, b := range t.text[:min(int(raw.Offset), len(t.text))] {
		if column++; b == '\n' {
			line, column = line+1, 1
		}
	}
	return line, column
}

func (t *tomlTree) mapping(line, column int) *yaml.Node {
	return &yaml.Node{Kind: yaml.MappingNode, Tag: "!!map", Line: line, Column: column}
}

// child finds a key of a mapping; nil when it has none.
func child(m *yaml.Node, key string) *yaml.Node {
	for i := 0; i+1 < len(m.Content); i += 2 {
		if m.Content[i].Value == key {
			return m.Content[i+1]
		}
	}
	return nil
}

func (t *tomlTree) add(m *yaml.Node, key *unstable.Node, value *yaml.Node) {
	line, column := t.position(key.Raw)
	m.Content = append(m.Content, &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: string(key.Data), Line: line, Column: column}, value)
}

// descend walks the parts of a table's name, making what is not there; the last part of an array table gets a new item.
func (t *tomlTree) descend(m *yaml.Node, key unstable.Iterator, array bool) *yaml.Node {
	for key.Next() {
		part := key.Node()
		line, column := t.position(part.Raw)
		next := child(m, string(part.Data))
		if next == nil {
			next = t.mapping(line, column)
			if array && key.IsLast() {
				next = &yaml.Node{Kind: yaml.SequenceNode, Tag: "!!seq", Line: line, Column: column}
			}
			t.add(m, part, next)
		}
		if next.Kind == yaml.SequenceNode {
			if array && key.IsLast() {
				next.Content = append(next.Content, t.mapping(line, column))
			}
			next = next.Content[len(next.Content)-1]
		}
		m = next
	}
	return m
}

// set adds a key, dotted ones included, with its value.
func (t *tomlTree) set(m *yaml.Node, e *unstable.Node) {
	value := t.value(e.Value())
	for key := e.Key(); key.Next(); {
		part := key.Node()
		if key.IsLast() {
			if value.Line == 0 {
				value.Line, value.Column = t.position(part.Raw)
			}
			t.add(m, part, value)
			return
		}
		next := child(m, string(part.Data))
		if next == nil {
			next = t.mapping(t.position(part.Raw))
			t.add(m, part, next)
		}
		m = next
	}
}

func (t *tomlTree) value(v *unstable.Node) *yaml.Node {
	n := &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: string(v.Data)}
	if v.Raw.Length > 0 {
		n.Line, n.Column = t.position(v.Raw)
	}
	switch v.Kind {
	case unstable.Array:
		n.Kind, n.Tag = yaml.SequenceNode, "!!seq"
		for items := v.Children(); items.Next(); {
			n.Content = append(n.Content, t.value(items.Node()))
		}
	case unstable.InlineTable:
		n.Kind, n.Tag = yaml.MappingNode, "!!map"
		for items := v.Children(); items.Next(); {
			t.set(n, items.Node())
		}
	case unstable.Integer, unstable.Float, unstable.Bool, unstable.String:
	default:
		n.Value = fmt.Sprintf("%s", v.Data)
	}
	return n
}
