package server

import (
	"fmt"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/sky"
	"wakeback/server/feed"
)

// feeds are the instruments of a configuration, with their status in the form
// of the status page.
type feeds struct{ *feed.Feeds }

// Status is how each feed is.
func (f feeds) Status(time.Time) any { return f.Feeds.Status() }

// newInstruments makes the feeds of a configuration; nil when it has none.
func newInstruments(cfg Config) (Instruments, error) {
	if len(cfg.Feeds) == 0 {
		return nil, nil
	}
	f, err := feed.New(feed.Config{URLs: cfg.Feeds, Now: cfg.Now, Log: cfg.Log, Variation: variation})
	if err != nil {
		return nil, fmt.Errorf("%w: %w", ErrConfig, err)
	}
	return feeds{f}, nil
}

// variation is the magnetic variation by the world model, where it holds.
func variation(p nav.Position, at time.Time) nav.Opt[nav.VariationDeg] {
	v, err := sky.Variation(p, 0, at)
	if err != nil {
		return nav.None[nav.VariationDeg]()
	}
	return v.Usable()
}
