package main

import (
	"wakeback/drift"
	"wakeback/drift/nav"
)

// leeway is how a wind moves a person of whom nothing more is known through
// the water; an empty text is no wind.
func leeway(wind string) (nav.Velocity, error) {
	if wind == "" {
		return nav.Velocity{}, nil
	}
	from, kn, err := nav.ParseDirSpeed(wind)
	if err != nil {
		return nav.Velocity{}, badInput("--wind", err)
	}
	class, err := drift.ClassByID(drift.DefaultClass)
	if err != nil {
		return nav.Velocity{}, err
	}
	return drift.LeewayAt(class, nav.BlowingFrom(from, kn)).Downwind, nil
}
