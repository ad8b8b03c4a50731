package drift_test

import (
	"testing"
	"time"

	"wakeback/drift"
)

func benchCase(t testing.TB) drift.Case {
	at := clock("10:00")
	return drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: at, FellTo: at, Class: class(t, "person"),
		Winds:    winds(t, windFrom(at, 240, 15), windFrom(at.Add(2*time.Hour), 260, 20)),
		Currents: currents(t, currentFrom(at, 100, 1.2), currentFrom(at.Add(3*time.Hour), 280, 0.8)),
	}
}

// BenchmarkCloud6h is 10,000 members for 6 h in steps of a minute: 3.6 million
// steps an operation.
func BenchmarkCloud6h(b *testing.B) {
	c := benchCase(b)
	cl, err := drift.NewCloud(c, drift.Options{Members: 10_000, Seed: 1})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		_ = cl.Advance(c.FellFrom)
		_ = cl.Advance(c.FellFrom.Add(6 * time.Hour))
	}
}

// BenchmarkCloudMinute is the next minute of 10,000 members.
func BenchmarkCloudMinute(b *testing.B) {
	c := benchCase(b)
	cl, err := drift.NewCloud(c, drift.Options{Members: 10_000, Seed: 1})
	if err != nil {
		b.Fatal(err)
	}
	at := c.FellFrom
	b.ReportAllocs()
	for b.Loop() {
		at = at.Add(time.Minute)
		if at.Sub(c.FellFrom) > 300*time.Hour {
			at = c.FellFrom
		}
		_ = cl.Advance(at)
	}
}

// BenchmarkDatum is a datum two hours after the fall.
func BenchmarkDatum(b *testing.B) {
	c := benchCase(b)
	for b.Loop() {
		_, _ = drift.DatumAt(c, c.FellFrom.Add(2*time.Hour))
	}
}

// BenchmarkSpread is a cloud of 10,000 in a few numbers.
func BenchmarkSpread(b *testing.B) {
	c := benchCase(b)
	cl := cloudAt(b, c, drift.Options{Members: 10_000, Seed: 1}, c.FellFrom.Add(2*time.Hour))
	for b.Loop() {
		cl.Spread()
	}
}
