// Package turn says how a vessel comes back: how it turns, which manoeuvre
// brings it where, and which helm order is due now.
//
// Nouns:
//
//   - [Model]: how a vessel turns at one speed: radius, lag, loss of speed.
//   - [State]: where a vessel is in a turn, in the water's frame.
//   - [Manoeuvre]: a named sequence of helm orders.
//   - [Result]: a manoeuvre run through the model: orders, path, time to be
//     back, closest approach; over the ground and as a picture on request.
//   - [Profile]: what a crew knows of their vessel, and the model it gives.
//   - [Fit]: a model from a recorded circle or a trial's figures, and how good.
//   - [Live]: helm orders from the real track, made anew from each observation.
//   - [Card]: what is done by people in steps: under sail, going astern, on the
//     scene.
//   - [Approach], [PassWatch]: the last lengths, and a pass that missed.
//   - [AtOnce]: the wheel in the first seconds.
//
// The model is a first-order yaw response (Nomoto) with rudder travel, an
// order's delay and the loss of speed in a turn. Its parameters have to come
// from hard-over circles: the gain of a ship falls steeply with the helm, and
// one fitted at a small angle over-predicts a hard turn several times.
//
// The live orders need no current: range and bearing of a datum that rides with
// the water are the same in its frame and over the ground. They do not look at
// a chart: dangers, traffic and a lee shore are for the bridge.
//
// Angles of sequences count from the original course, positive to the side of
// the first turn. The package advises; the master may decide otherwise. No way
// to turn is suggested while the side of the fall is unknown: then both are
// run and shown.
package turn
