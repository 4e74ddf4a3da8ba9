package report

import "strings"

// Colours, chosen apart in lightness as well as in hue; every mark has a shape or a text of its own too.
const (
	lightColours = "--ink:#18242c;--soft:#56646c;--line:#e2dfd6;--page:#fdfcf9;--panel:#f3f0e8;--main:#0c6068;--warm:#b0461f;--main-pale:#bfdbda;--warm-pale:#f0d2c0;--quiet:#7d878c;--quiet-pale:#dcdcd6;--cheap:#e9f1ec;"
	darkColours  = "--ink:#e8e6df;--soft:#a8b0b2;--line:#333b40;--page:#13181b;--panel:#1d2429;--main:#62c2be;--warm:#f09a70;--main-pale:#1d4b4e;--warm-pale:#5a3421;--quiet:#8c979b;--quiet-pale:#384045;--cheap:#18262a;"
)

// pictureStyle dresses the marks of every picture. Sizes of type agree with labelSize and tickSize.
const pictureStyle = `.grid{stroke:var(--line);stroke-width:1}.edge{stroke:var(--quiet);stroke-width:1}
.tick,.note{fill:var(--soft);font-size:12px}.note{fill:var(--ink)}.axis{fill:var(--soft);font-size:13px}
.label,.note{paint-order:stroke;stroke:var(--page);stroke-width:4px;stroke-linejoin:round}.label{fill:var(--ink);font-size:13px}
.share{fill:var(--soft);font-size:10.5px}.strong{font-weight:650}.main-text{fill:var(--main)}.warm-text{fill:var(--warm)}.quiet-text{fill:var(--soft);font-style:italic}
.leader{stroke:var(--quiet);stroke-width:.8}.whisker{stroke:var(--ink);stroke-width:1.2;opacity:.55}
polyline{fill:none;stroke-width:2.2;stroke-linejoin:round}.front,.best-line{stroke:var(--main)}.beyond{stroke:var(--main);stroke-dasharray:3 4;opacity:.75}
.own{stroke:var(--warm);stroke-width:1.6;stroke-dasharray:7 5;fill:none}.cheap{fill:var(--cheap)}
.diagonal{stroke:var(--quiet);stroke-width:1.2;stroke-dasharray:2 4}.gross{stroke:var(--quiet);stroke-dasharray:8 4}.start-line{stroke:var(--warm);stroke-dasharray:3 3}
.front-point,.best{fill:var(--main)}.none{fill:var(--page);stroke:var(--ink);stroke-width:2}.start{fill:var(--warm)}.other{fill:var(--quiet)}
.quote{fill:var(--warm)}.unused{fill:var(--quiet-pale);stroke:var(--quiet)}.span{stroke:var(--warm);stroke-width:1.4;opacity:.5}.stem{stroke:var(--warm);stroke-width:2;opacity:.6}
.block-best{fill:var(--main-pale);stroke:var(--main);stroke-width:1.4}.block-start{fill:var(--warm-pale);stroke:var(--warm);stroke-width:1.4}.block-other{fill:var(--quiet-pale);stroke:var(--quiet);stroke-width:1.4}
.fault{fill:none;stroke:var(--ink);stroke-width:1.4}.allowed{fill:var(--quiet-pale);opacity:.6}.resampled{fill:var(--main-pale);opacity:.7}.unplaced{fill:none;stroke:var(--quiet);stroke-dasharray:3 3}
.bar-best{fill:var(--main)}.bar-start{fill:var(--warm)}.bar-other{fill:var(--quiet)}.bar-none{fill:var(--quiet-pale);stroke:var(--ink);stroke-width:1}`

// colours sets the colours of a place for light, dark and print.
func colours(place string) string {
	return place + "{" + lightColours + "}@media (prefers-color-scheme:dark){" + place + "{" + darkColours + "}}@media print{" + place + "{" + lightColours + "}}"
}

// standalone puts the style into a picture that leaves the paper.
func standalone(svg string) string {
	before, after, ok := strings.Cut(svg, "<title>")
	if !ok {
		return svg
	}
	return before + "<style>" + colours("svg") + "svg{background:var(--page);font-family:system-ui,sans-serif}" + pictureStyle + "</style><title>" + after + "\n"
}
