package turn

import (
	"fmt"
	"math"
	"strings"

	"wakeback/drift/nav"
)

// svgSide is the longer side of the picture in its own units; the margin holds
// the words at the edge.
const (
	svgSide   = 640
	svgMargin = 60
)

// SVG is a picture of the result, north up: the path, where each order falls
// due with its number and words, the person's drift, a scale. Over the ground
// where a current is given, else through the water. Colours are left to the
// page by class; the defaults serve on white.
func (res Result) SVG(c Case, current nav.Opt[nav.Velocity]) string {
	drift := current.Or(nav.Velocity{})
	path := res.GroundPath(drift, c.Delay)
	person := []nav.Offset{c.PersonAt(-c.Delay.Seconds(), drift), c.PersonAt(res.TotalS, drift)}
	f := newFrame(path, person)
	var b strings.Builder
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 %.0f %.0f" role="img" font-family="sans-serif" font-size="12">`, f.width, f.height)
	fmt.Fprintf(&b, "\n<title>%s, first turn to %s, back after %s</title>\n", escape(string(res.Name)), res.Side, minutes(res.TotalS))
	f.line(&b, "path", "#1f4e79", offsets(path))
	f.line(&b, "person", "#c00000", person)
	f.dot(&b, "fall", "#c00000", person[0], 16, "fell here")
	f.dot(&b, "now", "#c00000", person[1], 16, "person, "+minutes(res.TotalS))
	for i, o := range res.Orders {
		at := pathAt(path, o.AtS)
		f.dot(&b, "order", "#1f4e79", at, 4, fmt.Sprintf("%d. %s", i+1, orderWords(o)))
	}
	f.scale(&b, current.IsSet())
	b.WriteString("</svg>\n")
	return b.String()
}

// orderWords is an order in few words: what, and until which heading.
func orderWords(o Order) string {
	helm := "steady"
	switch {
	case o.Helm < 0:
		helm = "hard a-port"
	case o.Helm > 0:
		helm = "hard a-starboard"
	case o.Code == Midships:
		helm = "midships"
	}
	return helm + " until " + o.Until.Figures()
}

func minutes(s float64) string {
	whole := int(math.Round(s))
	return fmt.Sprintf("%d:%02d min", whole/60, whole%60)
}

func offsets(path []Point) []nav.Offset {
	out := make([]nav.Offset, len(path))
	for i, p := range path {
		out[i] = p.Offset
	}
	return out
}

// pathAt is the place on a path at a moment, between its points.
func pathAt(path []Point, ts float64) nav.Offset {
	for i := 1; i < len(path); i++ {
		a, b := path[i-1], path[i]
		if ts <= b.TS && b.TS > a.TS {
			part := math.Max(0, (ts-a.TS)/(b.TS-a.TS))
			return a.Offset.Add(b.Offset.Sub(a.Offset).Scale(part))
		}
	}
	return path[len(path)-1].Offset
}

// frame maps metres to the picture, with the same scale both ways.
type frame struct {
	west, north   float64
	perM          float64
	width, height float64
}

func newFrame(path []Point, more []nav.Offset) frame {
	low := nav.Offset{EastM: math.Inf(1), NorthM: math.Inf(1)}
	high := nav.Offset{EastM: math.Inf(-1), NorthM: math.Inf(-1)}
	for _, o := range append(offsets(path), more...) {
		low = nav.Offset{EastM: math.Min(low.EastM, o.EastM), NorthM: math.Min(low.NorthM, o.NorthM)}
		high = nav.Offset{EastM: math.Max(high.EastM, o.EastM), NorthM: math.Max(high.NorthM, o.NorthM)}
	}
	wide, tall := high.EastM-low.EastM, high.NorthM-low.NorthM
	perM := (svgSide - 2*svgMargin) / math.Max(1, math.Max(wide, tall))
	// At the right there is room for words, below for the scale.
	return frame{
		west: low.EastM, north: high.NorthM, perM: perM,
		width: wide*perM + 4*svgMargin, height: tall*perM + 2*svgMargin,
	}
}

func (f frame) xy(o nav.Offset) (x, y float64) {
	return svgMargin + (o.EastM-f.west)*f.perM, svgMargin + (f.north-o.NorthM)*f.perM
}

func (f frame) line(b *strings.Builder, class, colour string, points []nav.Offset) {
	fmt.Fprintf(b, `<polyline class="%s" fill="none" stroke="%s" stroke-width="2" points="`, class, colour)
	for i, p := range points {
		x, y := f.xy(p)
		if i > 0 {
			b.WriteByte(' ')
		}
		fmt.Fprintf(b, "%.1f,%.1f", x, y)
	}
	b.WriteString("\"/>\n")
}

func (f frame) dot(b *strings.Builder, class, colour string, at nav.Offset, down float64, words string) {
	x, y := f.xy(at)
	fmt.Fprintf(b, `<circle class="%s" cx="%.1f" cy="%.1f" r="4" fill="%s"/><text x="%.1f" y="%.1f">%s</text>`+"\n",
		class, x, y, colour, x+8, y+down, escape(words))
}

// scale draws a length of 1, 2 or 5 times a power of ten, and says what the
// picture is drawn in.
func (f frame) scale(b *strings.Builder, ground bool) {
	want := 150 / f.perM
	unit := math.Pow(10, math.Floor(math.Log10(want)))
	long := unit
	for _, k := range []float64{2, 5} {
		if k*unit <= want {
			long = k * unit
		}
	}
	kind := "through the water"
	if ground {
		kind = "over the ground"
	}
	y := f.height - 20
	fmt.Fprintf(b, `<line class="scale" x1="%d" y1="%.1f" x2="%.1f" y2="%.1f" stroke="#000" stroke-width="2"/><text x="%d" y="%.1f">%g m, north up, %s</text>`+"\n",
		svgMargin, y, svgMargin+long*f.perM, y, svgMargin, y-6, long, kind)
}

func escape(s string) string {
	return strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&quot;").Replace(s)
}
