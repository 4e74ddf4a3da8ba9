package settings

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"sort"

	"cedewright/portfolio/fault"

	"go.yaml.in/yaml/v3"
)

// lines finds line and column, both from 1, of places in a text.
type lines struct {
	starts []int // offset of the first byte of every line
}

func linesOf(text []byte) lines {
	l := lines{starts: []int{0}}
	for i, b := range text {
		if b == '\n' {
			l.starts = append(l.starts, i+1)
		}
	}
	return l
}

func (l lines) at(offset int) (line, column int) {
	line = sort.SearchInts(l.starts, offset+1)
	return line, offset - l.starts[line-1] + 1
}

// jsonNodes parses JSON into the same kind of tree as YAML, positions included. YAML's own parser would refuse tabs before a value and
// read escapes in another way.
func jsonNodes(text []byte, path string) (*yaml.Node, error) {
	t := &jsonTree{text: text, lines: linesOf(text)}
	if err := json.Unmarshal(text, new(json.RawMessage)); err != nil {
		f := &fault.Fault{File: path, Found: err.Error(), Allowed: "well-formed JSON, one study in a file"}
		var syntax *json.SyntaxError
		if errors.As(err, &syntax) {
			f.Line, f.Column = t.lines.at(max(int(syntax.Offset)-1, 0))
		}
		return nil, f
	}
	t.decoder = json.NewDecoder(bytes.NewReader(text))
	t.decoder.UseNumber()
	root, err := t.value()
	if err != nil && !errors.Is(err, io.EOF) {
		return nil, &fault.Fault{File: path, Found: err.Error(), Allowed: "well-formed JSON"}
	}
	return root, nil
}

type jsonTree struct {
	text    []byte
	lines   lines
	decoder *json.Decoder
}

// value reads one value of a text that is known to be well formed.
func (t *jsonTree) value() (*yaml.Node, error) {
	from := int(t.decoder.InputOffset())
	for from < len(t.text) && bytes.IndexByte([]byte(" \t\r\n:,"), t.text[from]) >= 0 {
		from++
	}
	token, err := t.decoder.Token()
	if err != nil {
		return nil, err
	}
	n := &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: fmt.Sprint(token)}
	n.Line, n.Column = t.lines.at(from)
	switch x := token.(type) {
	case json.Delim:
		n.Value = ""
		n.Kind, n.Tag = yaml.MappingNode, "!!map"
		if x == '[' {
			n.Kind, n.Tag = yaml.SequenceNode, "!!seq"
		}
		for t.decoder.More() { // in a mapping, keys and values take turns, as they do in a YAML node
			item, err := t.value()
			if err != nil {
				return nil, err
			}
			n.Content = append(n.Content, item)
		}
		_, err := t.decoder.Token()
		return n, err
	case json.Number:
		n.Tag = "!!float"
	case bool:
		n.Tag = "!!bool"
	case nil:
		n.Tag, n.Value = "!!null", ""
	}
	return n, nil
}
