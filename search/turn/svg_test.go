package turn

import (
	"encoding/xml"
	"errors"
	"io"
	"strings"
	"testing"
	"time"

	"wakeback/drift/nav"
)

func wellFormed(t *testing.T, text string) map[string]int {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(text))
	seen := map[string]int{}
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return seen
		}
		if err != nil {
			t.Fatalf("%v in %s", err, text)
		}
		if s, ok := token.(xml.StartElement); ok {
			seen[s.Name.Local]++
		}
	}
}

func TestSVG(t *testing.T) {
	c := Case{Model: yacht(t), Heading: 30, Side: Port, Delay: 20 * time.Second}
	for _, n := range []Name{Single, Williamson, RaceTrack, SlowCircle} {
		r, err := Plan(n, c)
		if err != nil {
			t.Fatal(err)
		}
		for _, current := range []nav.Opt[nav.Velocity]{nav.None[nav.Velocity](), nav.Some(nav.Towards(90, 2))} {
			text := r.SVG(c, current)
			seen := wellFormed(t, text)
			// A dot for each order, for the fall and for the person.
			if seen["svg"] != 1 || seen["polyline"] != 2 || seen["circle"] != len(r.Orders)+2 {
				t.Errorf("%s: %v", n, seen)
			}
			if strings.Contains(text, "NaN") || strings.Contains(text, "Inf") {
				t.Errorf("%s: %s", n, text)
			}
			if strings.Contains(text, "over the ground") != current.IsSet() {
				t.Errorf("%s: does not say what it is drawn in", n)
			}
		}
	}
}

// Two knots to the east carry vessel and person 1.0289 m a second; their range
// is the same in both frames.
func TestGroundPath(t *testing.T) {
	c := Case{Model: yacht(t), Heading: 0, Side: Starboard, Delay: time.Minute, PersonDrift: nav.Towards(0, 0.4)}
	r, err := Plan(Williamson, c)
	if err != nil {
		t.Fatal(err)
	}
	current := nav.Towards(90, 2)
	ground := r.GroundPath(current, c.Delay)
	for i, p := range ground {
		s := 60 + p.TS
		near(t, "carried east", p.Offset.EastM-r.Path[i].Offset.EastM, 2*1852.0/3600*s, 1e-6)
		inWater := c.PersonAt(p.TS, nav.Velocity{}).Sub(r.Path[i].Offset).RangeM()
		near(t, "range", c.PersonAt(p.TS, current).Sub(p.Offset).RangeM(), inWater, 1e-6)
	}
	if &ground[0] == &r.Path[0] {
		t.Error("the path shares its points with the result")
	}
}
