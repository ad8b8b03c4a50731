package server

import (
	"context"
	"os"
	"testing"

	"go.uber.org/goleak"

	"wakeback/server/store"
)

func TestMain(m *testing.M) {
	store.CheckMain()
	childMain()
	code := m.Run()
	if code == 0 {
		if err := goleak.Find(); err != nil {
			os.Stderr.WriteString(err.Error() + "\n")
			code = 1
		}
	}
	os.Exit(code)
}

// keptStore is a store on disk with a way to open it again.
type keptStore struct {
	disk
	dir string
}

func openDisk(t testing.TB, dir string) disk {
	t.Helper()
	st, report, err := store.Open(context.Background(), store.Options{Dir: dir})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := st.Close(); err != nil {
			t.Error(err)
		}
	})
	return disk{st, report}
}

func realStore(t testing.TB) *keptStore {
	t.Helper()
	dir := t.TempDir()
	return &keptStore{openDisk(t, dir), dir}
}

// again closes the store and opens its folder anew.
func (k *keptStore) again(t testing.TB) Store {
	t.Helper()
	if err := k.Close(); err != nil {
		t.Fatal(err)
	}
	return openDisk(t, k.dir)
}
