package settings

import (
	"errors"
	"strings"

	"cedewright/portfolio/fault"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
	"go.yaml.in/yaml/v3"
)

// tomlNodes parses TOML into the same kind of tree as YAML, positions included.
func tomlNodes(text []byte, path string) (*yaml.Node, error) {
	// The ordinary decoder checks what the parser of expressions does not: keys set twice, tables mixed with values.
	var checked map[string]any
	var bad *fault.Fault
	if err := toml.Unmarshal(text, &checked); err != nil {
		bad = &fault.Fault{File: path, Found: strings.TrimPrefix(err.Error(), "toml: "), Allowed: "well-formed TOML"}
		var decode *toml.DecodeError
		if errors.As(err, &decode) {
			bad.Line, bad.Column = decode.Position()
			return nil, bad
		}
	}
	t := &tomlTree{lines: linesOf(text)}
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
	if bad != nil { // without a place: a key that stands twice is the likely one
		if key := repeated(root); key != nil {
			bad.Line, bad.Column = key.Line, key.Column
		}
		return nil, bad
	}
	return root, nil
}

// repeated gives the first key, in the order of the text, that a mapping of the tree has for the second time; nil when there is none.
func repeated(n *yaml.Node) *yaml.Node {
	seen := map[string]bool{}
	for i, item := range n.Content {
		if n.Kind == yaml.MappingNode && i%2 == 0 {
			if seen[item.Value] {
				return item
			}
			seen[item.Value] = true
		} else if key := repeated(item); key != nil {
			return key
		}
	}
	return nil
}

type tomlTree struct {
	parser unstable.Parser
	lines  lines
}

func (t *tomlTree) mapping(line, column int) *yaml.Node {
	return &yaml.Node{Kind: yaml.MappingNode, Tag: "!!map", Line: line, Column: column}
}

func (t *tomlTree) position(n *unstable.Node) (line, column int) {
	return t.lines.at(int(n.Raw.Offset))
}

// child finds the last value of a key of a mapping; nil when it has none.
func child(m *yaml.Node, key string) *yaml.Node {
	for i := len(m.Content) - 2; i >= 0; i -= 2 {
		if m.Content[i].Value == key {
			return m.Content[i+1]
		}
	}
	return nil
}

func (t *tomlTree) add(m *yaml.Node, key *unstable.Node, value *yaml.Node) {
	line, column := t.position(key)
	m.Content = append(m.Content, &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: string(key.Data), Line: line, Column: column}, value)
}

// descend walks the parts of a table's name, making what is not there; the last part of an array table gets a new item.
func (t *tomlTree) descend(m *yaml.Node, key unstable.Iterator, array bool) *yaml.Node {
	for key.Next() {
		part := key.Node()
		line, column := t.position(part)
		last := array && key.IsLast()
		next := child(m, string(part.Data))
		if next == nil {
			next = t.mapping(line, column)
			if last {
				next = &yaml.Node{Kind: yaml.SequenceNode, Tag: "!!seq", Line: line, Column: column}
			}
			t.add(m, part, next)
		}
		if next.Kind == yaml.SequenceNode {
			if last || len(next.Content) == 0 {
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
		line, column := t.position(part)
		if key.IsLast() {
			if value.Line == 0 {
				value.Line, value.Column = line, column
			}
			t.add(m, part, value)
			return
		}
		next := child(m, string(part.Data))
		if next == nil {
			next = t.mapping(line, column)
			t.add(m, part, next)
		}
		m = next
	}
}

// tomlTags are the tags of YAML that stand for the kinds of values of TOML.
var tomlTags = map[unstable.Kind]string{
	unstable.Integer: "!!int", unstable.Float: "!!float", unstable.Bool: "!!bool", unstable.LocalDate: "!!timestamp",
	unstable.LocalTime: "!!timestamp", unstable.LocalDateTime: "!!timestamp", unstable.DateTime: "!!timestamp",
}

// value gives the node of a value; its line is 0 when the parser does not say where it stands (a list).
func (t *tomlTree) value(v *unstable.Node) *yaml.Node {
	n := &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: string(v.Data)}
	if tag, ok := tomlTags[v.Kind]; ok {
		n.Tag = tag
	}
	if v.Raw.Length > 0 {
		n.Line, n.Column = t.position(v)
	}
	switch v.Kind {
	case unstable.Array:
		n.Kind, n.Tag, n.Value = yaml.SequenceNode, "!!seq", ""
		for items := v.Children(); items.Next(); {
			n.Content = append(n.Content, t.value(items.Node()))
		}
		if len(n.Content) > 0 {
			n.Line, n.Column = n.Content[0].Line, n.Content[0].Column
		}
	case unstable.InlineTable:
		n.Kind, n.Tag, n.Value = yaml.MappingNode, "!!map", ""
		for items := v.Children(); items.Next(); {
			t.set(n, items.Node())
		}
	case unstable.Integer, unstable.Float:
		n.Value = strings.ReplaceAll(n.Value, "_", "") // between digits, as TOML allows
	}
	return n
}
