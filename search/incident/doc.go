// Package incident is the log of an incident: small events that are never
// edited or deleted, their form on the wire, and the fold that turns them
// into the state a screen shows.
//
// Nouns:
//
//   - [Event]: one thing that one device saw or was told, named by a UUIDv7.
//   - [Kind] and the bodies in bodies.go: what an event says.
//   - [State]: what an incident's events add up to, made by [Fold].
//
// The fold does not depend on the order in which events arrive, on
// repetition, or on how they were batched: it sorts them by the time at which
// they happened and then by device and number, so server and phones that hold
// the same events show the same state.
//
// Every event carries its own hash, its device's gap-free number and the hash
// of that device's event before it, so a loss or a change can be shown and
// named. The package has no clock and does no input or output.
package incident
