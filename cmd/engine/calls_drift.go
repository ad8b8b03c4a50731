package main

import (
	"hash/fnv"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/sky"
	"wakeback/search/advice"
	"wakeback/search/effort"
	"wakeback/search/incident"
	"wakeback/search/pattern"
)

// whoIn names an incident, a person of it, and a moment.
type whoIn struct {
	Now      time.Time                  `json:"now"`
	Incident incident.IncidentID        `json:"incident"`
	Person   nav.Opt[incident.PersonNo] `json:"person"`
	Members  int                        `json:"members"` // 0 for the usual number
}

// find is the state and the person asked about.
func (s *session) find(v whoIn) (incident.State, incident.PersonState, error) {
	if v.Now.IsZero() {
		return incident.State{}, incident.PersonState{}, &incident.FieldError{Field: "now", Expected: "the time, in RFC 3339"}
	}
	st, ok := s.state(v.Incident)
	if !ok {
		return st, incident.PersonState{}, &incident.FieldError{Field: "incident", Expected: "an incident that is open"}
	}
	p, ok := st.Person(v.Person.Or(1))
	if !ok {
		return st, p, &incident.FieldError{Field: "person", Expected: "the number of a person of the incident"}
	}
	return st, p, nil
}

// cloudKept is the cloud of one person, kept so that a minute more is a
// minute's work.
type cloudKept struct {
	incident incident.IncidentID
	person   incident.PersonNo
	members  int
	cloud    *drift.Cloud
}

type regionOut struct {
	Share  float64          `json:"share"`
	AreaM2 float64          `json:"area_m2"`
	Rings  [][]nav.Position `json:"rings"`
}

type cloudOut struct {
	At       time.Time      `json:"at"`
	N        int            `json:"n"`
	Ashore   int            `json:"ashore"`
	Mean     nav.Position   `json:"mean"`
	SDMajorM float64        `json:"sd_major_m"`
	SDMinorM float64        `json:"sd_minor_m"`
	AxisDeg  float64        `json:"axis_deg"`
	R50M     float64        `json:"r50_m"`
	R95M     float64        `json:"r95_m"`
	Regions  []regionOut    `json:"regions"`
	Points   []nav.Position `json:"points"` // some of the members, for a plot
}

// shownPoints is how many members a plot shows; our choice.
const shownPoints = 300

// cloud is where one person may be now.
func cloud(s *session, in []byte) (any, error) {
	v, err := read[whoIn](in)
	if err != nil {
		return nil, err
	}
	cl, err := s.cloudOf(v)
	if err != nil {
		return nil, err
	}
	sp, plane := cl.Spread(), cl.Plane()
	out := cloudOut{
		At: cl.At(), N: sp.N, Ashore: sp.Ashore, Mean: sp.MeanPosition, SDMajorM: sp.SDMajorM, SDMinorM: sp.SDMinorM,
		AxisDeg: sp.AxisDeg, R50M: sp.R50M, R95M: sp.R95M,
	}
	for _, r := range cl.Regions(0.5, 0.95) {
		ro := regionOut{Share: r.Share, AreaM2: r.AreaM2}
		for _, ring := range r.Rings {
			var edge []nav.Position
			for _, o := range ring {
				edge = append(edge, plane.Position(o))
			}
			ro.Rings = append(ro.Rings, edge)
		}
		out.Regions = append(out.Regions, ro)
	}
	east, north := cl.Points()
	for i := 0; i < len(east); i += max(1, len(east)/shownPoints) {
		out.Points = append(out.Points, plane.Position(nav.Offset{EastM: east[i], NorthM: north[i]}))
	}
	return out, nil
}

// cloudOf brings the person's cloud to the moment asked about.
func (s *session) cloudOf(v whoIn) (*drift.Cloud, error) {
	st, p, err := s.find(v)
	if err != nil {
		return nil, err
	}
	kase, _, ok := advice.CaseOf(st, p)
	if !ok {
		return nil, &incident.FieldError{Field: "person", Expected: "a person in the water whose place is known"}
	}
	members := v.Members
	if members < 100 || members > 20000 {
		members = drift.DefaultMembers
	}
	k := &s.kept
	if k.cloud == nil || k.incident != st.ID || k.person != p.No || k.members != members || v.Now.Before(k.cloud.At()) {
		cl, err := drift.NewCloud(kase, drift.Options{Members: members, Seed: seedOf(st.ID, p.No)})
		if err != nil {
			return nil, err
		}
		*k = cloudKept{st.ID, p.No, members, cl}
	} else if _, err := k.cloud.Update(kase); err != nil {
		return nil, err
	}
	if v.Now.After(k.cloud.At()) {
		if err := k.cloud.Advance(v.Now); err != nil {
			return nil, err
		}
	}
	return k.cloud, nil
}

// seedOf gives every screen the same cloud.
func seedOf(id incident.IncidentID, no incident.PersonNo) uint64 {
	h := fnv.New64a()
	_, _ = h.Write([]byte(id))
	return h.Sum64() + uint64(no)
}

