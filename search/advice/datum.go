package advice

import (
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
	"wakeback/search/incident"
)

// drifted is what is known of where one person is.
type drifted struct {
	datum    nav.Opt[Datum] // a point; absent for a stretch of track
	corridor []CorridorPoint
	note     string // why there is none
}

// CorridorPoint is where someone is now who fell at one moment of the window.
type CorridorPoint struct {
	FellAt   time.Time    `json:"fell_at"`
	From     nav.Position `json:"from"` // where the vessel was then
	Position nav.Position `json:"position"`
	MovedM   float64      `json:"moved_m"`
	// ErrorM is the radius that holds the person in 95 of 100 cases, if they
	// fell then.
	ErrorM float64 `json:"error_m"`
}

// driftedOf is where to look now for one person.
func driftedOf(in Input, p incident.PersonState) drifted {
	c, basis, ok := CaseOf(in.State, p)
	if !ok {
		return drifted{}
	}
	d, err := drift.DatumAt(c, fellAfter(c.FellFrom, in.Now))
	if err != nil {
		return drifted{note: err.Error()}
	}
	if point, ok := d.Point.Get(); ok {
		return drifted{datum: nav.Some(datumOn(d, point, in.State, p, basis))}
	}
	out := drifted{}
	for _, at := range d.Corridor {
		out.corridor = append(out.corridor, CorridorPoint{
			FellAt: at.FellAt, From: at.From, Position: at.Point, MovedM: at.MovedM,
			ErrorM: at.ProbableErrorM / drift.Radius50 * drift.Radius95,
		})
	}
	return out
}

func datumOn(d drift.Datum, point nav.Position, s incident.State, p incident.PersonState, basis string) Datum {
	out := Datum{
		Position: point, ErrorM: d.Cover95M, AgeS: max(d.At.Sub(d.FellAt).Seconds(), 0),
		ProbableErrorM: d.TotalProbableErrorM,
		MovedM:         d.Shift.RangeM(), MovedTowards: d.Shift.Direction(),
		DriftKn: d.Drift.SpeedKn(), DriftTowards: d.Drift.Direction(),
		Left: d.Left, Right: d.Right, Object: classOf(p).ID, Basis: basis,
		beyondTrials: d.Leeway.Range == drift.RangeAbove,
	}
	if w, ok := d.Wind.Get(); ok && len(s.Winds) > 0 {
		out.WindFromDeg = reciprocal(w.Velocity.Direction())
		if !out.WindFromDeg.IsSet() {
			out.WindFromDeg = nav.Some(nav.TrueDeg(0)) // calm: from nowhere, but known
		}
		out.WindKn, out.WindAt, out.WindBy = nav.Some(w.Velocity.SpeedKn()), nav.Some(saidAt(w.Sample)), string(w.Sample.Source)
	}
	if v, ok := d.Current.Get(); ok && len(s.Currents) > 0 {
		out.CurrentSetDeg = nav.Some(v.Velocity.Direction().Or(0))
		out.CurrentDriftKn, out.CurrentAt, out.CurrentBy = nav.Some(v.Velocity.SpeedKn()), nav.Some(saidAt(v.Sample)), string(v.Sample.Source)
	}
	return out
}

// saidAt is when an observation was made, for its age on a screen.
func saidAt(s weather.Sample) time.Time {
	if s.Said.After(s.From) && !s.Source.Guide() {
		return s.From
	}
	return s.Said
}

func reciprocal(d nav.Opt[nav.TrueDeg]) nav.Opt[nav.TrueDeg] {
	t, ok := d.Get()
	if !ok {
		return d
	}
	return nav.Some(t.Reciprocal())
}
