package turn

import (
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// Figures is a hard-over turn as a trial or a wheelhouse poster states it. All
// count from the helm order. Advance, transfer and tactical diameter are those
// of IMO MSC.137(76): along the old course at 90 degrees of change, across it
// at 90, across it at 180.
type Figures struct {
	AdvanceM      nav.Opt[float64] `json:"advance_m"`
	TransferM     nav.Opt[float64] `json:"transfer_m"`
	TacticalM     nav.Opt[float64] `json:"tactical_diameter_m"`
	SteadyRadiusM nav.Opt[float64] `json:"steady_radius_m"`
	T90S          nav.Opt[float64] `json:"t90_s"`
	T180S         nav.Opt[float64] `json:"t180_s"`
	T360S         nav.Opt[float64] `json:"t360_s"`
	SteadyMs      nav.Opt[float64] `json:"steady_speed_ms"`
}

// Figures runs a hard-over circle of the model.
func (m Model) Figures() (Figures, error) {
	if err := m.Validate(); err != nil {
		return Figures{}, err
	}
	var f Figures
	dt := m.trialStep()
	s, t := m.start(0), 0.0
	for ; s.HeadingDeg < 360 && t < maxTurnS; t += dt {
		was := s
		s = m.step(s, m.delayed(t), dt)
		at := func(deg float64) (State, float64, bool) {
			if was.HeadingDeg >= deg || s.HeadingDeg < deg {
				return s, 0, false
			}
			part := (deg - was.HeadingDeg) / (s.HeadingDeg - was.HeadingDeg)
			return mix(was, s, part), t + part*dt, true
		}
		if c, when, ok := at(90); ok {
			f.AdvanceM, f.TransferM, f.T90S = nav.Some(c.NorthM), nav.Some(c.EastM), nav.Some(when)
		}
		if c, when, ok := at(180); ok {
			f.TacticalM, f.T180S = nav.Some(c.EastM), nav.Some(when)
		}
		if _, when, ok := at(360); ok {
			f.T360S = nav.Some(when)
		}
	}
	if !f.T360S.IsSet() {
		return Figures{}, fmt.Errorf("%w: she does not come round within an hour", ErrModel)
	}
	f.SteadyRadiusM, f.SteadyMs = nav.Some(m.RadiusM), nav.Some(m.SpeedMs*m.SpeedRatio)
	return f, nil
}

// trialStep is a step that turns her by a degree and a half and resolves her
// lags to a fifth: half a per cent of a circle, for many runs in a fit.
func (m Model) trialStep() float64 {
	dt := math.Min(m.RadiusM/m.SpeedMs/40, math.Min(m.LagS, m.SpeedLagS)/5)
	return math.Max(0.02, math.Min(1, dt))
}

// delayed is the helm hard to starboard, ordered at zero.
func (m Model) delayed(t float64) Helm {
	if t < m.OrderDelayS {
		return 0
	}
	return 1
}

// mix is the state a part of the way from one to another.
func mix(a, b State, part float64) State {
	f := func(x, y float64) float64 { return x + part*(y-x) }
	return State{
		EastM: f(a.EastM, b.EastM), NorthM: f(a.NorthM, b.NorthM), HeadingDeg: f(a.HeadingDeg, b.HeadingDeg),
		RateDegS: f(a.RateDegS, b.RateDegS), RudderDeg: f(a.RudderDeg, b.RudderDeg), SpeedMs: f(a.SpeedMs, b.SpeedMs), RunM: f(a.RunM, b.RunM),
	}
}
