package loss

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

// Columns of a loss table, in any order; risk may be left out.
var tableColumns = []string{"year", "event", "class", "peril", "loss", "risk"}

// ReadCSV reads a loss table, UTF-8, comma-separated with a header line, into the builder, and counts its rows. Columns are year, event,
// class, peril, loss and, if wanted, risk, in any order; an empty event marks an attritional row. It accepts a byte-order mark, CRLF
// and quoted fields. It fails with every fault, up to twenty, each with file, line, column and the text found.
func (b *Builder) ReadCSV(r io.Reader, file string) (rows int, err error) {
	table, err := openCSV(r, file, tableColumns, "risk")
	if err != nil {
		return 0, err
	}
	for {
		record, err := table.next()
		if errors.Is(err, io.EOF) {
			return rows, table.faults()
		} else if err != nil {
			return rows, err
		}
		if record == nil {
			continue
		}
		rows++
		row, ok := table.row()
		if !ok {
			continue
		}
		if err := b.Add(row); err != nil {
			for _, f := range fault.All(err) {
				f.File, f.Line, f.Column = file, table.line, table.columnOf(f.Key)
				table.add(*f)
			}
		}
	}
}

// csvTable reads a CSV file with named columns and collects its faults.
type csvTable struct {
	reader *csv.Reader
	file   string
	header []string
	place  map[string]int // of each wanted column that is there
	record []string
	line   int
	list   fault.List
	more   int
}

// openCSV reads the header. Wanted columns that are not optional must be there; others of the file are ignored unless they look like a
// misspelling of a wanted one that is missing.
func openCSV(r io.Reader, file string, wanted []string, optional ...string) (*csvTable, error) {
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
	t := &csvTable{reader: csv.NewReader(buffered), file: file, place: map[string]int{}, line: 1}
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
			t.add(fault.Fault{File: file, Line: 1, Column: i + 1, Key: name, Found: "the column stands twice", Allowed: "each column once"})
		}
		t.place[name] = i
	}
	for _, name := range wanted {
		if _, ok := t.place[name]; !ok && !slices.Contains(optional, name) {
			t.add(fault.Fault{File: file, Line: 1, Key: name, Found: fmt.Sprintf("the column is missing; the header has %q", t.header), Nearest: fault.Nearest(name, t.header)})
		}
	}
	return t, t.faults()
}

// syntax turns an error of the CSV reader into a fault.
func (t *csvTable) syntax(err error) error {
	var parse *csv.ParseError
	if errors.As(err, &parse) {
		return &fault.Fault{File: t.file, Line: parse.Line, Column: parse.Column, Found: parse.Err.Error(), Allowed: `a field in double quotes doubles the quotes inside it`}
	}
	return &fault.Fault{File: t.file, Found: "cannot be read", Err: err}
}

// next gives the next record, nil when it has the wrong number of fields, which is then a fault.
func (t *csvTable) next() ([]string, error) {
	record, err := t.reader.Read()
	if errors.Is(err, io.EOF) {
		return nil, err
	} else if err != nil {
		t.list.AddError(t.syntax(err))
		return nil, t.faults()
	}
	t.line, _ = t.reader.FieldPos(0)
	if len(record) != len(t.header) {
		t.add(fault.Fault{File: t.file, Line: t.line, Found: fmt.Sprintf("%d fields", len(record)), Allowed: fmt.Sprintf("%d, as in the header", len(t.header))})
		return nil, nil
	}
	t.record = record
	return record, nil
}

func (t *csvTable) text(column string) string {
	i, ok := t.place[column]
	if !ok {
		return ""
	}
	return strings.TrimSpace(t.record[i])
}

// columnOf gives the place of a column, from 1; 0 when it is not there.
func (t *csvTable) columnOf(name string) int {
	if i, ok := t.place[name]; ok {
		return i + 1
	}
	return 0
}

func (t *csvTable) bad(column, found, allowed string) {
	t.add(fault.Fault{File: t.file, Line: t.line, Column: t.columnOf(column), Key: column, Found: found, Allowed: allowed})
}

// number reads a column as a number; a text that is none is a fault.
func (t *csvTable) number(column string) (float64, bool) {
	text := t.text(column)
	value, err := strconv.ParseFloat(text, 64)
	if err != nil && !errors.Is(err, strconv.ErrRange) || strings.ContainsAny(text, "xX_") {
		found := fmt.Sprintf("%q is not a number", text)
		if text == "" {
			found = "the field is empty"
		}
		t.bad(column, found, "a number with a point as decimal mark")
		return 0, false
	}
	return value, true
}

// row reads a row of a loss table; what is wrong with it is a fault.
func (t *csvTable) row() (Row, bool) {
	row := Row{Event: t.text("event"), Class: t.text("class"), Peril: t.text("peril"), Risk: t.text("risk")}
	year, err := strconv.Atoi(t.text("year"))
	if err != nil {
		t.bad("year", fmt.Sprintf("%q is not a whole number", t.text("year")), "the number of the simulated year, from 1")
	}
	row.Year = year
	loss, ok := t.number("loss")
	row.Loss = loss
	return row, ok && err == nil
}

func (t *csvTable) add(f fault.Fault) {
	if t.list.Len() >= mostFaults {
		t.more++
		return
	}
	t.list.Add(f)
}

func (t *csvTable) faults() error {
	if t.more > 0 {
		t.list.Add(fault.Fault{File: t.file, Found: fmt.Sprintf("and %d more faults like these", t.more)})
		t.more = 0
	}
	return t.list.Err()
}
