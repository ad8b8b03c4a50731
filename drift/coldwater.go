package drift

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Flotation is what is known of what keeps a person afloat and warm.
type Flotation string

// The answers; not known is one of them.
const (
	FlotationUnknown Flotation = "unknown"
	FlotationNone    Flotation = "none"
	FlotationWorn    Flotation = "worn"
	SuitWorn         Flotation = "suit" // an insulated suit, which floats
)

// Band is a range of times. An absent end is open: no table puts a figure to
// it.
type Band struct{ Low, High nav.Opt[time.Duration] }

// Figure is what one table says.
type Figure struct {
	What   string // "movement", "consciousness", "survival", "half" (half survive)
	Band   Band
	Source string
}

// WaterState says whether the tables reach a temperature.
type WaterState string

// The states.
const (
	WaterInTables WaterState = "in the tables"
	WaterTooCold  WaterState = "colder than sea water can be: check the thermometer; the tables have no figure"
	WaterTooWarm  WaterState = "warmer than the tables go: check the thermometer; they have no figure"
	WaterUnknown  WaterState = "temperature not known: no figure"
)

// Limits of water temperatures, °C. Sea water of 35 in 1000 salt freezes at -1.9
// (common practice), with half a degree for the thermometer; no open sea is
// warmer than 35 (from memory).
const (
	coldestC = -2.4
	warmestC = 35
)

// ColdWater is what published tables say of people in water of a temperature.
// It is for planning the recovery: what the person can do for it, and what they
// will need. It is never a reason to stop or to slow a search, and no clock to
// count down.
type ColdWater struct {
	TempC float64
	State WaterState
	// Movement is how long hands and legs are of use; Consciousness and Survival
	// go from the lowest to the highest of all tables. Each is absent where no
	// table has it.
	Movement, Consciousness, Survival nav.Opt[Band]
	Figures                           []Figure
	// Texts are to be shown with the figures, in order.
	Texts []string
}

// The texts. They always go with a figure, and without one too.
const (
	keepSearching = "Keep searching. Ask the rescue centre. People have lived far beyond the tables: two in 10 °C water about seven times the chart time (US Coast Guard, On Scene 2-77)."
	tablesVary    = "Tables differ by a factor of three and more, and people by more. The figures are for planning the recovery only."
	firstMinutes  = "The first minutes count: without flotation people drown in them in any water. Get a line or flotation to them."
	aliveUntil    = "Treat anyone recovered as alive, keep them flat, and get medical advice: some collapse when lifted, or hours later (Transport Canada TP 13822)."
)

// ColdWaterAt is what the tables say of water of tempC. A temperature that is
// not a number is one that is not known. The error can only come from a row
// filled in wrongly.
func ColdWaterAt(tempC float64, f Flotation) (ColdWater, error) {
	w := ColdWater{TempC: tempC, State: WaterInTables, Texts: []string{keepSearching, firstMinutes, tablesVary, aliveUntil}}
	switch {
	case math.IsNaN(tempC):
		w.State = WaterUnknown
	case tempC < coldestC:
		w.State = WaterTooCold
	case tempC > warmestC:
		w.State = WaterTooWarm
	}
	rows, err := coldRows()
	if err != nil {
		return ColdWater{}, fmt.Errorf("cold water: %w", err)
	}
	if w.State != WaterInTables {
		return w, nil
	}
	w.Figures = append(figuresOf(rows, tempC, f), haywardFigure(tempC, f)...)
	w.Movement = spanned(w.Figures, "movement")
	w.Consciousness = spanned(w.Figures, "consciousness")
	w.Survival = spanned(w.Figures, "survival", "half")
	return w, nil
}

// spanned is from the lowest to the highest of the figures of some kinds.
func spanned(figures []Figure, kinds ...string) nav.Opt[Band] {
	low, high, open, found := time.Duration(math.MaxInt64), time.Duration(0), false, false
	for _, f := range figures {
		if f.What != kinds[0] && f.What != kinds[len(kinds)-1] {
			continue
		}
		found = true
		lo, bounded := f.Band.Low.Get()
		hi, ends := f.Band.High.Get()
		if bounded {
			low = min(low, lo)
		}
		if ends {
			high = max(high, hi)
		}
		open = open || !ends
	}
	if !found {
		return nav.None[Band]()
	}
	var b Band
	if low != math.MaxInt64 {
		b.Low = nav.Some(low)
	}
	if !open {
		b.High = nav.Some(high)
	}
	return nav.Some(b)
}

// Hayward is the time to deep cooling after Hayward, Eckerson and Collis (1975;
// formula seen second-hand): t = 15 + 7.2/(0.0785 - 0.0034 T) minutes, for an
// average adult in light clothes and a jacket, keeping still. It is absent below
// -2.4 and above 20 °C (our choice of where to stop: the formula has a pole at
// 23.09). It knows nothing of drowning.
func Hayward(tempC float64) nav.Opt[time.Duration] {
	if !(tempC >= coldestC && tempC <= 20) {
		return nav.None[time.Duration]()
	}
	minutes := 15 + 7.2/(0.0785-0.0034*tempC)
	return nav.Some(time.Duration(minutes * float64(time.Minute)))
}

func haywardFigure(tempC float64, f Flotation) []Figure {
	d, ok := Hayward(tempC).Get()
	if !ok || f == FlotationNone {
		return nil
	}
	return []Figure{{"survival", Band{nav.Some(d), nav.Some(d)}, "Deep cooling, in light clothes and a jacket, keeping still: Hayward, Eckerson and Collis 1975 (formula seen second-hand)"}}
}
