package csvfile

import (
	"bufio"
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"cedewright/portfolio/fault"
)

// mostFaults is how many faults of one file are listed; the rest are counted.
const mostFaults = 20

// Table reads a CSV file with named columns and collects its faults.
type Table struct {
	reader *csv.Reader
	file   string
	header []string
	place  map[string]int // of each wanted column that is there
	record []string
	line   int
	list   fault.List
	more   int
}

// Open reads the header of a comma-separated UTF-8 file; a byte-order mark, CRLF and quoted fields are accepted. Wanted columns that are not optional must be there; others of the file are ignored unless they look like a
// misspelling of a wanted one that is missing.
func Open(r io.Reader, file string, wanted []string, optional ...string) (*Table, error) {
	buffered := bufio.NewReaderSize(r, 1<<16)
	head, err := buffered.Peek(4096)
	if err != nil && !errors.Is(err, io.EOF) {
		return nil, &fault.Fault{File: file, Found: "cannot be read", Err: err}
	}
	whole := fault.Fault{File: file, Allowed: "comma-separated text with the header " + strings.Join(wanted, ",")}
	head = bytes.TrimPrefix(head, []byte("\xef\xbb\xbf"))
	switch {
	case len(bytes.TrimSpace(head)) == 0:
		whole.Found = "the file is empty"
		return nil, &whole
	case bytes.IndexByte(head, 0) >= 0:
		whole.Found = "the file is binary, not text"
		return nil, &whole
	}
	if start, _ := buffered.Peek(3); bytes.Equal(start, []byte("\xef\xbb\xbf")) {
		_, _ = buffered.Discard(3)
	}
	first, _, _ := bytes.Cut(head, []byte("\n"))
	if !bytes.ContainsRune(first, ',') && len(wanted) > 1 {
		for _, d := range []struct{ mark, name string }{{";", "semicolons"}, {"\t", "tabs"}, {"|", "bars"}} {
			if bytes.Contains(first, []byte(d.mark)) {
				whole.Line, whole.Found = 1, "the columns are separated by "+d.name
				return nil, &whole
			}
		}
	}
	t := &Table{reader: csv.NewReader(buffered), file: file, place: map[string]int{}, line: 1}
	t.reader.ReuseRecord = true
	t.reader.FieldsPerRecord = -1
	record, err := t.reader.Read()
	if err != nil {
		return nil, t.syntax(err)
	}
	for _, name := range record {
		t.header = append(t.header, strings.TrimSpace(name))
	}
	for i, name := range t.header {
		if !slices.Contains(wanted, name) {
			continue
		}
		if _, twice := t.place[name]; twice {
			t.Add(fault.Fault{File: file, Line: 1, Column: i + 1, Key: name, Found: "the column stands twice", Allowed: "each column once"})
		}
		t.place[name] = i
	}
	for _, name := range wanted {
		if _, ok := t.place[name]; !ok && !slices.Contains(optional, name) {
			t.Add(fault.Fault{File: file, Line: 1, Key: name, Found: fmt.Sprintf("the column is missing; the header has %q", t.header), Nearest: fault.Nearest(name, t.header)})
		}
	}
	return t, t.Faults()
}

// syntax turns an error of the CSV reader into a fault.
func (t *Table) syntax(err error) error {
	var parse *csv.ParseError
	if errors.As(err, &parse) {
		return &fault.Fault{File: t.file, Line: parse.Line, Column: parse.Column, Found: parse.Err.Error(), Allowed: `a field in double quotes doubles the quotes inside it`}
	}
	return &fault.Fault{File: t.file, Found: "cannot be read", Err: err}
}

// Next reads the next record and says whether there is one. Records with the wrong number of fields are faults and passed over. At the
// end of the file, or where it cannot be read on, it gives false; Faults then says what was wrong.
func (t *Table) Next() bool {
	for {
		record, err := t.reader.Read()
		if errors.Is(err, io.EOF) {
			return false
		} else if err != nil {
			t.list.AddError(t.syntax(err))
			return false
		}
		t.line, _ = t.reader.FieldPos(0)
		if len(record) == len(t.header) {
			t.record = record
			return true
		}
		t.Add(fault.Fault{File: t.file, Line: t.line, Found: fmt.Sprintf("%d fields", len(record)), Allowed: fmt.Sprintf("%d, as in the header", len(t.header))})
	}
}

// Line gives the line of the current record.
func (t *Table) Line() int { return t.line }

// Text gives the field of a column of the current record, blanks around it cut off; "" when the file lacks the column.
func (t *Table) Text(column string) string {
	i, ok := t.place[column]
	if !ok {
		return ""
	}
	return strings.TrimSpace(t.record[i])
}

// Place gives the place of a column, from 1; 0 when it is not there.
func (t *Table) Place(name string) int {
	if i, ok := t.place[name]; ok {
		return i + 1
	}
	return 0
}

// Bad reports the field of a column of the current record.
func (t *Table) Bad(column, found, allowed string) {
	t.Add(fault.Fault{File: t.file, Line: t.line, Column: t.Place(column), Key: column, Found: found, Allowed: allowed})
}

// Number reads a column as a number; a text that is none is a fault.
func (t *Table) Number(column string) (float64, bool) {
	text := t.Text(column)
	value, err := strconv.ParseFloat(text, 64)
	if err != nil && !errors.Is(err, strconv.ErrRange) || strings.ContainsAny(text, "xX_") {
		found := fmt.Sprintf("%q is not a number", text)
		if text == "" {
			found = "the field is empty"
		}
		t.Bad(column, found, "a number with a point as decimal mark")
		return 0, false
	}
	return value, true
}

// Add reports a fault; after the first twenty they are only counted.
func (t *Table) Add(f fault.Fault) {
	if t.list.Len() >= mostFaults {
		t.more++
		return
	}
	t.list.Add(f)
}

// Faults gives everything that was reported, nil when nothing was.
func (t *Table) Faults() error {
	if t.more > 0 {
		t.list.Add(fault.Fault{File: t.file, Found: fmt.Sprintf("and %d more faults like these", t.more)})
		t.more = 0
	}
	return t.list.Err()
}
