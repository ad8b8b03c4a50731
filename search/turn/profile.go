package turn

import (
	"errors"
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// Kind is what a vessel is, as far as her turning is concerned.
type Kind string

// The kinds.
const (
	DisplacementMotor Kind = "displacement_motor"
	PlaningMotor      Kind = "planing_motor"
	Sail              Kind = "sail"
)

// Circle is a turn with the helm hard over from a steady speed, as far as it
// is known: the steady turning diameter, or advance and transfer, or both.
// IMO MSC.137(76) defines advance as the way made along the old course when
// the heading has changed by 90 degrees, transfer as the way across it.
type Circle struct {
	SpeedKn   float64          `json:"speed_kn"`
	DiameterM nav.Opt[float64] `json:"diameter_m,omitzero"`
	AdvanceM  nav.Opt[float64] `json:"advance_m,omitzero"`
	TransferM nav.Opt[float64] `json:"transfer_m,omitzero"`
	// MeasuredModel is the model fitted to this circle from a track; it goes
	// before the figures.
	MeasuredModel nav.Opt[Model] `json:"measured_model,omitzero"`
}

// Profile is what a crew knows of their vessel. Only kind and length are
// required; what is absent is filled in by [Profile.Complete].
type Profile struct {
	Kind        Kind             `json:"kind"`
	LengthM     float64          `json:"length_m"` // over all
	CruisingKn  nav.Opt[float64] `json:"cruising_kn"`
	SearchKn    nav.Opt[float64] `json:"search_kn"`
	Circles     []Circle         `json:"circles,omitempty"`    // at one or two speeds
	StoppingM   nav.Opt[float64] `json:"stopping_m"`           // from cruising speed, with the engine astern
	HardOverS   nav.Opt[float64] `json:"hard_over_s"`          // helm from midships to hard over
	OrderDelayS nav.Opt[float64] `json:"order_delay_s"`        // from the word to the wheel
	Rig         string           `json:"rig,omitempty"`        // for a vessel with sails: sloop, ketch, ...
	UnderSail   bool             `json:"under_sail,omitempty"` // now
	EyeM        nav.Opt[float64] `json:"eye_height_m"`         // of the lookout, above the water
	FreeboardM  nav.Opt[float64] `json:"freeboard_m"`          // where a person is taken aboard
	// Assumed names the fields that were filled in and not given.
	Assumed []string `json:"assumed,omitempty"`
}

// ErrProfile is wrapped when a profile holds what no vessel can have.
var ErrProfile = errors.New("not a vessel's profile")

// Validate checks what is given. The bounds only keep out slips of the
// keyboard: see [Profile.Warnings] for what is unlikely.
func (p Profile) Validate() error {
	if p.Kind != DisplacementMotor && p.Kind != PlaningMotor && p.Kind != Sail {
		return fmt.Errorf("%w: kind %q, expected %s, %s or %s", ErrProfile, p.Kind, DisplacementMotor, PlaningMotor, Sail)
	}
	if len(p.Circles) > 2 {
		return fmt.Errorf("%w: circles at %d speeds, expected at most 2", ErrProfile, len(p.Circles))
	}
	fields := []bounded{
		{"length_m", nav.Some(p.LengthM), 2, 400},
		{"cruising_kn", p.CruisingKn, 1, 80}, {"search_kn", p.SearchKn, 0.5, 60},
		{"stopping_m", p.StoppingM, 0.5, 10000}, {"hard_over_s", p.HardOverS, 0.1, 60},
		{"order_delay_s", p.OrderDelayS, 0, 60}, {"eye_height_m", p.EyeM, 0.3, 60},
		{"freeboard_m", p.FreeboardM, 0, 30},
	}
	for i, c := range p.Circles {
		at := fmt.Sprintf("circles[%d].", i)
		fields = append(fields, bounded{at + "speed_kn", nav.Some(c.SpeedKn), 0.5, 80},
			bounded{at + "diameter_m", c.DiameterM, 2, 10000},
			bounded{at + "advance_m", c.AdvanceM, 2, 10000}, bounded{at + "transfer_m", c.TransferM, 1, 10000})
		if err := c.check(); err != nil {
			return fmt.Errorf("%w: circles[%d]: %w", ErrProfile, i, err)
		}
	}
	for _, f := range fields {
		if v, ok := f.v.Get(); ok && !(v >= f.low && v <= f.high) {
			return fmt.Errorf("%w: %s %g, expected %g to %g", ErrProfile, f.name, v, f.low, f.high)
		}
	}
	return nil
}

type bounded struct {
	name      string
	v         nav.Opt[float64]
	low, high float64
}

// check wants a diameter, advance and transfer together, or a measured model.
func (c Circle) check() error {
	if m, ok := c.MeasuredModel.Get(); ok {
		return m.Validate()
	}
	if c.AdvanceM.IsSet() != c.TransferM.IsSet() {
		return errors.New("advance_m and transfer_m belong together")
	}
	if !c.DiameterM.IsSet() && !c.AdvanceM.IsSet() {
		return errors.New("expected diameter_m, or advance_m and transfer_m")
	}
	return nil
}

// Defaults by kind. All are our choice, for a crew that has not measured yet:
// each errs towards a vessel that turns and stops late, because an order given
// for a tighter turn than she can make runs her past the person. Turning
// radius in lengths: a secondary text gives merchant ships diameters of 3 to 4
// lengths, so 2 lengths of radius for a motor vessel; a yacht with a spade
// rudder turns shorter. Stopping in lengths at hull speed, cruising at a
// speed-length ratio of 1.1 (knots over the root of feet) or planing.
type defaults struct {
	radiusL, stopL       float64
	hardOverS            float64
	eyeM, freeboardM     float64 // at 10 m of length
	cruiseRatio, maxTurn float64 // knots per root of metre; cross acceleration, m/s²
	searchKn             float64
}

var byKind = map[Kind]defaults{
	DisplacementMotor: {2, 5, 4, 2.5, 1.0, 2, 1.5, 6},
	PlaningMotor:      {2.5, 4, 2, 2.0, 0.8, 6, 2.5, 8},
	Sail:              {1.5, 4, 2, 2.0, 1.0, 2, 1.5, 5},
}

// Complete fills in what is absent by kind and length, and names it in
// Assumed.
func (p Profile) Complete() (Profile, error) {
	if err := p.Validate(); err != nil {
		return Profile{}, err
	}
	d := byKind[p.Kind]
	root := math.Sqrt(p.LengthM)
	scale := math.Sqrt(p.LengthM / 10)
	p.Assumed = nil
	fill := func(name string, v *nav.Opt[float64], value float64) {
		if !v.IsSet() {
			*v = nav.Some(math.Round(value*10) / 10)
			p.Assumed = append(p.Assumed, name)
		}
	}
	fill("cruising_kn", &p.CruisingKn, math.Min(25, d.cruiseRatio*root))
	fill("search_kn", &p.SearchKn, math.Min(d.searchKn, p.CruisingKn.Or(0)))
	fill("stopping_m", &p.StoppingM, d.stopL*p.LengthM)
	fill("hard_over_s", &p.HardOverS, math.Min(14, d.hardOverS*scale))
	fill("order_delay_s", &p.OrderDelayS, 1)
	fill("eye_height_m", &p.EyeM, d.eyeM*scale)
	fill("freeboard_m", &p.FreeboardM, d.freeboardM*scale)
	if len(p.Circles) == 0 {
		kn := p.CruisingKn.Or(0)
		p.Circles = []Circle{{SpeedKn: kn, DiameterM: nav.Some(2 * d.radiusM(p.LengthM, kn))}}
		p.Assumed = append(p.Assumed, "circles")
	}
	return p, nil
}

// radiusM is the default turning radius: so many lengths, and not so tight
// that she would be thrown across.
func (d defaults) radiusM(lengthM, speedKn float64) float64 {
	u := speedKn * nav.MsPerKn
	return math.Round(10*math.Max(d.radiusL*lengthM, u*u/d.maxTurn)) / 10
}

// StoppingFromM is the stopping distance from a speed: with the square of the
// speed, as for a resistance and thrust that grow so; our choice, checked
// against no trial.
func (p Profile) StoppingFromM(speedKn float64) nav.Opt[float64] {
	stop, ok := p.StoppingM.Get()
	cruise, known := p.CruisingKn.Get()
	if !ok || !known || cruise <= 0 {
		return nav.None[float64]()
	}
	r := speedKn / cruise
	return nav.Some(stop * r * r)
}
