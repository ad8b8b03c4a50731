package server

import "testing"

// keptStore is a store with a way to open it again, as after a crash.
type keptStore struct {
	Store
	again func(t testing.TB) Store
}

func realStore(t testing.TB) *keptStore {
	m := newMemStore()
	return &keptStore{Store: m, again: func(testing.TB) Store { return m }}
}
