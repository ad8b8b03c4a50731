package main

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/detect"
	"wakeback/search/incident"
	"wakeback/search/plan"
)

type proposeIn struct {
	Now           time.Time                  `json:"now"`
	Incident      incident.IncidentID        `json:"incident"`
	Person        nav.Opt[incident.PersonNo] `json:"person"`
	SpeedKn       float64                    `json:"speed_kn"`
	TurnDiameterM nav.Opt[float64]           `json:"turn_diameter_m"`
	VisibilityNM  float64                    `json:"visibility_nm"`
	SeaM          float64                    `json:"sea_m"`
	Tired         bool                       `json:"tired"`
	Night         bool                       `json:"night"`
	WidthNM       nav.Opt[float64]           `json:"measured_width_nm"`
	FirstInto     plan.Into                  `json:"first_into"`
	LimitS        float64                    `json:"limit_s"`
}

// proposalOut is a search that could be laid, with what speaks for it.
type proposalOut struct {
	Body     incident.SearchLaid `json:"body"`
	RadiusNM float64             `json:"radius_nm,omitempty"`
	Coverage float64             `json:"coverage"`
	PODIdeal float64             `json:"pod_ideal"`
	PODPoor  float64             `json:"pod_poor"`
	LengthM  float64             `json:"length_m"`
	TakesS   float64             `json:"takes_s"`
	Covers   bool                `json:"covers"`
	Notes    []string            `json:"notes"`
}

// propose answers with the searches that could be begun now, the better first.
func propose(s *session, in []byte) (any, error) {
	v, err := read[proposeIn](in)
	if err != nil {
		return nil, err
	}
	if v.Now.IsZero() {
		return nil, &incident.FieldError{Field: "now", Expected: "the time, in RFC 3339"}
	}
	st, ok := s.state(v.Incident)
	if !ok {
		return nil, &incident.FieldError{Field: "incident", Expected: "an incident that is open"}
	}
	f := advice.Steer(advice.Input{Now: v.Now, State: st, Own: s.choose(v.Now), Person: v.Person})
	d, ok := f.Datum.Get()
	if !ok {
		return nil, &incident.FieldError{Field: "person", Expected: "a person whose place is known"}
	}
	proposals, err := plan.Propose(v.scene(st, d))
	if err != nil {
		return nil, err
	}
	out := make([]proposalOut, 0, len(proposals))
	for _, p := range proposals {
		out = append(out, v.out(p, f, d))
	}
	return map[string]any{"proposals": out}, nil
}

func (v proposeIn) scene(st incident.State, d advice.Datum) plan.Scene {
	sc := plan.Scene{
		Now: v.Now, Datum: d.Position, ErrorM: d.ErrorM, SpeedKn: v.SpeedKn, TurnDiameterM: v.TurnDiameterM,
		WindFrom: d.WindFromDeg, MeasuredWidthNM: v.WidthNM, FirstInto: v.FirstInto, Passes: finished(st),
		Limit: time.Duration(v.LimitS * float64(time.Second)),
		Conditions: detect.Conditions{
			Object: detect.PersonInWater, VisibilityNM: v.VisibilityNM, WindKn: d.WindKn.Or(0), SeaM: v.SeaM, Tired: v.Tired, Night: v.Night,
		},
	}
	if set, ok := d.CurrentSetDeg.Get(); ok {
		sc.Current = nav.Towards(set, d.CurrentDriftKn.Or(0))
	}
	if towards, ok := d.DriftTowards.Get(); ok {
		sc.DatumDrift = nav.Towards(towards, d.DriftKn)
	}
	return sc
}

// finished counts the searches that were run to their end.
func finished(st incident.State) int {
	n := 0
	for _, s := range st.Searches {
		if s.Status == incident.SearchFinished {
			n++
		}
	}
	return n
}

func (v proposeIn) out(p plan.Proposal, f advice.Frame, d advice.Datum) proposalOut {
	body := incident.SearchLaid{
		Person: nav.Some(f.Person), Pattern: p.Pattern, Datum: d.Position, Begin: v.Now, SpeedKn: v.SpeedKn,
		Current: setDrift(p.Water.Current), DatumDrift: setDrift(p.Water.DatumDrift),
		SpacingNM: p.SpacingNM, WidthNM: p.WidthNM, WidthBy: p.WidthBy, Reason: p.Reason,
	}
	for _, l := range p.Legs {
		body.Legs = append(body.Legs, incident.LegLaid{Kind: string(l.Kind), CourseDeg: l.Course, LengthM: l.LengthM, From: l.From, To: l.To})
	}
	notes := p.Notes
	if notes == nil {
		notes = []string{}
	}
	return proposalOut{
		Body: body, RadiusNM: p.RadiusNM, Coverage: p.Coverage, PODIdeal: p.PODIdeal, PODPoor: p.PODPoor,
		LengthM: p.LengthM, TakesS: p.TakesS, Covers: p.Covers, Notes: notes,
	}
}

func setDrift(v nav.Velocity) incident.SetDrift {
	return incident.SetDrift{SetDeg: v.Direction().Or(0), DriftKn: v.SpeedKn()}
}
