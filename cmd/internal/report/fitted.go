package report

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
)

// PrintFitted writes the answer of fit for a terminal.
func PrintFitted(w io.Writer, f study.Fitted, s Style) {
	printHead(w, s, f.Head, "Market curves against their quotes")
	for _, c := range f.Curves {
		fmt.Fprintln(w, s.in(bold, clean(curveWords(c))))
		if c.Chosen == nil {
			wrapped(w, "Set by hand in the study; no quote stands behind it.", "", s.width())
			fmt.Fprintln(w)
			printPoints(w, s, c)
			continue
		}
		printTable(w, s, quoteTable(c.Chosen))
		wrapped(w, quoteWords(c.Chosen), "", s.width())
		fmt.Fprintln(w)
		printTable(w, s, candidateTable(c))
		for _, text := range choiceWords(c) {
			wrapped(w, text, "", s.width())
		}
		fmt.Fprintln(w)
		printPoints(w, s, c)
	}
	printFoot(w, s, f.Head)
}

func curveWords(c study.CurveFit) string {
	return fmt.Sprintf("Curve %s: %s; brokerage %s, minimum rate on line %s", c.Curve.Name, c.Curve.Distortion, Percent(c.Curve.Brokerage), Percent(c.Curve.MinimumRateOnLine))
}

// textTable is a table for terminal and paper alike; the first column and the last if it is a remark read left.
type textTable struct {
	Title  string
	Head   []string
	Rows   [][]string
	Remark bool // the last column is a remark
}

// Estimated tells whether some figure of a column has an error, for which all of the column leave room.
func (t textTable) Estimated(column int) bool {
	return slices.ContainsFunc(t.Rows, func(row []string) bool {
		_, err := split(row[column])
		return err != ""
	})
}

func printTable(w io.Writer, s Style, t textTable) {
	g := newGrid(t.Title, append([]string{}, t.Head...)...)
	if t.Remark {
		g.left[len(t.Head)-1] = true
	}
	for _, r := range t.Rows {
		g.add(append([]string{}, r...)...)
	}
	g.print(w, s)
}

// quoteTable shows a fit quote by quote.
func quoteTable(f *market.Fit) textTable {
	t := textTable{Head: []string{"quote", "attaches", "exhausts", "expected loss", "quoted", "fitted", "residual", "left out", "pull", "multiple", ""}, Remark: true}
	for _, q := range f.Quotes {
		expected, multiple := "–", "–"
		if q.Multiple > 0 {
			expected, multiple = percentTo(q.RateOnLine/q.Multiple, 2, false), fixed(q.Multiple, 2)
		}
		t.Rows = append(t.Rows, []string{q.Name, Percent(q.Attachment), Percent(q.Exhaustion), expected, percentTo(q.RateOnLine, 2, false), percentTo(q.Fitted, 2, false),
			percentTo(q.Residual, 1, true), percentTo(q.LeftOut/q.RateOnLine-1, 1, true), percentTo(q.Fitted/q.LeftOut-1, 1, true), multiple, quoteMark(f, q)})
	}
	return t
}

// largeResidual is the relative error of a quote from which it is marked: twice what is typical of the fit, but no less than 3 %.
func largeResidual(f *market.Fit) float64 { return max(2*f.InSample, 0.03) }

// quoteMark says what is odd about a quote.
func quoteMark(f *market.Fit, q market.FittedQuote) string {
	switch {
	case q.Weight == 0:
		return "weight 0, not used"
	case math.Abs(q.Residual) > largeResidual(f) && q.Residual > 0:
		return "cheap against the curve"
	case math.Abs(q.Residual) > largeResidual(f):
		return "dear against the curve"
	case q.BelowRange:
		return "alone in its range"
	}
	return ""
}

func quoteWords(f *market.Fit) string {
	text := "Rates on line include brokerage. Residual: fitted over quoted, less 1; left out: the same when the curve is fitted to the other quotes; pull: by how much the quote moves its own price. " +
		fmt.Sprintf("Multiple: quoted rate over expected loss. The quotes speak for probabilities from %s to %s; prices beyond are extrapolated.", Percent(f.LowestTail), Percent(f.HighestTail))
	if f.Family == market.FamilyFree && f.Pull > 0 {
		text += fmt.Sprintf(" Where no quote speaks, the curve is pulled towards the family %s with the weight of %s.", f.Toward, quotesWorth(f.Pull))
	}
	return text
}

