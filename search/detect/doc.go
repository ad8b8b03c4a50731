// Package detect says how likely a searcher is to see what is searched for:
// sweep width, the lateral range law, coverage, and the probability of
// detection.
//
// Nouns:
//
//   - [Table]: sweep widths by object and visibility, as published.
//   - [Conditions]: what the sweep width depends on.
//   - [Width]: a corrected sweep width with every factor that made it.
//   - [InverseCube]: the law that says what is seen at which distance abeam.
//
// All published tables are for daylight and objects without a light. No night
// factor and no table by height of eye was found in any text, so there is
// none here: at night there is no figure, and a crew measures its own.
// "Searched" means looked at, not empty.
package detect
