package turn

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"wakeback/drift/nav"
)

// Model is how the vessel turns at a speed, from her circles: between two
// speeds the radius and lag lie between theirs, beyond them it is that of the
// nearer. What the profile lacks is filled in.
func (p Profile) Model(speedKn float64) (Model, error) {
	full, err := p.Complete()
	if err != nil {
		return Model{}, err
	}
	if !(speedKn >= 0.5 && speedKn <= 100) {
		return Model{}, fmt.Errorf("%w: speed %g kn, expected 0.5 to 100", ErrProfile, speedKn)
	}
	var ms []Model
	for i, c := range full.Circles {
		m, err := full.circleModel(c)
		if err != nil {
			return Model{}, fmt.Errorf("circles[%d]: %w", i, err)
		}
		ms = append(ms, m)
	}
	slices.SortFunc(ms, func(a, b Model) int { return cmp.Compare(a.SpeedMs, b.SpeedMs) })
	return between(ms, speedKn*nav.MsPerKn), nil
}

// circleModel is the model from one circle.
func (p Profile) circleModel(c Circle) (Model, error) {
	if m, ok := c.MeasuredModel.Get(); ok {
		return m, m.Validate()
	}
	d, known := c.DiameterM.Get()
	radius := d / 2
	if !known {
		radius = c.AdvanceM.Or(0) * 0.75 // a start for the fit; advance is R and the lag's way
	}
	m := FromRadius(c.SpeedKn, radius)
	m.RudderRate = m.RudderDeg / p.HardOverS.Or(3)
	m.OrderDelayS = p.OrderDelayS.Or(1)
	if !c.AdvanceM.IsSet() {
		return m, m.Validate()
	}
	f, err := FitFigures(m, Figures{
		AdvanceM: c.AdvanceM, TransferM: c.TransferM, SteadyRadiusM: half(c.DiameterM),
	})
	return f.Model, err
}

func half(v nav.Opt[float64]) nav.Opt[float64] {
	d, ok := v.Get()
	if !ok {
		return v
	}
	return nav.Some(d / 2)
}

// between scales the model nearest in speed, or lies between two. The lag goes
// with length over speed (Nomoto: T in proportion to L/U), so that the way run
// in it stays.
func between(ms []Model, u float64) Model {
	low, high := ms[0], ms[len(ms)-1]
	f := 0.0
	if high.SpeedMs > low.SpeedMs {
		f = math.Max(0, math.Min(1, (u-low.SpeedMs)/(high.SpeedMs-low.SpeedMs)))
	}
	mix := func(a, b float64) float64 { return a + f*(b-a) }
	m := low
	m.SpeedMs = u
	m.RadiusM = mix(low.RadiusM, high.RadiusM)
	m.LagS = math.Max(0.05, mix(low.LagS*low.SpeedMs, high.LagS*high.SpeedMs)/u)
	m.SpeedLagS = math.Max(0.05, mix(low.SpeedLagS*low.SpeedMs, high.SpeedLagS*high.SpeedMs)/u)
	m.SpeedRatio = mix(low.SpeedRatio, high.SpeedRatio)
	m.PivotM = mix(low.PivotM, high.PivotM)
	return m
}
