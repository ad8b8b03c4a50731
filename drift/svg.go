package drift

import (
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"wakeback/drift/nav"
)

// SVG draws the cloud: members, the regions that hold 50 and 95 of 100, the
// start, and the datums of the manual with the circles of their errors. North is
// up. d must be the datum of the cloud's case at the cloud's time.
func (cl *Cloud) SVG(w io.Writer, d Datum) error {
	p := newPicture(cl, d)
	p.open()
	p.regions(cl)
	p.members(cl)
	p.start(cl)
	p.datums(d)
	p.frame(cl, d)
	p.b.WriteString("</svg>\n")
	if _, err := io.WriteString(w, p.b.String()); err != nil {
		return fmt.Errorf("writing the picture: %w", err)
	}
	return nil
}

// Sizes of the picture, in its own units, and how many members are drawn. Our
// choice: a square that fits a page or a phone, and points that can be told
// apart.
const (
	pictureSide   = 800
	pictureMargin = 60
	pictureDots   = 2000
)

// Colours that can be told apart in print, on a dark screen and by people who
// see red and green alike (Okabe and Ito 2008, "Color Universal Design").
const (
	inkCloud = "#56B4E9"
	inkDatum = "#D55E00"
	inkStart = "#009E73"
	inkText  = "#E6E6E6"
	inkBack  = "#101418"
)

type picture struct {
	b      strings.Builder
	plane  nav.Plane
	middle nav.Offset
	scale  float64 // picture units a metre
}

func newPicture(cl *Cloud, d Datum) *picture {
	p := &picture{plane: cl.plane}
	lo := nav.Offset{EastM: math.Inf(1), NorthM: math.Inf(1)}
	hi := lo.Scale(-1)
	take := func(e, n float64) {
		lo.EastM, hi.EastM = min(lo.EastM, e), max(hi.EastM, e)
		lo.NorthM, hi.NorthM = min(lo.NorthM, n), max(hi.NorthM, n)
	}
	for i := range cl.eastM {
		take(cl.eastM[i], cl.northM[i])
	}
	for _, o := range p.landmarks(cl.c, d) {
		take(o.EastM, o.NorthM)
	}
	p.middle = lo.Add(hi).Scale(0.5)
	// A picture is at least 200 m wide: our choice, a few boat lengths around.
	extent := max(hi.EastM-lo.EastM, hi.NorthM-lo.NorthM, 200)
	p.scale = (pictureSide - 2*pictureMargin) / extent
	return p
}

// landmarks are what must be in the picture besides the members.
func (p *picture) landmarks(c Case, d Datum) []nav.Offset {
	var out []nav.Offset
	if !c.Start.Corridor() {
		out = append(out, nav.Offset{})
	}
	for _, o := range []nav.Opt[nav.Position]{d.Point, d.Left, d.Right} {
		if at, ok := o.Get(); ok {
			out = append(out, p.plane.Offset(at))
		}
	}
	for _, q := range d.Corridor {
		out = append(out, p.plane.Offset(q.From), p.plane.Offset(q.Point))
	}
	return out
}

func (p *picture) xy(o nav.Offset) (x, y string) {
	o = o.Sub(p.middle).Scale(p.scale)
	return fixed(pictureSide/2+o.EastM, 1), fixed(pictureSide/2-o.NorthM, 1)
}

// put writes text with each #? replaced by the next of args.
func (p *picture) put(form string, args ...string) {
	for _, a := range args {
		before, after, _ := strings.Cut(form, "#?")
		p.b.WriteString(before)
		p.b.WriteString(a)
		form = after
	}
	p.b.WriteString(form + "\n")
}

func (p *picture) open() {
	side := strconv.Itoa(pictureSide)
	p.put(`<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 #? #?" font-family="sans-serif" font-size="14">`, side, side)
	p.put(`<rect width="#?" height="#?" fill="`+inkBack+`"/>`, side, side)
}

func (p *picture) path(o []nav.Offset, closed bool) string {
	var b strings.Builder
	for i, q := range o {
		x, y := p.xy(q)
		b.WriteString(map[bool]string{true: "M", false: "L"}[i == 0] + x + " " + y)
	}
	if closed {
		b.WriteString("Z")
	}
	return b.String()
}

