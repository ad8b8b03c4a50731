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
			sd = math.Sqrt(math.Max(sd*sd-weather.ModelCurrentSDMs*weather.ModelCurrentSDMs, 0))
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
	f := forcing{windSD: unknownWindSDMs, currentSD: weather.ModelCurrentSDMs}
	wind, windKnown := c.Winds.At(at).Get()
	if windKnown {
		f.wind, f.windSD = wind.Velocity, wind.SDMs
	}
	current, currentKnown := c.Currents.At(at).Get()
	if currentKnown {
		f.current, f.currentSD = current.Velocity, current.SDMs
	}
	if c.WindDriven && windKnown && (!currentKnown || current.Sample.Source == weather.Tables) {
		v, sd := weather.WindDriven(wind.Velocity, c.plane().Origin().LatDeg())
		if currentKnown {
			sd = math.Sqrt(math.Max(sd*sd-weather.ModelCurrentSDMs*weather.ModelCurrentSDMs, 0))
			f.currentSD = math.Hypot(f.currentSD, sd)
		} else {
			f.currentSD = sd
		}
		f.current = f.current.Add(v)
	}
	return f
}
