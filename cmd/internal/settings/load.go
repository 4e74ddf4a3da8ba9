package settings

import (
	"bytes"
	"cmp"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"cedewright/portfolio/fault"

	"go.yaml.in/yaml/v3"
)

// largestStudy bounds the size of a study file; loss tables are files of their own.
const largestStudy = 16 << 20

// mostFaults bounds the faults that are told one by one; whoever has mended these finds the rest.
const mostFaults = 100

// Load reads a study file: YAML (.yaml, .yml), JSON (.json) or TOML (.toml). It fails with every fault that the file shows by itself, each
// with file, line, column and key, files that it names but that are not there included; what only their content can show is left to those
// who read them.
func Load(path string) (Study, error) {
	f, err := os.Open(path)
	if err != nil {
		if errors.Is(err, os.ErrNotExist) {
			return Study{}, &fault.Fault{File: path, Found: "no such file", Allowed: "the path of a study file", Nearest: nearestFile(path)}
		}
		return Study{}, &fault.Fault{File: path, Found: "cannot be read", Allowed: "the path of a study file", Err: unwrapPath(err)}
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return Study{}, &fault.Fault{File: path, Found: "is a folder", Allowed: "the path of a study file"}
	}
	data, err := io.ReadAll(io.LimitReader(f, largestStudy+1))
	switch {
	case err != nil:
		return Study{}, &fault.Fault{File: path, Found: "cannot be read", Err: unwrapPath(err)}
	case len(data) > largestStudy:
		return Study{}, &fault.Fault{File: path, Found: "more than 16 MiB", Allowed: "a study file of at most 16 MiB; loss tables are files of their own"}
	}
	s, err := Parse(data, path)
	var faults fault.List
	faults.AddError(err)
	s.checkFiles(&faults)
	return s, tidy(path, faults.Err())
}

// unwrapPath drops the path from an error of the file system, which the fault names already.
func unwrapPath(err error) error {
	var p *os.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

// nearestFile gives the file of the same folder whose name is closest to that of a file that is not there; "" when none is close.
func nearestFile(path string) string {
	entries, err := os.ReadDir(filepath.Dir(path))
	if err != nil {
		return ""
	}
	var names []string
	for _, e := range entries {
		if !e.IsDir() {
			names = append(names, e.Name())
		}
	}
	nearest := fault.Nearest(filepath.Base(path), names)
	if nearest == "" {
		return ""
	}
	return filepath.Join(filepath.Dir(path), nearest)
}

// checkFiles reports the files that the study names but that are not there.
func (s Study) checkFiles(faults *fault.List) {
	check := func(key, file string, known ...string) { // known names serve in place of a file
		if file == "" {
			return
		}
		path := s.Path(file)
		f := fault.Fault{Key: key, Allowed: "the path of a file, from the folder of the study"}
		if len(known) > 0 {
			f.Allowed = fmt.Sprintf("%q, or %s", known, f.Allowed)
		}
		switch info, err := os.Stat(path); {
		case errors.Is(err, os.ErrNotExist):
			f.Found, f.Nearest = "no file "+quoted(path), cmp.Or(fault.Nearest(file, known), nearestFile(path))
		case err != nil:
			f.Found, f.Err = quoted(path)+" cannot be read", unwrapPath(err)
		case info.IsDir():
			f.Found = quoted(path) + " is a folder"
		default:
			return
		}
		faults.Add(s.At(f))
	}
	for i, t := range s.Book.Tables {
		check(fmt.Sprintf("book.tables[%d].file", i), t.File)
	}
	for i, m := range s.Book.Models {
		if m.History != nil {
			check(fmt.Sprintf("book.models[%d].history.file", i), m.History.File)
		}
	}
	for i, k := range s.Capital.Standards {
		if k.Formula == nil {
			continue
		}
		if _, ships := ShippedFactors(k.Formula.Factors); !ships {
			check(fmt.Sprintf("capital.standards[%d].formula.factors", i), k.Formula.Factors, ShippedFactorNames()...)
		}
	}
	for i, c := range s.Market.Curves {
		check(fmt.Sprintf("market.curves[%d].quotes", i), c.Quotes)
	}
}

// tidy puts faults in the order of the file and cuts a long list.
func tidy(path string, err error) error {
	all := fault.All(err)
	slices.SortStableFunc(all, func(a, b *fault.Fault) int {
		return cmp.Or(cmp.Compare(a.Line, b.Line), cmp.Compare(a.Column, b.Column))
	})
	var faults fault.List
	for _, f := range all[:min(len(all), mostFaults)] {
		faults.Add(*f)
	}
	if len(all) > mostFaults {
		faults.Add(fault.Fault{File: path, Found: fmt.Sprintf("and %d more faults", len(all)-mostFaults)})
	}
	return faults.Err()
}

// Parse reads a study from bytes; path gives its name and, by its extension, its format. It looks at no other file.
func Parse(data []byte, path string) (Study, error) {
	s := Study{File: path, Folder: filepath.Dir(path), Bytes: data}
	whole := func(found, allowed string) error { return &fault.Fault{File: path, Found: found, Allowed: allowed} }
	text := bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	switch {
	case len(bytes.TrimSpace(text)) == 0:
		return s, whole("the file is empty", "a study; start from one in configs")
	case bytes.HasPrefix(text, []byte("\xff\xfe")) || bytes.HasPrefix(text, []byte("\xfe\xff")):
		return s, whole("the file is text in UTF-16", "text in UTF-8; save it so")
	case bytes.IndexByte(text, 0) >= 0:
		return s, whole("the file is binary: it has a zero byte", "a study in YAML, JSON or TOML")
	case !utf8.Valid(text):
		line := bytes.Count(text[:invalidAt(text)], []byte("\n")) + 1
		return s, &fault.Fault{File: path, Line: line, Found: "bytes that are not text in UTF-8", Allowed: "a study in YAML, JSON or TOML, saved as UTF-8"}
	}
	text = bytes.ReplaceAll(text, []byte("\r\n"), []byte("\n"))
	root, err := nodes(text, path)
	if err != nil {
		return s, err
	}
	d := decoder{file: path, places: map[string]place{}}
	d.decode(root, reflect.ValueOf(&s).Elem(), "")
	s.places = d.places
	s.check(&d)
	return s, tidy(path, d.faults.Err())
}

// invalidAt gives the offset of the first byte that is not UTF-8.
func invalidAt(text []byte) int {
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRune(text[i:])
		if r == utf8.RuneError && size == 1 {
			return i
		}
		i += size
	}
	return len(text)
}

