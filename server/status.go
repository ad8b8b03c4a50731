package server

import (
	"net/http"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
	"wakeback/server/hub"
)

// statusAnswer is what works and what does not, for the ready screen.
type statusAnswer struct {
	Now         time.Time             `json:"now"`
	Version     string                `json:"version"`
	Epoch       string                `json:"epoch"`
	LastSeq     incident.Seq          `json:"last_seq"`
	Demo        bool                  `json:"demo"`
	OpenPairing bool                  `json:"open_pairing"`
	Store       Health                `json:"store"`
	Vessel      feed.Vessel           `json:"vessel"`
	Feeds       []feed.SourceStatus   `json:"feeds"`
	Streams     hub.Stats             `json:"streams"`
	Connected   []hub.Info            `json:"connected"`
	Phones      []phoneFix            `json:"phones"`
	Open        []incident.IncidentID `json:"open_incidents"`
}

// feedStatus is what instruments may tell about their sources beside what the
// vessel does.
type feedStatus interface {
	Status() []feed.SourceStatus
}

// getStatus is GET /status.
func (s *Server) getStatus(c echo.Context) error {
	now := s.now()
	a := statusAnswer{
		Now: now.UTC(), Version: s.cfg.Version, Epoch: s.store.Epoch(), LastSeq: s.store.LastSeq(),
		Demo: s.cfg.Demo, OpenPairing: s.cfg.OpenPairing, Store: s.store.Health(),
		Vessel: s.vessel.now(now), Feeds: []feed.SourceStatus{}, Streams: s.hub.Stats(), Connected: s.hub.Connected(),
		Phones: s.phones.list(), Open: []incident.IncidentID{},
	}
	if f, ok := s.vessel.instruments.(feedStatus); ok {
		a.Feeds = f.Status()
	}
	for _, st := range s.book.live() {
		a.Open = append(a.Open, st.ID)
	}
	return c.JSON(http.StatusOK, a)
}

// trackPoint is a position of the vessel on its track.
type trackPoint struct {
	At       time.Time            `json:"at"`
	Position nav.Position         `json:"position"`
	SogKn    nav.Opt[float64]     `json:"sog_kn"`
	CogDeg   nav.Opt[nav.TrueDeg] `json:"cog_deg"`
}

// maxTrack is the longest stretch of track in one answer.
const maxTrack = 6 * time.Hour

// getTrack is GET /track?from=TIME&to=TIME: where the vessel was.
func (s *Server) getTrack(c echo.Context) error {
	to, err := queryTime(c, "to", s.now())
	if err != nil {
		return err
	}
	from, err := queryTime(c, "from", to.Add(-time.Hour))
	if err != nil {
		return err
	}
	if from.After(to) || to.Sub(from) > maxTrack {
		return fieldError("from", "a time before to, by up to six hours", nil)
	}
	fixes, err := s.trackBetween(from, to)
	if err != nil {
		return err
	}
	points := make([]trackPoint, 0, len(fixes))
	for _, f := range fixes {
		points = append(points, trackPoint{f.At.UTC(), f.Position, f.SogKn, f.CogTrue})
	}
	return c.JSON(http.StatusOK, map[string]any{"points": points})
}

// trackBetween is the track on disk, with what is not there yet.
func (s *Server) trackBetween(from, to time.Time) ([]nav.Fix, error) {
	fixes, err := s.store.Track(s.ledger.self, from, to)
	if err != nil {
		return nil, err
	}
	t := nav.NewTrack(fixes)
	s.vessel.mu.Lock()
	defer s.vessel.mu.Unlock()
	for _, f := range s.vessel.track.Between(from, to) {
		t.Add(f)
	}
	return t.Fixes(), nil
}

func queryTime(c echo.Context, name string, fallback time.Time) (time.Time, error) {
	text := c.QueryParam(name)
	if text == "" {
		return fallback, nil
	}
	t, err := time.Parse(time.RFC3339, text)
	if err != nil {
		return time.Time{}, fieldError(name, wantTime, err)
	}
	return t, nil
}
