package server

// newInstruments makes the feeds of a configuration; nil when it has none.
func newInstruments(cfg Config) (Instruments, error) {
	if len(cfg.Feeds) == 0 {
		return nil, nil
	}
	return nil, ErrConfig
}