// nodes parses the text into one tree with positions.
func nodes(text []byte, path string) (*yaml.Node, error) {
	switch extension := strings.ToLower(filepath.Ext(path)); extension {
	case ".toml":
		return tomlNodes(text, path)
	case ".json":
		return jsonNodes(text, path)
	case ".yaml", ".yml", "":
		return yamlNodes(text, path)
	default:
		return nil, &fault.Fault{File: path, Found: "the extension " + quoted(extension), Allowed: "a study in .yaml, .yml, .json or .toml"}
	}
}

func yamlNodes(text []byte, path string) (*yaml.Node, error) {
	decoder := yaml.NewDecoder(bytes.NewReader(text))
	var document, second yaml.Node
	if err := decoder.Decode(&document); err != nil && !errors.Is(err, io.EOF) {
		return nil, syntaxFault(err, path)
	}
	if len(document.Content) == 0 {
		return nil, &fault.Fault{File: path, Found: "the file holds nothing but comments", Allowed: "a study; start from one in configs"}
	}
	if err := decoder.Decode(&second); !errors.Is(err, io.EOF) {
		if err != nil {
			return nil, syntaxFault(err, path)
		}
		return nil, &fault.Fault{File: path, Line: second.Line, Column: second.Column, Found: "a second document", Allowed: "one study in a file"}
	}
	return document.Content[0], nil
}

var lineOfError = regexp.MustCompile(`(?s)^(?:yaml: )?line (\d+): (.*)$`)

// syntaxFault takes the line out of the parser's message. The parser names the line on which it gave up, which is that of the slip or
// one or two below it.
func syntaxFault(err error, path string) error {
	f := &fault.Fault{File: path, Found: strings.TrimPrefix(err.Error(), "yaml: "), Allowed: "well-formed YAML: keys end in a colon, levels are indented by blanks (look on the lines just above, too)"}
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
