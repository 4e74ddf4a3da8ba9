package portfoliotest

import (
	"encoding/csv"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// Published is one value of testdata/published/values.csv.
type Published struct {
	Case     string // what it is a value of
	Quantity string
	Text     string  // as written
	Value    float64 // 0 when Text is a word
	Mark     string  // R read, M from memory, MV from memory and confirmed, C computed
	Citation string
}

// PublishedValues gives the rows of one table, at least one, in their order; root is the path from the test to the top of the project.
func PublishedValues(t testing.TB, root, table string) []Published {
	t.Helper()
	f, err := os.Open(root + "/testdata/published/values.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	records, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []Published
	for _, r := range records[1:] {
		if r[0] != table {
			continue
		}
		p := Published{Case: r[1], Quantity: r[2], Text: r[3], Mark: r[4], Citation: r[5]}
		if !slices.Contains([]string{"R", "M", "MV", "C"}, p.Mark) || len(p.Citation) < 10 {
			t.Fatalf("%s, %s, %s: mark %q, citation %q", table, p.Case, p.Quantity, p.Mark, p.Citation)
		}
		if p.Value, err = strconv.ParseFloat(p.Text, 64); err != nil && strings.ContainsAny(p.Text, "0123456789") {
			t.Fatalf("%s, %s, %s: value %q", table, p.Case, p.Quantity, p.Text)
		}
		rows = append(rows, p)
	}
	if len(rows) == 0 {
		t.Fatalf("no published value in the table %q", table)
	}
	return rows
}

// Find gives the value of one case and quantity.
func Find(t testing.TB, rows []Published, name, quantity string) Published {
	t.Helper()
	i := slices.IndexFunc(rows, func(p Published) bool { return p.Case == name && p.Quantity == quantity })
	if i < 0 {
		t.Fatalf("no published value of %q, %q", name, quantity)
	}
	return rows[i]
}

// Numbers gives the numbers in a text, in order.
func Numbers(text string) []float64 {
	var list []float64
	for _, word := range strings.Fields(text) {
		if x, err := strconv.ParseFloat(strings.TrimSuffix(word, "%"), 64); err == nil {
			list = append(list, x)
		}
	}
	return list
}
