// Package store keeps what the crew told it: events, tracks, and the documents
// of the vessel (its profile, its devices), in one folder.
//
// What Append returned is on disk, twice: in a bbolt file and in an
// append-only journal beside it, or on a second medium where one is given.
// bbolt has no checksums of its own (a flipped byte is served as good, and a
// damaged newest meta page silently loses the last commit), so every event
// carries its hash, every frame of the journal its checksum, and opening
// compares the two and says what it found.
//
// Nouns:
//
//   - [Store]: the folder, open. One process at a time.
//   - [Report]: what opening found, in words for the crew.
//   - [Health]: whether it still writes.
//
// After a write or a flush that failed the store never tries the same files
// again: what the page cache holds then may not be what the disk holds
// (Rebello et al., USENIX ATC 2020). It says so ([ErrNotDurable]) and goes on
// answering from memory until it is opened anew.
//
// Events are held in memory as well as on disk, about a kilobyte each; tracks
// are not. Only this package imports bbolt.
package store
