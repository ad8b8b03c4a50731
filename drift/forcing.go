package drift

import (
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// unknownWindSDMs is the standard deviation of each component of a wind nobody
// knows anything of. Our choice: a mean wind of 12 kn from anywhere.
const unknownWindSDMs = 5

// stretch is a time in which something pushed evenly.
type stretch struct {
	weather.Piece
	known  bool
	driven bool // the wind-driven current
}

// windStretches are the winds of a time; one unknown one when none is known.
func (c Case) windStretches(from, to time.Time) []stretch {
	if c.Winds.Len() == 0 {
		return unknown(from, to, unknownWindSDMs)
	}
	return known(c.Winds.Pieces(from, to), false)
}

// currentStretches are the currents of a time, the wind-driven one included
// where it is asked for and belongs.
func (c Case) currentStretches(from, to time.Time) []stretch {
	if c.Currents.Len() > 0 {
		pieces := known(c.Currents.Pieces(from, to), false)
		for _, p := range pieces {
			if p.Sample.Source == weather.Tables {
				pieces = append(pieces, c.drivenStretches(p.From, p.To, false)...)
			}
		}
		return pieces
	}
	if driven := c.drivenStretches(from, to, true); len(driven) > 0 {
		return driven
	}
	return unknown(from, to, weather.ModelCurrentSDMs)
}

// drivenStretches are the wind-driven currents of a time. Where they stand
// alone they carry the error of a current nobody observed; on top of a table,
// only their own.
func (c Case) drivenStretches(from, to time.Time, alone bool) []stretch {
	if !c.WindDriven {
		return nil
	}
	pieces := known(c.Winds.Pieces(from, to), true)
	lat := c.plane().Origin().LatDeg()
	for i, p := range pieces {
		v, sd := weather.WindDriven(p.Velocity, lat)
		if !alone {
			sd = ownSD(sd)
		}
		pieces[i].Velocity, pieces[i].SDMs = v, sd
	}
	return pieces
}

func known(pieces []weather.Piece, driven bool) []stretch {
	out := make([]stretch, len(pieces))
	for i, p := range pieces {
		out[i] = stretch{Piece: p, known: true, driven: driven}
	}
	return out
}

func unknown(from, to time.Time, sdMs float64) []stretch {
	if !to.After(from) {
		return nil
	}
	return []stretch{{Piece: weather.Piece{From: from, To: to, Value: weather.Value{SDMs: sdMs}}}}
}

// forcing is wind and current at one moment.
type forcing struct {
	wind, current     nav.Velocity
	windSD, currentSD float64 // of each component, m/s
}

// forcingAt is the forcing at a moment, by the same rules as the stretches.
func (c Case) forcingAt(at time.Time) forcing {
	return c.forcingOf(c.Winds.At(at), c.Currents.At(at), c.plane().Origin().LatDeg())
}

// forcingOver is the mean forcing of a time of minutes at a latitude.
func (c Case) forcingOver(from, to time.Time, latDeg float64) forcing {
	return c.forcingOf(over(c.Winds, from, to), over(c.Currents, from, to), latDeg)
}

// over is the value in the middle of a time, with the mean velocity where one
// sample takes over from another in between.
func over(h weather.History, from, to time.Time) nav.Opt[weather.Value] {
	v, ok := h.At(from.Add(to.Sub(from) / 2)).Get()
	if !ok {
		return nav.None[weather.Value]()
	}
	a, b := h.At(from).Or(v), h.At(to).Or(v)
	if v.Between || !a.Sample.From.Equal(b.Sample.From) || a.Velocity != b.Velocity {
		v.Velocity = h.Mean(from, to).Or(weather.Average{Velocity: v.Velocity}).Velocity
	}
	return nav.Some(v)
}

func (c Case) forcingOf(windNow, currentNow nav.Opt[weather.Value], latDeg float64) forcing {
	f := forcing{windSD: unknownWindSDMs, currentSD: weather.ModelCurrentSDMs}
	wind, windKnown := windNow.Get()
	if windKnown {
		f.wind, f.windSD = wind.Velocity, wind.SDMs
	}
	current, currentKnown := currentNow.Get()
	if currentKnown {
		f.current, f.currentSD = current.Velocity, current.SDMs
	}
	if !c.WindDriven || !windKnown || currentKnown && current.Sample.Source != weather.Tables {
		return f
	}
	v, sd := weather.WindDriven(wind.Velocity, latDeg)
	f.current = f.current.Add(v)
	if currentKnown {
		sd = math.Hypot(f.currentSD, ownSD(sd))
	}
	f.currentSD = sd
	return f
}

// ownSD is what the rule for the wind-driven current is in doubt by, without
// the doubt about a current nobody observed.
func ownSD(sd float64) float64 {
	return math.Sqrt(math.Max(sd*sd-weather.ModelCurrentSDMs*weather.ModelCurrentSDMs, 0))
}
