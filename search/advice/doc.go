// Package advice decides what each person on board should be told now. It is
// the one place where that is decided: the server streams its answers, and a
// phone that is alone asks the same code and gets the same.
//
// Nouns:
//
//   - [Input]: an incident's state, the own vessel, and the moment.
//   - [Frame]: what a screen shows, in the form it has on the wire.
//   - [Do]: the one thing to do, as a code with figures. The words are the
//     page's, in the reader's language; [Do.English] has them for a terminal.
//
// Where it happened (the mark, fixed) and where to look now (the datum, which
// drifts, with its age and error) are two things in every frame.
//
// The package has no clock and does no input or output.
package advice
