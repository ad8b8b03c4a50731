package drift

import (
	"math"
	"strconv"
	"strings"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// Worksheet is a datum step by step, so that a planner can check it on paper.
type Worksheet struct {
	Steps []Step `json:"steps"`
}

// Step is one numbered step: what it works out, and the lines of it.
type Step struct {
	Title string   `json:"title"`
	Lines []string `json:"lines"`
}

// Worksheet writes down how a datum was worked out. It must be the datum of the
// case given.
func (d Datum) Worksheet(c Case) Worksheet {
	var w Worksheet
	w.start(c, d)
	w.winds(c, d)
	w.currents(d)
	w.sum(c, d)
	w.errors(d)
	w.corridor(d)
	w.cautions(d)
	return w
}

func (w *Worksheet) step(title string, lines ...string) {
	w.Steps = append(w.Steps, Step{title, lines})
}

func (w *Worksheet) start(c Case, d Datum) {
	lines := []string{"Time of the fall " + utc(c.FellFrom)}
	if c.FellTo.After(c.FellFrom) {
		lines = []string{"The fall was between " + utc(c.FellFrom) + " and " + utc(c.FellTo) + "; middle " + utc(d.FellAt)}
	}
	place := "Place of the fall " + nav.FormatDM(c.Start.Position, 3)
	if c.Start.Corridor() {
		place = "Place of the fall: anywhere on the track of that time"
	}
	age := max(d.At.Sub(d.FellAt), 0)
	w.step("Start", append(lines, place,
		"Datum for "+utc(d.At)+", interval "+hours(age)+" h",
		"Object: "+c.Class.Object+" ("+c.Class.ID+")")...)
}

func (w *Worksheet) winds(c Case, d Datum) {
	lines := []string{"Leeway = " + fixed(c.Class.Slope*100, 2) + " % of the wind " + signed(c.Class.OffsetMs/nav.MsPerKn) +
		" kn, not below 0; divergence " + fixed(c.Class.DivergenceDeg, 0) + " degrees each side",
		"Source: " + c.Class.Source}
	if len(d.pull.winds) == 0 {
		w.step("Wind and leeway", append(lines, "No time has passed.")...)
		return
	}
	for _, s := range d.pull.winds {
		if !s.known {
			lines = append(lines, period(s)+"wind not known: leeway none, its error in step 5")
			continue
		}
		l := LeewayAt(c.Class, s.Velocity)
		lines = append(lines, period(s)+"wind from "+reciprocal(s.Velocity)+" "+fixed(s.Velocity.SpeedKn(), 1)+" kn ("+who(s)+"): leeway "+
			set(l.Downwind, 3)+" x "+hours(s.Duration())+" h = "+shift(l.Downwind.For(s.Duration())))
	}
	lines = append(lines, "Leeway straight downwind in all "+shift(d.pull.straight))
	if d.pull.left != d.pull.right {
		lines = append(lines, "Leeway to the left in all "+shift(d.pull.left), "Leeway to the right in all "+shift(d.pull.right))
	}
	w.step("Wind and leeway", lines...)
}

func (w *Worksheet) currents(d Datum) {
	var lines []string
	for _, s := range d.pull.currents {
		switch {
		case !s.known:
			lines = append(lines, period(s)+"current not known: none taken, its error in step 5")
		case s.driven:
			lines = append(lines, period(s)+"wind-driven current by the 3 % rule "+set(s.Velocity, 2)+" x "+hours(s.Duration())+" h = "+shift(s.Velocity.For(s.Duration())))
		default:
			lines = append(lines, period(s)+"current "+set(s.Velocity, 2)+" ("+who(s)+") x "+hours(s.Duration())+" h = "+shift(s.Velocity.For(s.Duration())))
		}
	}
	w.step("Current", append(lines, "Current in all "+shift(d.pull.current))...)
}

func (w *Worksheet) sum(c Case, d Datum) {
	lines := []string{"Current plus leeway, straight downwind: " + shift(d.Shift)}
	if p, ok := d.Point.Get(); ok {
		lines = append(lines, "Datum "+nav.FormatDM(p, 3))
	}
	if p, ok := d.Left.Get(); ok {
		lines = append(lines, "Left of the wind: "+shift(d.pull.current.Add(d.pull.left))+", datum "+nav.FormatDM(p, 3))
	}
	if p, ok := d.Right.Get(); ok {
		lines = append(lines, "Right of the wind: "+shift(d.pull.current.Add(d.pull.right))+", datum "+nav.FormatDM(p, 3))
	}
	if c.Start.Corridor() {
		lines = append(lines, "For a fall in the middle of the time only; step 6 has the others")
	}
	w.step("Datum", lines...)
}

func (w *Worksheet) errors(d Datum) {
	e := d.Errors
	line := func(what string, m float64) string { return what + " " + miles(m) }
	lines := []string{
		"Probable errors (each circle holds 50 %):",
		line("position of the start      X  =", e.StartM), line("time of the fall           T  =", e.TimeM),
		line("wind                       W  =", e.WindM), line("current                    C  =", e.CurrentM),
		line("leeway                     L  =", e.LeewayM),
		line("drift De = root(T2 + W2 + C2 + L2) =", e.DriftM()), line("total E = root(X2 + De2) =", d.TotalProbableErrorM),
		line("circle that holds 95 % = 2.079 E =", d.Error95M),
		"The searching vessel's own position error is not in it.",
	}
	w.step("Total probable error", lines...)
}

func (w *Worksheet) corridor(d Datum) {
	if len(d.Corridor) == 0 {
		return
	}
	var lines []string
	for i, p := range d.Corridor {
		// Every fourth, and both ends, are enough to draw it.
		if i%4 == 0 || i == len(d.Corridor)-1 {
			lines = append(lines, utc(p.FellAt)+" at "+nav.FormatDM(p.From, 2)+": now "+nav.FormatDM(p.Point, 2)+
				", moved "+miles(p.MovedM)+", E "+miles(p.ProbableErrorM))
		}
	}
	w.step("Corridor", lines...)
}

func (w *Worksheet) cautions(d Datum) {
	w.step("To be said beside it", append(append([]string(nil), d.Cautions...),
		"Advice from a model. The rescue centre commands the search.",
		"Uncertainty grows with time. Nothing here is a reason to stop searching.")...)
}

// String is the worksheet as text, a numbered step after another.
func (w Worksheet) String() string {
	var b strings.Builder
	for i, s := range w.Steps {
		b.WriteString(strconv.Itoa(i+1) + ". " + s.Title + "\n")
		for _, l := range s.Lines {
			b.WriteString("   " + l + "\n")
		}
	}
	return b.String()
}

func utc(t time.Time) string { return t.UTC().Format("2006-01-02 15:04:05Z") }

func fixed(v float64, decimals int) string {
	if math.Abs(v) < 0.5*math.Pow10(-decimals) {
		v = 0
	}
	return strconv.FormatFloat(v, 'f', decimals, 64)
}

func signed(kn float64) string {
	if kn < 0 {
		return "- " + fixed(-kn, 2)
	}
	return "+ " + fixed(kn, 2)
}

func hours(d time.Duration) string { return fixed(d.Hours(), 3) }

func miles(m float64) string {
	return fixed(m/nav.MetresPerNM, 3) + " NM (" + fixed(m, 0) + " m)"
}

// set is a velocity by where it goes.
func set(v nav.Velocity, decimals int) string {
	dir, ok := v.Direction().Get()
	if !ok {
		return "none"
	}
	return "towards " + tenth(dir) + " " + fixed(v.SpeedKn(), decimals) + " kn"
}

func reciprocal(v nav.Velocity) string {
	dir, ok := v.Direction().Get()
	if !ok {
		return "nowhere"
	}
	return tenth(dir.Reciprocal())
}

// tenth is a direction with a tenth of a degree, 360 as 0.
func tenth(d nav.TrueDeg) string {
	s := fixed(nav.NormDeg(math.Round(float64(d)*10)/10), 1)
	return strings.Repeat("0", 5-len(s)) + s
}

func shift(o nav.Offset) string {
	dir, ok := o.Direction().Get()
	if !ok || o.RangeM() < 0.5 {
		return "none"
	}
	return "towards " + tenth(dir) + " " + miles(o.RangeM())
}

func period(s stretch) string {
	return s.From.UTC().Format("15:04:05") + " to " + s.To.UTC().Format("15:04:05") + ": "
}

// who is who or what said it.
func who(s stretch) string {
	text := string(s.Sample.Source)
	if s.Sample.Name != "" {
		text += ", " + s.Sample.Name
	}
	if s.Sample.Source != weather.Tables && s.Sample.Source != weather.Forecast {
		text += ", " + s.Sample.From.UTC().Format("15:04")
	}
	return text
}
