package drift

import "wakeback/drift/nav"

// Coast tells land from water.
type Coast interface {
	// In prepares the coast for a plane; what it returns reports whether a
	// point of the plane is land. It is called for each member and step.
	In(nav.Plane) func(eastM, northM float64) bool
	// Fingerprint differs for different coasts.
	Fingerprint() uint64
}
