// Package plan chooses the next search legs: which pattern, where it begins,
// how far apart the legs lie, and the reason for each choice in a sentence.
//
// It advises a crew on the scene with one vessel; the authority's plan wins.
// It never proposes to end a search.
package plan
