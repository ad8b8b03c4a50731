package store

import (
	"bytes"
	"strings"
	"testing"

	"wakeback/search/incident"
)

// A journal of any bytes is read without a crash, and what was appended after
// them is found.
func FuzzJournal(f *testing.F) {
	e, err := newChain('a').next(f, "x").Seal()
	if err != nil {
		f.Fatal(err)
	}
	e.Seq = 1
	fr, err := eventsFrame(frameEvents, 1, []incident.Event{e})
	if err != nil {
		f.Fatal(err)
	}
	doc, err := docFrame(2, docChange{"device", "a", []byte(`{}`)})
	if err != nil {
		f.Fatal(err)
	}
	whole := appendFrame(appendFrame(header(strings.Repeat("0f", 16)), fr), doc)
	f.Add([]byte{})
	f.Add(whole)
	f.Add(whole[:len(whole)-5])
	f.Add(append(bytes.Clone(whole), whole[headerLen:]...))
	f.Add(append(append([]byte{}, frameMagic...), 0, 0, 0, 0, 0xff, 0xff, 0xff, 0xff))
	f.Add([]byte("wakeback journal 9\n"))
	f.Fuzz(func(t *testing.T, text []byte) {
		c, err := readContent(text)
		if err == nil {
			for i, e := range c.events {
				if int(e.Seq) != i+1 || e.Verify() != nil {
					t.Fatalf("event %d has number %d", i+1, e.Seq)
				}
			}
		}
		carve(text)
		found := false
		after := frame{kind: 'x', change: 7, payload: []byte("what was appended")}
		frames(appendFrame(bytes.Clone(text), after), func(f frame) {
			found = f.kind == after.kind && f.change == after.change && bytes.Equal(f.payload, after.payload)
		})
		if !found {
			t.Fatal("a frame behind these bytes is not found")
		}
	})
}

// A block of any bytes is read without a crash, and what is read is written
// and read again the same.
func FuzzTrackBlock(f *testing.F) {
	f.Add([]byte{})
	f.Add(encodeFixes(steaming(t0, 3)))
	f.Add(encodeFixes(steaming(t0, 1))[4:])
	f.Fuzz(func(t *testing.T, block []byte) {
		if fixes, err := decodeFixes(block); err == nil {
			again, err := decodeFixes(encodeFixes(fixes))
			if err != nil || len(again) != len(fixes) {
				t.Fatalf("%d fixes became %d: %v", len(fixes), len(again), err)
			}
		}
		// The same bytes with a right checksum.
		sealed := seal(block)
		if fixes, err := decodeFixes(sealed); err == nil && len(fixes) > 0 {
			again, err := decodeFixes(encodeFixes(fixes))
			if err != nil || len(again) != len(fixes) {
				t.Fatalf("%d fixes became %d: %v", len(fixes), len(again), err)
			}
		}
		if _, _, err := readTrackFrame(block); err == nil && len(block) == 0 {
			t.Fatal("a frame of nothing is a track")
		}
	})
}