// water says what cold water does, for planning the recovery.
func water(s *session, in []byte) (any, error) {
	v, err := read[struct {
		TempC     float64         `json:"temp_c"`
		Flotation drift.Flotation `json:"flotation"`
	}](in)
	if err != nil {
		return nil, err
	}
	if v.Flotation == "" {
		v.Flotation = drift.FlotationUnknown
	}
	return drift.ColdWaterAt(v.TempC, v.Flotation)
}

// classes lists the leeway classes, with their sources.
func classes(_ *session, _ []byte) (any, error) {
	list, err := drift.Classes()
	if err != nil {
		return nil, err
	}
	out := make([]map[string]any, 0, len(list))
	for _, c := range list {
		out = append(out, map[string]any{"id": c.ID, "object": c.Object, "source": c.Source})
	}
	return map[string]any{"classes": out}, nil
}

// chooseClass answers the two plain questions: what are they wearing, are they
// moving.
func chooseClass(_ *session, in []byte) (any, error) {
	v, err := read[struct {
		Wearing drift.Wearing `json:"wearing"`
		Moving  drift.Moving  `json:"moving"`
	}](in)
	if err != nil {
		return nil, err
	}
	c := drift.Choose(v.Wearing, v.Moving)
	return map[string]string{"object": c.ClassID, "why": c.Why}, nil
}

// daylight says how much light is left at a place.
func daylight(_ *session, in []byte) (any, error) {
	v, err := read[struct {
		Now      time.Time    `json:"now"`
		Position nav.Position `json:"position"`
	}](in)
	if err != nil {
		return nil, err
	}
	return sky.Daylight(v.Position, v.Now)
}

// searched is what was looked at so far.
type searchedOut struct {
	RunM     float64          `json:"run_m"`
	SweptM2  float64          `json:"swept_m2"`
	POD      nav.Opt[float64] `json:"pod"` // if the person was inside the cloud, conditions as stated
	Coverage nav.Opt[float64] `json:"coverage"`
	// Runs are the pieces that count, over the ground now: they ride along.
	Runs [][2]nav.Position `json:"runs"`
}

// searched counts the searched water from the track, in the frame of the
// datum, while legs were being run.
func searched(s *session, in []byte) (any, error) {
	v, err := read[whoIn](in)
	if err != nil {
		return nil, err
	}
	st, _, err := s.find(v)
	if err != nil {
		return nil, err
	}
	var log effort.Log
	out := searchedOut{Runs: [][2]nav.Position{}}
	var area float64
	for _, search := range st.Searches {
		plan := advice.PlanOf(search.SearchLaid)
		s.countSearch(&log, &out, search, plan, v.Now)
		area += pattern.LengthM(plan.Legs) * search.SpacingNM * nav.MetresPerNM
	}
	out.RunM, out.SweptM2 = log.RunM(), log.SweptM2()
	if area > 0 {
		out.Coverage = nav.Some(out.SweptM2 / area)
	}
	if out.RunM > 0 {
		out.POD = s.podOf(v, &log, st)
	}
	return out, nil
}

// countSearch adds the pieces of track that lie within the legs' times.
func (s *session) countSearch(log *effort.Log, out *searchedOut, search incident.Search, plan pattern.Plan, now time.Time) {
	track := s.vessel.track
	if track.Len() == 0 {
		track = s.phone.track
	}
	plane := nav.NewPlane(plan.Datum)
	ride := plan.Water.DatumDrift.For(now.Sub(plan.Begin))
	for _, leg := range search.Done {
		end := leg.EndedAt
		if end.IsZero() {
			end = now
		}
		fixes := track.Between(leg.BegunAt, end)
		for i := range max(0, len(fixes)-1) {
			a, b := fixes[i], fixes[i+1]
			if b.At.Sub(a.At) > maxTrackGap {
				continue // a gap is unknown, and unknown is not searched
			}
			r := effort.Run{From: plan.OffsetOf(a.Position, a.At), To: plan.OffsetOf(b.Position, b.At), WidthM: search.WidthNM * nav.MetresPerNM}
			log.Add(r)
			out.Runs = append(out.Runs, [2]nav.Position{plane.Position(r.From.Add(ride)), plane.Position(r.To.Add(ride))})
		}
	}
}

// maxTrackGap is the longest gap between two fixes across which the vessel
// counts as having searched; as for a mark moved back.
const maxTrackGap = 10 * time.Second

// podOf is the chance that the person was seen by now, over the cloud.
func (s *session) podOf(v whoIn, log *effort.Log, st incident.State) nav.Opt[float64] {
	cl, err := s.cloudOf(v)
	if err != nil || len(st.Searches) == 0 {
		return nav.None[float64]()
	}
	plan := advice.PlanOf(st.Searches[len(st.Searches)-1].SearchLaid)
	east, north := cl.Points()
	var places []nav.Offset
	for i := 0; i < len(east); i += max(1, len(east)/shownPoints) {
		p := cl.Plane().Position(nav.Offset{EastM: east[i], NorthM: north[i]})
		places = append(places, plan.OffsetOf(p, v.Now))
	}
	return nav.Some(log.PODOver(places))
}