func (p *picture) regions(cl *Cloud) {
	for _, r := range cl.Regions(0.95, 0.5) {
		var b strings.Builder
		for _, ring := range r.Rings {
			b.WriteString(p.path(ring, true))
		}
		p.put(`<path class="region" d="#?" fill="`+inkCloud+`" fill-opacity="0.15" stroke="`+inkCloud+`"><title>#? % of the members</title></path>`,
			b.String(), fixed(r.Share*100, 0))
	}
}

func (p *picture) members(cl *Cloud) {
	every := max(cl.N()/pictureDots, 1)
	var b strings.Builder
	for i := 0; i < cl.N(); i += every {
		x, y := p.xy(nav.Offset{EastM: cl.eastM[i], NorthM: cl.northM[i]})
		b.WriteString("M" + x + " " + y + "h0")
	}
	p.put(`<path d="#?" stroke="`+inkCloud+`" stroke-width="1.5" stroke-linecap="round" stroke-opacity="0.6"/>`, b.String())
}

// start draws the mark, or the track on which the fall happened.
func (p *picture) start(cl *Cloud) {
	if cl.c.Start.Corridor() {
		var track []nav.Offset
		for _, f := range flatten(cl.c, cl.plane) {
			track = append(track, f.o)
		}
		p.put(`<path d="#?" fill="none" stroke="`+inkStart+`" stroke-width="2"/>`, p.path(track, false))
		return
	}
	x, y := p.xy(nav.Offset{})
	p.put(`<circle cx="#?" cy="#?" r="5" fill="none" stroke="`+inkStart+`" stroke-width="2"/>`, x, y)
	p.label(nav.Offset{}, "start", inkStart)
}

func (p *picture) datums(d Datum) {
	draw := func(o nav.Opt[nav.Position], name string) {
		at, ok := o.Get()
		if !ok {
			return
		}
		q := p.plane.Offset(at)
		x, y := p.xy(q)
		p.put(`<circle cx="#?" cy="#?" r="#?" fill="none" stroke="`+inkDatum+`" stroke-dasharray="4 4"><title>50 % circle of the #?</title></circle>`,
			x, y, fixed(d.TotalProbableErrorM*p.scale, 1), name)
		p.put(`<circle cx="#?" cy="#?" r="3" fill="`+inkDatum+`"/>`, x, y)
		p.label(q, name, inkDatum)
	}
	draw(d.Point, "datum")
	draw(d.Left, "left datum")
	draw(d.Right, "right datum")
	var line []nav.Offset
	for _, q := range d.Corridor {
		line = append(line, p.plane.Offset(q.Point))
	}
	if len(line) > 0 {
		p.put(`<path d="#?" fill="none" stroke="`+inkDatum+`" stroke-width="2"/>`, p.path(line, false))
	}
}

func (p *picture) label(o nav.Offset, text, ink string) {
	x, y := p.xy(o)
	p.put(`<text x="#?" y="#?" dx="8" dy="-6" fill="#?">#?</text>`, x, y, ink, escape(text))
}

// frame draws the title, the scale and the legend.
func (p *picture) frame(cl *Cloud, d Datum) {
	line := func(y int, text string) {
		p.put(`<text x="20" y="#?" fill="`+inkText+`">#?</text>`, strconv.Itoa(y), escape(text))
	}
	line(26, cl.c.Class.Object+", "+utc(cl.at))
	line(44, strconv.Itoa(cl.N())+" members; areas hold 50 and 95 % of them; dashed circles hold 50 % (manual)")
	line(pictureSide-12, "Advice from a model. Uncertainty grows with time. North is up.")
	length := scaleBar((pictureSide / 4) / p.scale)
	x := pictureSide - 20 - length*p.scale
	p.put(`<path d="M#? 775H780" stroke="`+inkText+`" stroke-width="3"/>`, fixed(x, 1))
	p.put(`<text x="780" y="768" text-anchor="end" fill="`+inkText+`">#? NM</text>`, strconv.FormatFloat(length/nav.MetresPerNM, 'g', 3, 64))
}

// scaleBar is the longest of 1, 2 and 5 by powers of ten, in nautical miles,
// that is no longer than limitM; in metres.
func scaleBar(limitM float64) float64 {
	nm := limitM / nav.MetresPerNM
	step := math.Pow(10, math.Floor(math.Log10(nm)))
	for _, f := range []float64{5, 2} {
		if f*step <= nm {
			return f * step * nav.MetresPerNM
		}
	}
	return step * nav.MetresPerNM
}

// escape makes text safe within an element.
func escape(s string) string {
	return strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&quot;").Replace(s)
}
