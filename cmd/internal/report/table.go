package report

import (
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// grid is a table of text: the first column reads left, all others are figures and stand right.
type grid struct {
	title string
	head  []string
	rows  [][]string
	left  map[int]bool // further columns that read left
}

func newGrid(title string, head ...string) *grid {
	return &grid{title: title, head: head, left: map[int]bool{0: true}}
}

func (g *grid) add(cells ...string) { g.rows = append(g.rows, cells) }

// rule adds a line across.
func (g *grid) rule() { g.rows = append(g.rows, nil) }

// print writes the table. Columns keep to the width of their widest cell; nothing is cut off.
func (g *grid) print(w io.Writer) {
	widths := make([]int, len(g.head))
	for _, row := range append([][]string{g.head}, g.rows...) {
		for i, cell := range row {
			widths[i] = max(widths[i], utf8.RuneCountInString(cell))
		}
	}
	total := 2*len(widths) - 2
	for _, width := range widths {
		total += width
	}
	if g.title != "" {
		fmt.Fprintln(w, g.title)
	}
	line := func(cells []string) {
		var b strings.Builder
		for i, cell := range cells {
			pad := strings.Repeat(" ", widths[i]-utf8.RuneCountInString(cell))
			if i > 0 {
				b.WriteString("  ")
			}
			if g.left[i] {
				b.WriteString(cell + pad)
			} else {
				b.WriteString(pad + cell)
			}
		}
		fmt.Fprintln(w, strings.TrimRight(b.String(), " "))
	}
	line(g.head)
	fmt.Fprintln(w, strings.Repeat("─", total))
	for _, row := range g.rows {
		if row == nil {
			fmt.Fprintln(w, strings.Repeat("─", total))
			continue
		}
		line(row)
	}
	fmt.Fprintln(w)
}

// wrapped writes text in lines of at most width letters, later lines indented.
func wrapped(w io.Writer, text, indent string, width int) {
	length := 0
	for i, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		switch {
		case i == 0:
		case length+1+n > width:
			fmt.Fprint(w, "\n"+indent)
			length = len(indent)
		default:
			fmt.Fprint(w, " ")
			length++
		}
		fmt.Fprint(w, word)
		length += n
	}
	fmt.Fprintln(w)
}

// textWidth is the width of running text on a terminal.
const textWidth = 110

func bullet(w io.Writer, text string) {
	fmt.Fprint(w, "  • ")
	wrapped(w, text, "    ", textWidth-4)
}
