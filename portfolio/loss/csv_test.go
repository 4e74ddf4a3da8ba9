package loss

import (
	"bytes"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/fault"

	"pgregory.net/rapid"
)

func read(text string) (*Table, error) {
	b := NewBuilder(10, []string{"household", "motor"})
	if _, err := b.ReadCSV(strings.NewReader(text), "losses.csv"); err != nil {
		return nil, err
	}
	return b.Build()
}

const header = "year,event,class,peril,loss,risk\n"

// TestReadCSVFaults: each fault with file, line, column, what was found and what is allowed.
func TestReadCSVFaults(t *testing.T) {
	for text, want := range map[string]string{
		header + "1,e,household,wind,ten,\n":                `losses.csv:2:5: loss: "ten" is not a number; allowed: a number with a point as decimal mark`,
		header + "1,e,household,wind,,\n":                   `losses.csv:2:5: loss: the field is empty`,
		header + "1,e,household,wind,-5,\n":                 `losses.csv:2:5: loss: -5; allowed: money of at least 0`,
		header + "1,e,household,wind,NaN,\n":                `losses.csv:2:5: loss: NaN; allowed: money of at least 0`,
		header + "1,e,household,wind,Inf,\n":                `losses.csv:2:5: loss: +Inf; allowed`,
		header + "1,e,household,wind,1e999,\n":              `losses.csv:2:5: loss: +Inf; allowed`,
		header + "1,e,household,wind,0x10,\n":               `losses.csv:2:5: loss: "0x10" is not a number`,
		header + "1,e,hosehold,wind,5,\n":                   `losses.csv:2:3: class: no class of the book is named "hosehold"; allowed: ["household" "motor"]; did you mean "household"?`,
		header + "11,e,motor,wind,5,\n":                     `losses.csv:2:1: year: 11; allowed: a whole number from 1 to 10`,
		header + "0,e,motor,wind,5,\n":                      `losses.csv:2:1: year: 0; allowed`,
		header + "1.5,e,motor,wind,5,\n":                    `losses.csv:2:1: year: "1.5" is not a whole number`,
		header + "1,e,motor,wind\n":                         `losses.csv:2: 4 fields; allowed: 6, as in the header`,
		header + "1,e,motor,wind,5,,,\n":                    `losses.csv:2: 8 fields; allowed: 6, as in the header`,
		"year,event,class,peril\n1,e,motor,wind\n":          `losses.csv:1: loss: the column is missing; the header has ["year" "event" "class" "peril"]`,
		"year,event,clas,peril,loss\n":                      `class: the column is missing; the header has ["year" "event" "clas" "peril" "loss"]; did you mean "clas"?`,
		"year,event,class,peril,loss,loss\n":                `losses.csv:1:6: loss: the column stands twice`,
		"year;event;class;peril;loss\n1;e;motor;wind;5\n":   `losses.csv:1: the columns are separated by semicolons; allowed: comma-separated text with the header year,event,class,peril,loss,risk`,
		"year\tevent\tclass\tperil\tloss\n":                 `losses.csv:1: the columns are separated by tabs`,
		"":                                                  `losses.csv: the file is empty`,
		"\xef\xbb\xbf \n":                                   `losses.csv: the file is empty`,
		"PK\x03\x04\x00\x00binary":                          `losses.csv: the file is binary, not text`,
		header + "1,\"e,motor,wind,5,\n2,e,motor,wind,5,\n": `losses.csv:`,
		header + strings.Repeat("1,e,motor,wind,x,\n", 25):  `and 5 more faults like these`,
		header + "1,e,motor,wind,x,\n1,e,motor,wind,y,\n":   `losses.csv:3:5: loss: "y" is not a number`,
	} {
		_, err := read(text)
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%.60q:\ngot  %v\nwant %s", text, err, want)
		}
		if err != nil && len(fault.All(err)) == 0 {
			t.Errorf("%.60q: not a fault: %v", text, err)
		}
	}
}

