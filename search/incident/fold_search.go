package incident

import "time"

// Search is a search plan and how far it was run.
type Search struct {
	Said
	SearchLaid
	Status string   `json:"status"`                // "laid", "running", "paused", "finished", "dropped"
	Leg    int      `json:"leg"`                   // being steered, from 1; 0 before the first
	Done   []LegRun `json:"done"`                  // legs that ended, in order
	Reason string   `json:"last_reason,omitempty"` // of the last pause or drop
}

// LegRun is a leg that ended.
type LegRun struct {
	LegEnded
	BegunAt time.Time `json:"begun_at,omitzero"`
	EndedAt time.Time `json:"ended_at"`
}

// The statuses of a search.
const (
	SearchIsLaid     = "laid"
	SearchRunning    = "running"
	SearchPaused     = "paused"
	SearchFinished   = "finished"
	SearchWasDropped = "dropped"
)

// search counts the events of a search. One that stands before the plan in the
// log, because two clocks differ, waits for it.
func (f *folder) search(e *entry) {
	if laid, ok := e.body.(*SearchLaid); ok {
		f.s.Searches = append(f.s.Searches, Search{Said: e.said(), SearchLaid: *laid, Status: SearchIsLaid, Done: []LegRun{}})
		for _, waiting := range f.earlySearch[e.ID] {
			f.search(waiting)
		}
		return
	}
	id := searchOf(e)
	for i := range f.s.Searches {
		if f.s.Searches[i].Event == id {
			f.s.Searches[i].count(e)
			return
		}
	}
	f.earlySearch[id] = append(f.earlySearch[id], e)
}

func searchOf(e *entry) EventID {
	switch b := e.body.(type) {
	case *LegBegun:
		return b.Search
	case *LegEnded:
		return b.Search
	case *SearchWord:
		return b.Search
	}
	return ""
}

func (s *Search) count(e *entry) {
	switch b := e.body.(type) {
	case *LegBegun:
		if b.Leg <= len(s.Legs) {
			s.Leg, s.Status = b.Leg, SearchRunning
			s.Done = append(s.Done, LegRun{LegEnded: LegEnded{Search: b.Search, Leg: b.Leg}, BegunAt: e.At})
		}
	case *LegEnded:
		s.end(e, b)
	case *SearchWord:
		s.word(e, b)
	}
}

// end closes the newest beginning of the leg, or stands alone when the
// beginning is not in the log.
func (s *Search) end(e *entry, b *LegEnded) {
	run := LegRun{LegEnded: *b, EndedAt: e.At}
	for i := len(s.Done) - 1; i >= 0; i-- {
		if d := s.Done[i]; d.Leg == b.Leg && d.EndedAt.IsZero() {
			run.BegunAt = d.BegunAt
			s.Done[i] = run
			s.finished(b)
			return
		}
	}
	s.Done = append(s.Done, run)
	s.finished(b)
}

func (s *Search) finished(b *LegEnded) {
	if b.Leg == len(s.Legs) && b.How == "run" {
		s.Status = SearchFinished
	}
}

func (s *Search) word(e *entry, b *SearchWord) {
	s.Reason = b.Reason
	switch e.Kind {
	case KindSearchPaused:
		s.Status = SearchPaused
	case KindSearchResumed:
		s.Status = SearchRunning
	case KindSearchDropped:
		s.Status = SearchWasDropped
	}
}
