package server

import (
	"fmt"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/sky"
	"wakeback/server/feed"
)

// newInstruments makes the feeds of a configuration; nil when it has none.
func newInstruments(cfg Config) (Instruments, error) {
	if len(cfg.Feeds) == 0 {
		return nil, nil
	}
	f, err := feed.New(feed.Config{URLs: cfg.Feeds, Now: cfg.Now, Log: cfg.Log, Variation: variation})
	if err != nil {
		return nil, fmt.Errorf("%w: %w", ErrConfig, err)
	}
	return f, nil
}

// variation is that of the magnetic model, where it may be used.
func variation(p nav.Position, at time.Time) nav.Opt[nav.VariationDeg] {
	r, err := sky.Variation(p, 0, at)
	if err != nil {
		return nav.None[nav.VariationDeg]()
	}
	return r.Usable()
}
