package report

import (
	"bytes"
	"image/png"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/market"
)

// TestCurvePNG: a picture of the stated size that is not one colour, the same bytes every time, for curves with and without quotes and bands.
func TestCurvePNG(t *testing.T) {
	curves := append(marramCurves(), study.CurveFit{Curve: market.Curve{Name: "by hand", Distortion: market.Wang{Lambda: 0.3}}})
	curves[0].BandAt = []float64{0.001, 0.01, 0.1, 1}
	curves[0].Resampled = []market.Interval{{Low: 0.002, High: 0.004}, {Low: 0.02, High: 0.03}, {Low: 0.15, High: 0.2}, {Low: 1, High: 1}}
	for _, c := range curves {
		var b, again bytes.Buffer
		if err := CurvePNG(&b, c); err != nil {
			t.Fatalf("%s: %v", c.Curve.Name, err)
		}
		if err := CurvePNG(&again, c); err != nil || !bytes.Equal(b.Bytes(), again.Bytes()) {
			t.Errorf("%s: another picture the second time (%v)", c.Curve.Name, err)
		}
		picture, err := png.Decode(&b)
		if err != nil {
			t.Fatal(err)
		}
		if size := picture.Bounds().Size(); size.X < 1270 || size.X > 1290 || size.Y < 790 || size.Y > 810 {
			t.Errorf("%s: %v dots", c.Curve.Name, size)
		}
		colours := map[[3]uint32]bool{}
		for x := range 400 {
			r, g, b, _ := picture.At(3*x, 2*x).RGBA()
			colours[[3]uint32{r, g, b}] = true
		}
		if len(colours) < 3 {
			t.Errorf("%s: %d colours along a diagonal", c.Curve.Name, len(colours))
		}
	}
}
