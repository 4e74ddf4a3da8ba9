package report

import (
	"fmt"
	"io"
	"strings"

	"github.com/mattn/go-runewidth"
)

// Style says how text is laid out on a terminal.
type Style struct {
	Width  int  // letters in a line; 0 = 118
	Colour bool // bold and dim type; without it the text is plain
}

const (
	defaultWidth = 118
	leastWidth   = 60 // a narrower terminal gets lines of this width
	mostWidth    = 140
)

func (s Style) width() int {
	if s.Width <= 0 {
		return defaultWidth
	}
	return min(max(s.Width, leastWidth), mostWidth)
}

// widths measures text the same on every machine, whatever its language is set to.
var widths = &runewidth.Condition{StrictEmojiNeutral: true}

// columns gives how many columns of a terminal a text fills.
func columns(text string) int { return widths.StringWidth(text) }

// emphasis is a way to set type apart: an escape sequence of ECMA-48.
type emphasis string

const (
	plainType emphasis = ""
	bold      emphasis = "\x1b[1m"
	dim       emphasis = "\x1b[2m"
	warm      emphasis = "\x1b[33m"
)

// in sets text apart if the style has colour.
func (s Style) in(e emphasis, text string) string {
	if !s.Colour || e == plainType || text == "" {
		return text
	}
	return string(e) + text + "\x1b[0m"
}

// grid is a table of text: the first column reads left, all others are figures, stand right and have their errors aligned.
type grid struct {
	title string
	head  []string
	rows  []gridRow
	left  map[int]bool // further columns that read left
	best  int          // column set in bold; 0 = none
}

// gridRow is a row of cells, or a rule with a name when it has none.
type gridRow struct {
	cells []string
	name  string
	total bool // set in bold
}

func newGrid(title string, head ...string) *grid {
	return &grid{title: title, head: head, left: map[int]bool{0: true}}
}

func (g *grid) add(cells ...string) { g.rows = append(g.rows, gridRow{cells: cells}) }

// rule adds a line across.
func (g *grid) rule() { g.rows = append(g.rows, gridRow{}) }

// split cuts "12.3m ± 0.4m" before the blank that leads the error.
func split(cell string) (figure, err string) {
	if i := strings.Index(cell, plusMinus); i >= 0 {
		return cell[:i], cell[i:]
	}
	return cell, ""
}

// columnRoom is the room that a column needs.
type columnRoom struct{ whole, figure, err int }

func (g *grid) room(i int) columnRoom {
	var r columnRoom
	for _, row := range g.rows {
		if i >= len(row.cells) {
			continue
		}
		if g.left[i] {
			r.whole = max(r.whole, columns(row.cells[i]))
			continue
		}
		figure, err := split(row.cells[i])
		r.figure, r.err = max(r.figure, columns(figure)), max(r.err, columns(err))
	}
	r.whole = max(r.whole, r.figure+r.err, columns(g.head[i]))
	return r
}

// cell lays out one cell; the errors of a column stand below each other.
func (g *grid) cell(i int, r columnRoom, text string, head bool) string {
	if g.left[i] {
		return text + strings.Repeat(" ", r.whole-columns(text))
	}
	after := 0
	if !head {
		_, err := split(text)
		after = r.err - columns(err)
	}
	before := r.whole - columns(text) - after
	if before < 0 { // a head wider than its figures never is; a text as wide as figure and error stands without room behind it
		before, after = r.whole-columns(text), 0
	}
	return strings.Repeat(" ", before) + text + strings.Repeat(" ", after)
}

// print writes the table. Columns keep to the width of their widest cell and nothing is cut off; what does not fit beside each other is
// written in parts below each other, each with the first column.
func (g *grid) print(w io.Writer, s Style) {
	for i := range g.head {
		g.head[i] = clean(g.head[i])
	}
	for k := range g.rows {
		g.rows[k].name = clean(g.rows[k].name)
		for i := range g.rows[k].cells {
			g.rows[k].cells[i] = clean(g.rows[k].cells[i])
		}
	}
	rooms := make([]columnRoom, len(g.head))
	for i := range g.head {
		rooms[i] = g.room(i)
	}
	title := g.title
	for from := 1; from == 1 || from < len(g.head); {
		part, total := []int{0}, rooms[0].whole
		for ; from < len(g.head) && (len(part) == 1 || total+2+rooms[from].whole <= s.width()); from++ {
			part, total = append(part, from), total+2+rooms[from].whole
		}
		if len(g.head) == 1 {
			from = 2
		}
		if title != "" {
			fmt.Fprintln(w, s.in(bold, title))
			title += " (continued)"
		}
		g.printPart(w, s, part, rooms, total)
	}
}

func (g *grid) printPart(w io.Writer, s Style, part []int, rooms []columnRoom, total int) {
	line := func(cells []string, head, heavy bool) {
		parts := make([]string, len(part))
		for k, i := range part {
			text := ""
			if i < len(cells) {
				text = cells[i]
			}
			parts[k] = g.cell(i, rooms[i], text, head)
			if k == len(part)-1 {
				parts[k] = strings.TrimRight(parts[k], " ")
			}
			if heavy || head || (i == g.best && i > 0) {
				parts[k] = s.in(bold, parts[k])
			}
		}
		fmt.Fprintln(w, strings.TrimRight(strings.Join(parts, "  "), " "))
	}
	line(g.head, true, false)
	fmt.Fprintln(w, s.in(dim, strings.Repeat("─", total)))
	for i, row := range g.rows {
		switch {
		case row.cells != nil:
			line(row.cells, false, row.total)
		case row.name == "":
			fmt.Fprintln(w, s.in(dim, strings.Repeat("─", total)))
		default:
			if i > 0 {
				fmt.Fprintln(w)
			}
			fmt.Fprintln(w, s.in(dim, row.name))
		}
	}
	fmt.Fprintln(w)
}

// wrapped writes text in lines that fit, later lines indented. A figure, its unit and its error stay on one line.
func wrapped(w io.Writer, text, indent string, width int) {
	length := 0
	text = unbroken(strings.Join(strings.Fields(clean(text)), " "))
	for i, word := range strings.Split(text, " ") {
		word = strings.ReplaceAll(word, "\u00a0", " ")
		n := columns(word)
		switch {
		case i == 0:
		case length+1+n > width:
			fmt.Fprint(w, "\n"+indent)
			length = columns(indent)
		default:
			fmt.Fprint(w, " ")
			length++
		}
		fmt.Fprint(w, word)
		length += n
	}
	fmt.Fprintln(w)
}

func bullet(w io.Writer, s Style, text string) {
	fmt.Fprint(w, "  • ")
	wrapped(w, text, "    ", s.width()-4)
}

// mind writes a warning.
func mind(w io.Writer, s Style, text string) {
	fmt.Fprint(w, "  "+s.in(warm, "! "))
	wrapped(w, text, "    ", s.width()-4)
}
