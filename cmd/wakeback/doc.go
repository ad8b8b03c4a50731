// Command wakeback is the tool a small vessel's crew reaches for when someone
// goes over the side: the server on board, and the same reckoning on the
// command line.
//
// Each command is a file of its own. Each prints a table a person can read,
// or with --json one JSON document. Errors go to standard error: exit 2 for
// bad input, 1 for a failure, 0 otherwise.
package main