func TestReadCSVAccepts(t *testing.T) {
	plain, err := read(header + "3,s1,household,wind,10.5,\n3,s1,motor,wind,2,\n1,,motor,,7,\n2,f,household,fire,1,r9\n5,z,motor,wind,0,\n")
	if err != nil {
		t.Fatal(err)
	}
	c := plain.Columns()
	if plain.Years() != 10 || plain.Len() != 4 || !reflect.DeepEqual(plain.Perils(), []string{"attritional", "fire", "wind"}) {
		t.Errorf("%d years, %d rows, perils %v", plain.Years(), plain.Len(), plain.Perils())
	}
	if !reflect.DeepEqual(c.Offset, []int{0, 1, 2, 4, 4, 4, 4, 4, 4, 4, 4}) || !reflect.DeepEqual(c.Event, []int32{0, 1, 1, 1}) || !reflect.DeepEqual(c.Loss, []float64{7, 1, 10.5, 2}) || c.Risk[1] != 1 {
		t.Errorf("columns %+v", c)
	}
	for name, text := range map[string]string{
		"byte-order mark and CRLF": "\xef\xbb\xbfyear,event,class,peril,loss,risk\r\n3,s1,household,wind,10.5,\r\n3,s1,motor,wind,2,\r\n1,,motor,,7,\r\n2,f,household,fire,1,r9\r\n",
		"other order of columns":   "loss,peril,class,risk,year,event\n10.5,wind,household,,3,s1\n2,wind,motor,,3,s1\n7,,motor,,1,\n1,fire,household,r9,2,f\n",
		"quoted fields":            header + "\"3\",\"s1\",\"household\",\"wind\",\"10.5\",\n3,s1,motor,wind,2,\n1,,motor,,7,\n2,f,household,fire,1,r9\n",
		"other order of rows":      header + "2,f,household,fire,1,r9\n1,,motor,,7,\n3,s1,motor,wind,2,\n3,s1,household,wind,10.5,\n",
		"a column more":            "note,year,event,class,peril,loss,risk\nx,3,s1,household,wind,10.5,\nx,3,s1,motor,wind,2,\nx,1,,motor,,7,\nx,2,f,household,fire,1,r9\n",
	} {
		if table, err := read(text); err != nil || !reflect.DeepEqual(table, plain) {
			t.Errorf("%s: %v\n%+v", name, err, table)
		}
	}
}

// write gives a table as CSV.
func write(t *Table) string {
	var b bytes.Buffer
	b.WriteString(header)
	c := t.Columns()
	for y := range t.Years() {
		for i := c.Offset[y]; i < c.Offset[y+1]; i++ {
			event, risk := "", ""
			if c.Event[i] != NoEvent {
				event = strconv.Itoa(int(c.Event[i]))
			}
			if c.Risk[i] != NoRisk {
				risk = strconv.Itoa(int(c.Risk[i]))
			}
			fmt.Fprintf(&b, "%d,%s,%s,%q,%s,%s\n", y+1, event, t.Classes()[c.Class[i]], t.Perils()[c.Peril[i]], strconv.FormatFloat(c.Loss[i], 'g', -1, 64), risk)
		}
	}
	return b.String()
}

// TestOrderOfRowsNeverMatters draws rows and reads them in two orders, through one or two tables.
func TestOrderOfRowsNeverMatters(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var rows []Row
		for range rapid.IntRange(0, 30).Draw(t, "rows") {
			rows = append(rows, Row{
				Year: rapid.IntRange(1, 10).Draw(t, "year"), Event: rapid.SampledFrom([]string{"", "1", "02", "storm", "x"}).Draw(t, "event"),
				Class: rapid.SampledFrom([]string{"household", "motor"}).Draw(t, "class"), Peril: rapid.SampledFrom([]string{"", "wind", "fire"}).Draw(t, "peril"),
				Risk: rapid.SampledFrom([]string{"", "7", "tower"}).Draw(t, "risk"), Loss: float64(rapid.IntRange(0, 3).Draw(t, "loss")),
			})
		}
		build := func(order []int) *Table {
			b := NewBuilder(10, []string{"household", "motor"})
			for _, i := range order {
				if err := b.Add(rows[i]); err != nil {
					t.Fatal(err)
				}
			}
			table, err := b.Build()
			if err != nil {
				t.Fatal(err)
			}
			return table
		}
		order := make([]int, len(rows))
		for i := range order {
			order[i] = i
		}
		shuffled := rapid.Permutation(order).Draw(t, "order")
		if a, b := build(order), build(shuffled); !reflect.DeepEqual(a, b) {
			t.Fatalf("%v\n%+v\n%+v", shuffled, a, b)
		}
	})
}

func FuzzReadCSV(f *testing.F) {
	for _, seed := range []string{header + "1,e,motor,wind,5,r\n", "", "\xef\xbb\xbf" + header, "year;event\n", header + "1,\"\n\",motor,,1e3,\n", "a\x00", header + "1,e,motor,\"wi\"\"nd\",5,\n"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		table, err := read(text)
		if err != nil {
			return
		}
		for _, x := range table.Columns().Loss {
			if !(x > 0) || math.IsInf(x, 0) {
				t.Fatalf("a loss of %v", x)
			}
		}
		for _, p := range table.Perils() {
			if strings.ContainsAny(p, "\r\n\\") || strconv.Quote(p) != `"`+p+`"` {
				return // Go's quoting, which write uses, is not CSV's for such names
			}
		}
		again, err := read(write(table))
		if err != nil {
			t.Fatalf("what was read cannot be read again: %v", err)
		}
		if again.Len() != table.Len() {
			t.Fatalf("%d rows, read again %d", table.Len(), again.Len())
		}
	})
}
