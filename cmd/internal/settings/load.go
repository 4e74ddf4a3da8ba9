package settings

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"strconv"
	"strings"
	"unicode/utf8"

	"cedewright/portfolio/fault"

	"go.yaml.in/yaml/v3"
)

// largestStudy bounds the size of a study file; loss tables are files of their own.
const largestStudy = 16 << 20

// Load reads a study file: YAML (.yaml, .yml), JSON (.json) or TOML (.toml). It fails with every fault that the file shows by itself, each
// with file, line, column and key; what only the data can show is left to those who read it.
func Load(path string) (Study, error) {
	info, err := os.Stat(path)
	switch {
	case err != nil:
		return Study{}, &fault.Fault{File: path, Found: "cannot be read", Allowed: "the path of a study file", Err: unwrapPath(err)}
	case info.IsDir():
		return Study{}, &fault.Fault{File: path, Found: "is a folder", Allowed: "the path of a study file"}
	case info.Size() > largestStudy:
		return Study{}, &fault.Fault{File: path, Found: fmt.Sprintf("%d MiB", info.Size()>>20), Allowed: "a study file of at most 16 MiB; loss tables are files of their own"}
	}
	data, err := os.ReadFile(path)
	if err != nil {
		return Study{}, &fault.Fault{File: path, Found: "cannot be read", Err: unwrapPath(err)}
	}
	return Parse(data, path)
}

// unwrapPath drops the path from an error of the file system, which the fault names already.
func unwrapPath(err error) error {
	var p *os.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

// Parse reads a study from bytes; path gives its name and, by its extension, its format.
func Parse(data []byte, path string) (Study, error) {
	s := Study{File: path, Folder: filepath.Dir(path), Bytes: data}
	whole := func(found, allowed string) error { return &fault.Fault{File: path, Found: found, Allowed: allowed} }
	text := bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	switch {
	case len(bytes.TrimSpace(text)) == 0:
		return s, whole("the file is empty", "a study; start from one in configs")
	case bytes.IndexByte(text, 0) >= 0 || !utf8.Valid(text):
		return s, whole("the file is not text in UTF-8", "a study in YAML, JSON or TOML")
	}
	text = bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n"))
	root, err := nodes(text, path)
	if err != nil {
		return s, err
	}
	d := decoder{file: path, places: map[string]place{}}
	d.decode(root, reflect.ValueOf(&s).Elem(), "")
	s.places = d.places
	if d.faults.Len() == 0 {
		s.check(&d.faults)
	}
	return s, d.faults.Err()
}

// nodes parses the text into one tree with positions.
func nodes(text []byte, path string) (*yaml.Node, error) {
	if strings.EqualFold(filepath.Ext(path), ".toml") {
		return tomlNodes(text, path)
	}
	decoder := yaml.NewDecoder(bytes.NewReader(text))
	var document, second yaml.Node
	if err := decoder.Decode(&document); err != nil {
		return nil, syntaxFault(err, path)
	}
	if err := decoder.Decode(&second); !errors.Is(err, io.EOF) {
		if err != nil {
			return nil, syntaxFault(err, path)
		}
		return nil, &fault.Fault{File: path, Line: second.Line, Found: "a second document", Allowed: "one study in a file"}
	}
	if len(document.Content) == 0 {
		return nil, &fault.Fault{File: path, Found: "the file is empty", Allowed: "a study; start from one in configs"}
	}
	return document.Content[0], nil
}

var lineOfError = regexp.MustCompile(`^(?:yaml: )?line (\d+): (.*)$`)

// syntaxFault takes the line out of the parser's message.
func syntaxFault(err error, path string) error {
	f := &fault.Fault{File: path, Found: strings.TrimPrefix(err.Error(), "yaml: "), Allowed: "well-formed YAML: keys end in a colon, levels are indented by blanks"}
	if m := lineOfError.FindStringSubmatch(err.Error()); m != nil {
		f.Line, _ = strconv.Atoi(m[1])
		f.Found = m[2]
	}
	return f
}

// Path resolves a path of the study against its folder.
func (s Study) Path(file string) string {
	if filepath.IsAbs(file) {
		return file
	}
	return filepath.Join(s.Folder, file)
}

// At gives a fault the place of a key of the study, or of the nearest key above it that the file has.
func (s Study) At(f fault.Fault) fault.Fault {
	f.File = s.File
	for key := f.Key; key != ""; {
		if p, ok := s.places[key]; ok {
			f.Line, f.Column = p.line, p.column
			break
		}
		key = key[:max(strings.LastIndexAny(key, ".["), 0)]
	}
	return f
}