func quotesWorth(pull float64) string {
	if pull == 1 {
		return "one quote"
	}
	return rounded(pull) + " quotes"
}

// candidateTable compares all families.
func candidateTable(c study.CurveFit) textTable {
	t := textTable{Title: "All families: typical relative error of a quote's price", Head: []string{"family", "parameter", "in sample", "left out", ""}, Remark: true}
	for _, f := range c.Candidates {
		parameter, note := "–", ""
		if f.Family != market.FamilyFree {
			parameter = Number(optimize.Estimate{Value: f.Parameter, StandardError: f.StandardError})
		}
		if c.Chosen != nil && f.Family == c.Chosen.Family {
			note = "chosen"
		}
		if f == c.Recommended {
			note = strings.TrimPrefix(note+", recommended", ", ")
		}
		t.Rows = append(t.Rows, []string{f.Family, parameter, percentTo(f.InSample, 1, false), percentTo(f.LeaveOneOut, 1, false), note})
	}
	return t
}

// choiceWords says what is recommended and whether one curve can price all quotes.
func choiceWords(c study.CurveFit) []string {
	var list []string
	if c.Recommended != nil {
		list = append(list, fmt.Sprintf("Recommended: %s; %s.", c.Recommended.Distortion, c.Reason))
	}
	if k := c.Consistency; k != nil {
		list = append(list, consistencyWords(*k))
	}
	return list
}

// consistencyWords names the quotes at fault, if any, and what it would take.
func consistencyWords(k market.Consistency) string {
	if k.Consistent {
		return "A single increasing concave curve can price all quotes within their bid and offer."
	}
	changes := func(list []market.Change) string {
		var parts []string
		for _, c := range list {
			if c.Relative != 0 {
				parts = append(parts, fmt.Sprintf("%s %s", c.Quote.Name, percentTo(c.Relative, 1, true)))
			}
		}
		return joined(parts)
	}
	return fmt.Sprintf("No single increasing concave curve prices all quotes within their bid and offer. The least change in sum that would let one: %s. The least change of the worst: every quote within %s. "+
		"That is no error in itself: different perils may rightly need different curves, and quotes move.", changes(k.LeastTotal), percentTo(k.Worst, 1, false))
}

func printPoints(w io.Writer, s Style, c study.CurveFit) {
	g := newGrid("Price of a thin layer by how often it is hit, over its limit, before brokerage", "hit")
	price, multiple, resampled, allowed := []string{"price"}, []string{"over probability"}, []string{"nine in ten resampled"}, []string{"quotes alone allow"}
	for _, period := range []float64{500, 200, 100, 50, 20, 10, 5, 2} {
		at := c.Curve.Distortion.At(1 / period)
		g.head = append(g.head, fmt.Sprintf("1 in %v", period))
		price, multiple = append(price, percentTo(at, 2, false)), append(multiple, fixed(at*period, 2))
		resampled, allowed = append(resampled, between(c.BandAt, c.Resampled, 1/period)), append(allowed, between(c.BandAt, c.Band, 1/period))
	}
	g.add(price...)
	g.add(multiple...)
	if c.Resampled != nil {
		g.add(resampled...)
	}
	if c.Band != nil {
		g.add(allowed...)
	}
	g.print(w, s)
}

// between reads a band at a probability, straight on the scales of the picture.
func between(at []float64, band []market.Interval, s float64) string {
	k, _ := slices.BinarySearch(at, s)
	if len(band) != len(at) || k == 0 || k == len(at) {
		return "–"
	}
	share := math.Log(s/at[k-1]) / math.Log(at[k]/at[k-1])
	mix := func(a, b float64) float64 { return a * math.Pow(b/a, share) }
	digits := func(x float64) string { return strings.TrimSuffix(percentTo(x, 1, false), " %") }
	return digits(mix(band[k-1].Low, band[k].Low)) + "–" + digits(mix(band[k-1].High, band[k].High)) + " %"
}
