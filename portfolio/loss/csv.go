package loss

import (
	"fmt"
	"io"
	"strconv"

	"cedewright/portfolio/csvfile"
	"cedewright/portfolio/fault"
)

// tableColumns are the columns of a loss table, in any order; risk may be left out.
var tableColumns = []string{"year", "event", "class", "peril", "loss", "risk"}

// ReadCSV reads a loss table, UTF-8, comma-separated with a header line, into the builder, and counts its rows. Columns are year, event,
// class, peril, loss and, if wanted, risk, in any order; an empty event marks an attritional row. It accepts a byte-order mark, CRLF
// and quoted fields. It fails with every fault, up to twenty, each with file, line, column and the text found.
func (b *Builder) ReadCSV(r io.Reader, file string) (rows int, err error) {
	table, err := csvfile.Open(r, file, tableColumns, "risk")
	if err != nil {
		return 0, err
	}
	for table.Next() {
		rows++
		row, ok := tableRow(table)
		if !ok {
			continue
		}
		if err := b.Add(row); err != nil {
			for _, f := range fault.All(err) {
				f.File, f.Line, f.Column = file, table.Line(), table.Place(f.Key)
				table.Add(*f)
			}
		}
	}
	return rows, table.Faults()
}

// tableRow reads a row of a loss table; what is wrong with it is a fault.
func tableRow(t *csvfile.Table) (Row, bool) {
	row := Row{Event: t.Text("event"), Class: t.Text("class"), Peril: t.Text("peril"), Risk: t.Text("risk")}
	year, err := strconv.Atoi(t.Text("year"))
	if err != nil {
		t.Bad("year", fmt.Sprintf("%q is not a whole number", t.Text("year")), "the number of the simulated year, from 1")
	}
	row.Year = year
	loss, ok := t.Number("loss")
	row.Loss = loss
	return row, ok && err == nil
}
