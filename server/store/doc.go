// Package store keeps what the crew told it: events, tracks, and the documents
// of the vessel (its profile, its devices), in one folder.
//
// Nouns:
//
//   - [Store]: the folder, open. One process at a time.
//   - [Report]: what opening found, in words for the crew, and the mode.
//   - [Health]: whether it still writes, and how fast.
//   - [Finding]: a hole or a contradiction in a device's chain of events.
//
// # Two logs
//
// What [Store.Append] returned is on disk twice: in a bbolt file and in an
// append-only journal beside it, or on a second medium where one is given.
// bbolt has no checksums of its own (a flipped byte is served as good, and a
// damaged newest meta page silently loses the last commit), so every event
// carries its hash, every frame of the journal its checksum, and opening
// compares the two and says what it found.
//
// Journal and bbolt file are flushed at the same time, and Append returns when
// both are through: what was acknowledged stands in both. A crash in between
// leaves a change in one of them that nobody was told of; opening puts it into
// the other. It is never taken back, since a safety event that reached one
// medium is worth more than symmetry, and a phone that sends it again is told
// that it is there.
//
// Files, all in the folder unless a second medium is given:
//
//	wakeback.db       events and documents (bbolt)
//	wakeback.journal  the same, append only; on the second medium if there is one
//	tracks.db         positions (bbolt)
//	tracks.journal    the same, append only; with the other journal
//	wakeback.lock     held while a process has the store open
//
// The journals only grow: the first by the events and documents, about a
// kilobyte each, the second by about 65 kB for each hour of one vessel at 1 Hz
// written every ten seconds. tracks.db takes about 50 kB for the same hour. A
// test measures both.
//
// Tracks have files of their own, so that a mark never waits for the flush of
// a breadcrumb, so that damage to the much larger track never touches an
// event, and so that opening takes no longer after a month at sea.
//
// # Damage
//
// A file that does not check is renamed, never overwritten or deleted, and
// made again from its other copy. bbolt can end its process on a damaged page,
// so its files are first walked in a child process: see [CheckMain].
//
// After a write or a flush that failed the store never tries the same files
// again: what the page cache holds then may not be what the disk holds
// (Rebello et al., USENIX ATC 2020). It says so ([ErrNotDurable]) and goes on
// answering from memory. [Store.Renew], or opening anew, goes on with fresh
// files made from what was acknowledged; the failed ones are kept. That holds
// for a full disk too: after room was made, Renew brings it back.
//
// Events are held in memory as well as on disk, about a kilobyte each; tracks
// are not. Only this package imports bbolt.
package store
