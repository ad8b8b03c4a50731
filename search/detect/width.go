package detect

import (
	"errors"
	"fmt"
	"math"
)

// PersonInWater is the object of every table that this program exists for.
const PersonInWater = "person in water"

// Conditions are what a sweep width depends on.
type Conditions struct {
	Object       string
	VisibilityNM float64
	WindKn       float64
	SeaM         float64 // height of the sea, metres
	Tired        bool    // the crew is excessively tired
	Night        bool
}

// Width is a corrected sweep width and how it was made.
type Width struct {
	NM          float64
	Uncorrected float64
	Weather     float64
	Fatigue     float64
	Table       string
	Source      string
	Notes       []string // what a reader has to know about this figure
}

// ErrNight: the published tables are for daylight.
var ErrNight = errors.New("no published sweep width for the night: measure it on board, or space the legs by what the searchlight shows")

// Corrected is the sweep width for the conditions: table value x weather x
// fatigue. Speed has no factor for surface craft (the table for it is entered
// by aircraft type only: JP 3-50 vol. I, appendix D).
func (t Table) Corrected(c Conditions) (Width, error) {
	if c.Night {
		return Width{}, ErrNight
	}
	for name, v := range map[string]float64{"wind": c.WindKn, "sea": c.SeaM} {
		if math.IsNaN(v) || v < 0 {
			return Width{}, fmt.Errorf("%s: expected a figure from 0", name)
		}
	}
	base, err := t.Uncorrected(c.Object, c.VisibilityNM)
	if err != nil {
		return Width{}, err
	}
	w := Width{Uncorrected: base, Weather: weatherFactor(c), Fatigue: 1, Table: t.Name, Source: t.Source}
	if c.Tired {
		// JP 3-50 vol. I, appendix D, paragraph C; a normally tired crew is in the tables.
		w.Fatigue = 0.9
	}
	w.NM = w.Uncorrected * w.Weather * w.Fatigue
	if c.VisibilityNM > t.visNM[len(t.visNM)-1] {
		w.Notes = append(w.Notes, fmt.Sprintf("visibility beyond the table counts as %g nm", t.visNM[len(t.visNM)-1]))
	}
	return w, nil
}

// Limits of the weather columns: JP 3-50 vol. I, table D-1: wind over 15 kn or
// seas of 2 to 3 feet; wind over 25 kn or seas over 4 feet. Seas of 3 to 4
// feet, which the table leaves open, count as the first column. The worse of
// wind and sea decides (same place).
const (
	freshWindKn  = 15
	freshSeaM    = 2 * 0.3048
	strongWindKn = 25
	strongSeaM   = 4 * 0.3048
)

// small are the objects with the heavy factors: a person in the water and
// boats under 30 feet (JP 3-50 table D-1), and rafts (training slides of the
// US Coast Guard Auxiliary, SAR chapter 4; JP 3-50 does not name them: the
// more careful of the two is taken).
func small(object string) bool {
	switch object {
	case PersonInWater, "power boat under 15 ft", "power boat 15-25 ft", "sail boat 15 ft", "sail boat 20 ft",
		"sail boat 25 ft", "boat under 5 m (17 ft)", "boat 7 m (23 ft)":
		return true
	}
	return len(object) > 4 && object[:4] == "raft" || len(object) > 8 && object[:8] == "liferaft"
}

func weatherFactor(c Conditions) float64 {
	strong := c.WindKn > strongWindKn || c.SeaM > strongSeaM
	fresh := c.WindKn > freshWindKn || c.SeaM >= freshSeaM
	switch {
	case !strong && !fresh:
		return 1
	case !small(c.Object):
		return 0.9
	case strong:
		return 0.25
	}
	return 0.5
}

// CoastalSpacingNM is the spacing of a first search for a person in the water
// near the coast, in any weather (training slides of the US Coast Guard
// Auxiliary, SAR chapter 4).
const CoastalSpacingNM = 0.1

// UsablePart of the time on scene is left for searching; the rest goes into
// looking at what turns out to be something else (JP 3-50 vol. I, section 532).
const UsablePart = 0.85
