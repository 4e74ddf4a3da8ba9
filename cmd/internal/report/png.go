package report

import (
	"fmt"
	"image/color"
	"io"
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/market"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Colours of pictures in PNG, those of the light style.
var (
	pngMain  = color.RGBA{0x0c, 0x60, 0x68, 0xff}
	pngWarm  = color.RGBA{0xb0, 0x46, 0x1f, 0xff}
	pngQuiet = color.RGBA{0x7d, 0x87, 0x8c, 0xff}
	pngBand  = color.RGBA{0xbf, 0xdb, 0xda, 0xff}
)

// CurvePNG writes the picture of a market curve, with its quotes after brokerage and the band of resampled curves, as a PNG of 1,280 by 800 dots, for
// papers that take no SVG.
func CurvePNG(w io.Writer, f study.CurveFit) error {
	p := plot.New()
	p.Title.Text = clean("Market curve " + f.Curve.Name + ": " + f.Curve.Distortion.String())
	p.X.Label.Text, p.Y.Label.Text = probabilityLabel, "price over limit"
	low := 0.001
	if f.Chosen != nil {
		for low > f.Chosen.LowestTail && low > 1e-5 {
			low /= 2
		}
	}
	for _, text := range []*font.Font{&p.Title.TextStyle.Font, &p.X.Label.TextStyle.Font, &p.Y.Label.TextStyle.Font, &p.X.Tick.Label.Font, &p.Y.Tick.Label.Font} {
		text.Variant = "Sans"
	}
	p.X.Scale, p.Y.Scale = plot.LogScale{}, plot.LogScale{}
	p.X.Tick.Marker, p.Y.Tick.Marker = percentTicks{}, percentTicks{}
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = low, 1, low, 1
	p.Add(plotter.NewGrid())
	if err := addBand(p, f.BandAt, f.Resampled, low); err != nil {
		return fmt.Errorf("report: picture of curve %q: %w", f.Curve.Name, err)
	}
	line := func(g func(float64) float64, c color.Color, dashes []vg.Length) error {
		points := make(plotter.XYs, 201)
		for i := range points {
			s := low * math.Pow(1/low, float64(i)/200)
			points[i].X, points[i].Y = s, max(g(s), low)
		}
		l, err := plotter.NewLine(points)
		if err != nil {
			return err
		}
		l.Color, l.Width, l.Dashes = c, vg.Points(1.6), dashes
		p.Add(l)
		return nil
	}
	if err := line(func(s float64) float64 { return s }, pngQuiet, []vg.Length{vg.Points(2), vg.Points(3)}); err != nil {
		return fmt.Errorf("report: picture of curve %q: %w", f.Curve.Name, err)
	}
	if err := line(f.Curve.Distortion.At, pngMain, nil); err != nil {
		return fmt.Errorf("report: picture of curve %q: %w", f.Curve.Name, err)
	}
	if f.Chosen != nil {
		if err := addQuotes(p, f, low); err != nil {
			return fmt.Errorf("report: picture of curve %q: %w", f.Curve.Name, err)
		}
	}
	to, err := p.WriterTo(13.333*vg.Inch, 8.333*vg.Inch, "png") // at the library's 96 dots an inch
	if err != nil {
		return fmt.Errorf("report: picture of curve %q: %w", f.Curve.Name, err)
	}
	_, err = to.WriteTo(w)
	return err
}

// addBand fills the band of resampled curves.
func addBand(p *plot.Plot, at []float64, band []market.Interval, low float64) error {
	if len(band) != len(at) || len(band) == 0 {
		return nil
	}
	var there, back plotter.XYs
	for i, s := range at {
		if s >= low {
			there = append(there, plotter.XY{X: s, Y: max(band[i].High, low)})
			back = append(plotter.XYs{{X: s, Y: max(band[i].Low, low)}}, back...)
		}
	}
	area, err := plotter.NewPolygon(append(there, back...))
	if err != nil {
		return err
	}
	area.Color, area.LineStyle.Width = pngBand, 0
	p.Add(area)
	return nil
}

// addQuotes draws each quote as a dot, with a bar from its exhaustion to its attachment probability.
func addQuotes(p *plot.Plot, f study.CurveFit, low float64) error {
	var dots plotter.XYs
	for _, q := range f.Chosen.Quotes {
		price := q.RateOnLine * (1 - f.Curve.Brokerage)
		if !(price > low) || !(q.Attachment > 0) {
			continue
		}
		dots = append(dots, plotter.XY{X: middle(q, low), Y: price})
		bar, err := plotter.NewLine(plotter.XYs{{X: max(q.Exhaustion, low), Y: price}, {X: max(q.Attachment, low), Y: price}})
		if err != nil {
			return err
		}
		bar.Color = pngWarm
		p.Add(bar)
	}
	if len(dots) == 0 {
		return nil
	}
	marks, err := plotter.NewScatter(dots)
	if err != nil {
		return err
	}
	marks.GlyphStyle = draw.GlyphStyle{Color: pngWarm, Radius: vg.Points(3), Shape: draw.CircleGlyph{}}
	p.Add(marks)
	return nil
}

// percentTicks marks 1, 2 and 5 of every power of ten as per cent.
type percentTicks struct{}

// Ticks gives the marks between two values.
func (percentTicks) Ticks(low, high float64) []plot.Tick {
	var list []plot.Tick
	for _, v := range (axis{low: low, high: high, scale: logarithmic}).ticks(0) {
		list = append(list, plot.Tick{Value: v, Label: Percent(v)})
	}
	return list
}
