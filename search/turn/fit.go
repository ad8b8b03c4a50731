package turn

import (
	"errors"
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// ErrFit is wrapped when no model can be fitted.
var ErrFit = errors.New("no turning model can be fitted")

// Fit is a fitted model and how good it is.
type Fit struct {
	Model Model `json:"model"`
	// RmsM is the root mean square distance of the track, or of the figures
	// that are lengths, from the model.
	RmsM float64 `json:"rms_m"`
	// RadiusErrorM and LagErrorS are standard errors (one sigma). They take the
	// errors of fixes as independent; those of a receiver hang together over
	// minutes, so they are a floor.
	RadiusErrorM float64 `json:"radius_error_m"`
	LagErrorS    float64 `json:"lag_error_s"`
	// Drift is the motion of the water, from a track; nil from figures.
	Drift nav.Velocity `json:"-"`
	// TurnedDeg is how far the track goes round.
	TurnedDeg float64 `json:"turned_deg"`
}

// Quality is a word on a fit for a crew.
type Quality string

// The qualities. Bounds are our choice: a radius known to a tenth puts the
// shift of a Williamson turn right to a tenth of the turning diameter, which
// is what is asked of it.
const (
	Good  Quality = "good"
	Fair  Quality = "fair" // steer the circle again when there is time
	Poor  Quality = "poor" // do not use it
	goodR         = 0.05
	fairR         = 0.15
)

// Quality judges by the error of the radius and the distance of the track from
// the model, both against the radius.
func (f Fit) Quality() Quality {
	worst := math.Max(2*f.RadiusErrorM, f.RmsM) / f.Model.RadiusM
	switch {
	case worst < 2*goodR:
		return Good
	case worst < 2*fairR:
		return Fair
	}
	return Poor
}

// The parameters of a fit are the logarithms of radius, lag, speed lag and of
// the ratio of the speed lost, the pivot in radii, and the tightness of entry.
const (
	pRadius = iota
	pLag
	pSpeedLag
	pLost
	pPivot
	pEntry
	pShape // how many
)

func shapeOf(m Model) []float64 {
	lost := math.Max(0.02, 1-m.SpeedRatio)
	return []float64{math.Log(m.RadiusM), math.Log(m.LagS), math.Log(m.SpeedLagS), math.Log(lost / (1 - lost)), m.PivotM / m.RadiusM, m.TightEntry}
}

func (m Model) shaped(x []float64) Model {
	m.RadiusM, m.LagS, m.SpeedLagS = math.Exp(x[pRadius]), math.Exp(x[pLag]), math.Exp(x[pSpeedLag])
	m.SpeedRatio = 1 / (1 + math.Exp(x[pLost]))
	m.PivotM = x[pPivot] * m.RadiusM
	m.TightEntry = x[pEntry]
	return m
}

// priors hold what a circle tells little of: radius and speed lost lie within
// a factor of three of their start; the lags, in radii run, within a factor of
// 1.8, which holds the four vessels and the ship that the model is tested
// with; the pivot within 0.15 of the radius, the tightness of the entry within
// a half. One sigma; our choice.
func priors(x, start []float64) []float64 {
	var r []float64
	for i, sigma := range []float64{1.1, 0.6, 0.6, 1.1, 0.15, 0.5} {
		r = append(r, (x[i]-start[i])/sigma)
	}
	return r
}

// FitFigures fits a model to the figures of a trial. The start gives the
// speed, the rudder and the delay, which stay.
func FitFigures(start Model, f Figures) (Fit, error) {
	if err := start.Validate(); err != nil {
		return Fit{}, err
	}
	if !f.SteadyRadiusM.IsSet() && !f.TacticalM.IsSet() && !f.AdvanceM.IsSet() {
		return Fit{}, fmt.Errorf("%w: expected a steady radius, a tactical diameter or an advance", ErrFit)
	}
	for _, pair := range f.pairs(Figures{}) {
		if !(pair.want > 0 && pair.want < 1e5) {
			return Fit{}, fmt.Errorf("%w: %s %g, expected above 0", ErrFit, pair.name, pair.want)
		}
	}
	x0 := shapeOf(start)
	misfit := func(x []float64) []float64 {
		got, err := start.shaped(x).Figures()
		if err != nil {
			return []float64{math.NaN()}
		}
		r := priors(x, x0)
		for _, p := range f.pairs(got) {
			r = append(r, (p.got-p.want)/(figurePart*p.want))
		}
		return r
	}
	s := leastSquares(fixedLength(misfit, x0), x0, []float64{1e-3, 1e-3, 1e-3, 1e-3, 1e-3, 1e-3})
	m := start.shaped(s.x)
	got, err := m.Figures()
	if err != nil {
		return Fit{}, fmt.Errorf("%w: %w", ErrFit, err)
	}
	fit := Fit{Model: m, RmsM: f.rmsM(got), TurnedDeg: 360}
	fit.errors(s, 1)
	return fit, nil
}

// figurePart is the error of a figure on a poster; our choice.
const figurePart = 0.02

// fixedLength gives a failed evaluation as many residuals as any other.
func fixedLength(f residuals, x0 []float64) residuals {
	n := len(f(x0))
	return func(x []float64) []float64 {
		r := f(x)
		for len(r) < n {
			r = append(r, math.NaN())
		}
		return r
	}
}

// errors turns the covariance into errors of radius and lag.
func (f *Fit) errors(s solution, variance float64) {
	f.RadiusErrorM, f.LagErrorS = math.Inf(1), math.Inf(1)
	if s.cov == nil {
		return
	}
	f.RadiusErrorM = f.Model.RadiusM * math.Sqrt(s.cov[pRadius][pRadius]*variance)
	f.LagErrorS = f.Model.LagS * math.Sqrt(s.cov[pLag][pLag]*variance)
}

type pair struct {
	name      string
	got, want float64
	length    bool
}

// pairs are the figures given, beside those of another.
func (f Figures) pairs(g Figures) []pair {
	var out []pair
	add := func(name string, want, got nav.Opt[float64], length bool) {
		if w, ok := want.Get(); ok {
			out = append(out, pair{name, got.Or(0), w, length})
		}
	}
	add("advance_m", f.AdvanceM, g.AdvanceM, true)
	add("transfer_m", f.TransferM, g.TransferM, true)
	add("tactical_diameter_m", f.TacticalM, g.TacticalM, true)
	add("steady_radius_m", f.SteadyRadiusM, g.SteadyRadiusM, true)
	add("t90_s", f.T90S, g.T90S, false)
	add("t180_s", f.T180S, g.T180S, false)
	add("t360_s", f.T360S, g.T360S, false)
	add("steady_speed_ms", f.SteadyMs, g.SteadyMs, false)
	return out
}

func (f Figures) rmsM(g Figures) float64 {
	sum, n := 0.0, 0
	for _, p := range f.pairs(g) {
		if p.length {
			sum += (p.got - p.want) * (p.got - p.want)
			n++
		}
	}
	return math.Sqrt(sum / math.Max(1, float64(n)))
}
