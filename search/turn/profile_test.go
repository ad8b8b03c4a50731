package turn

import (
	"encoding/json"
	"errors"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

func TestProfileDefaultsAreNamed(t *testing.T) {
	for _, kind := range []Kind{DisplacementMotor, PlaningMotor, Sail} {
		full, err := Profile{Kind: kind, LengthM: 12}.Complete()
		if err != nil {
			t.Fatal(err)
		}
		for _, name := range []string{"cruising_kn", "search_kn", "stopping_m", "hard_over_s", "eye_height_m", "freeboard_m", "circles"} {
			if !strings.Contains(strings.Join(full.Assumed, " "), name) {
				t.Errorf("%s: %s was filled in unnamed", kind, name)
			}
		}
		if w := full.Warnings(); len(w) != 0 {
			t.Errorf("%s: the defaults are warned of: %v", kind, w)
		}
	}
	full, err := Profile{Kind: Sail, LengthM: 12, CruisingKn: nav.Some(6.0)}.Complete()
	if err != nil || full.CruisingKn.Or(0) != 6 || strings.Contains(strings.Join(full.Assumed, " "), "cruising_kn") {
		t.Errorf("what was given is kept: %+v %v", full, err)
	}
}

func TestProfileRefusesSlips(t *testing.T) {
	tests := map[string]Profile{
		"kind":                     {LengthM: 10},
		"length_m":                 {Kind: Sail},
		"cruising_kn":              {Kind: Sail, LengthM: 10, CruisingKn: nav.Some(600.0)},
		"circles[0]":               {Kind: Sail, LengthM: 10, Circles: []Circle{{SpeedKn: 5}}},
		"belong together":          {Kind: Sail, LengthM: 10, Circles: []Circle{{SpeedKn: 5, AdvanceM: nav.Some(30.0)}}},
		"circles[1].diameter_m":    {Kind: Sail, LengthM: 10, Circles: []Circle{{SpeedKn: 5, DiameterM: nav.Some(30.0)}, {SpeedKn: 7, DiameterM: nav.Some(-1.0)}}},
		"at most 2":                {Kind: Sail, LengthM: 10, Circles: make([]Circle, 3)},
		"eye_height_m 0, expected": {Kind: Sail, LengthM: 10, EyeM: nav.Some(0.0)},
	}
	for says, p := range tests {
		if _, err := p.Complete(); !errors.Is(err, ErrProfile) || !strings.Contains(err.Error(), says) {
			t.Errorf("%s: %v", says, err)
		}
	}
}

// The limits of IMO MSC.137(76) for a ship of 100 m: advance 450 m, tactical
// diameter 500 m, stopping 1500 m.
func TestProfileLimits(t *testing.T) {
	at := func(diameter, advance, stop float64) int {
		p := Profile{
			Kind: DisplacementMotor, LengthM: 100, StoppingM: nav.Some(stop),
			Circles: []Circle{{SpeedKn: 15, DiameterM: nav.Some(diameter), AdvanceM: nav.Some(advance), TransferM: nav.Some(200.0)}},
		}
		return len(p.Warnings())
	}
	for _, tt := range []struct {
		diameter, advance, stop float64
		want                    int
	}{{500, 450, 1500, 0}, {501, 450, 1500, 1}, {500, 451, 1500, 1}, {500, 450, 1501, 1}, {90, 450, 1500, 1}} {
		if got := at(tt.diameter, tt.advance, tt.stop); got != tt.want {
			t.Errorf("%+v: %d warnings", tt, got)
		}
	}
}

func TestProfileModel(t *testing.T) {
	p := Profile{Kind: DisplacementMotor, LengthM: 15, Circles: []Circle{
		{SpeedKn: 12, DiameterM: nav.Some(80.0)}, {SpeedKn: 6, DiameterM: nav.Some(60.0)},
	}}
	for kn, radius := range map[float64]float64{4: 30, 6: 30, 9: 35, 12: 40, 20: 40} {
		m, err := p.Model(kn)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "radius", m.RadiusM, radius, 1e-9)
		near(t, "speed", m.SpeedMs/nav.MsPerKn, kn, 1e-9)
	}
	if _, err := p.Model(0); !errors.Is(err, ErrProfile) {
		t.Errorf("speed 0: %v", err)
	}
}

// Advance and transfer of a vessel give a model with that advance and transfer.
func TestProfileFromAdvanceAndTransfer(t *testing.T) {
	for name, m := range vessels(t) {
		want, err := m.Figures()
		if err != nil {
			t.Fatal(err)
		}
		p := Profile{
			Kind: DisplacementMotor, LengthM: 20, HardOverS: nav.Some(m.RudderDeg / m.RudderRate), OrderDelayS: nav.Some(m.OrderDelayS),
			Circles: []Circle{{SpeedKn: m.SpeedMs / nav.MsPerKn, AdvanceM: want.AdvanceM, TransferM: want.TransferM}},
		}
		got, err := p.Model(m.SpeedMs / nav.MsPerKn)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		g, _ := got.Figures()
		near(t, name+" advance", g.AdvanceM.Or(0), want.AdvanceM.Or(0), 0.05*want.AdvanceM.Or(0))
		near(t, name+" transfer", g.TransferM.Or(0), want.TransferM.Or(0), 0.05*want.TransferM.Or(0))
		// Two figures say little of speed lost and pivot: a quarter of the radius.
		near(t, name+" radius", got.RadiusM, m.RadiusM, m.RadiusM/4)
	}
}

func TestProfileProperties(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		p := Profile{
			Kind:    rapid.SampledFrom([]Kind{DisplacementMotor, PlaningMotor, Sail}).Draw(rt, "kind"),
			LengthM: rapid.Float64Range(2, 400).Draw(rt, "length"),
		}
		m, err := p.Model(rapid.Float64Range(0.5, 60).Draw(rt, "speed"))
		if err != nil {
			rt.Fatal(err)
		}
		if err := m.Validate(); err != nil {
			rt.Fatal(err)
		}
		full, _ := p.Complete()
		text, err := json.Marshal(full)
		if err != nil {
			rt.Fatal(err)
		}
		var back Profile
		if err := json.Unmarshal(text, &back); err != nil {
			rt.Fatal(err)
		}
		again, err := json.Marshal(back)
		if err != nil || string(again) != string(text) {
			rt.Fatalf("%s became %s: %v", text, again, err)
		}
	})
}

func FuzzProfile(f *testing.F) {
	f.Add(`{"kind":"sail","length_m":12,"cruising_kn":6,"circles":[{"speed_kn":6,"diameter_m":36}]}`)
	f.Add(`{"kind":"planing_motor","length_m":8,"circles":[{"speed_kn":20,"advance_m":60,"transfer_m":40}]}`)
	f.Add(`{"kind":"sail","length_m":null}`)
	f.Fuzz(func(t *testing.T, text string) {
		var p Profile
		if json.Unmarshal([]byte(text), &p) != nil {
			return
		}
		full, err := p.Complete()
		if err != nil {
			return
		}
		if err := full.Validate(); err != nil {
			t.Errorf("complete is not valid: %v", err)
		}
		full.Warnings()
		if m, err := full.Model(5); err == nil && m.Validate() != nil {
			t.Errorf("model %+v", m)
		}
	})
}
