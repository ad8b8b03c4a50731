package store

import (
	"errors"
	"path/filepath"
	"testing"

	"go.etcd.io/bbolt"
)

// Steps are run once, in order, from wherever the file is, all or none; a file
// that is there already is not written to.
func TestMigrate(t *testing.T) {
	path := filepath.Join(t.TempDir(), dbName)
	db, err := bbolt.Open(path, 0o600, boltOptions(false, 0))
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	err = db.Update(func(tx *bbolt.Tx) error { return fillFile(tx, image{epoch: newEpoch()}) })
	if err != nil {
		t.Fatal(err)
	}
	ran := ""
	step := func(name string, err error) migration {
		return func(tx *bbolt.Tx) error {
			ran += name
			return errors.Join(err, tx.Bucket(bucketMeta).Put([]byte("step"), []byte(name)))
		}
	}
	look := func() (v int, step string, txid int) {
		err := db.View(func(tx *bbolt.Tx) (err error) {
			v, err = version(tx)
			step, txid = string(tx.Bucket(bucketMeta).Get([]byte("step"))), tx.ID()
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
		return v, step, txid
	}
	_, _, before := look()
	if err := migrate(db, nil); err != nil {
		t.Fatal(err)
	}
	if v, _, after := look(); v != 1 || after != before {
		t.Errorf("with nothing to do: version %d, %d transactions", v, after-before)
	}
	boom := errors.New("no")
	if err := migrate(db, []migration{step("a", nil), step("b", boom)}); !errors.Is(err, boom) {
		t.Errorf("err = %v", err)
	}
	if v, s, _ := look(); v != 1 || s != "" {
		t.Errorf("after a step that failed: version %d, step %q", v, s)
	}
	ran = ""
	if err := migrate(db, []migration{step("a", nil), step("b", nil)}); err != nil {
		t.Fatal(err)
	}
	if err := migrate(db, []migration{step("a", nil), step("b", nil), step("c", nil)}); err != nil {
		t.Fatal(err)
	}
	if v, s, _ := look(); v != 4 || s != "c" || ran != "abc" {
		t.Errorf("version %d, step %q, ran %q", v, s, ran)
	}
	if len(migrations)+1 != schema {
		t.Errorf("%d migrations lead to version %d, the program writes %d", len(migrations), len(migrations)+1, schema)
	}
}
