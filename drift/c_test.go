//go:build !js

package drift

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// plainC compiles the plain C loop; the test is skipped where there is no gcc.
func plainC(t testing.TB) string {
	t.Helper()
	gcc, err := exec.LookPath("gcc")
	if err != nil {
		t.Skip("no gcc")
	}
	program := filepath.Join(t.TempDir(), "cloud")
	// Without contraction, so that it rounds as the Go does.
	out, err := exec.Command(gcc, "-O3", "-ffp-contract=off", "-o", program, "testdata/cloud.c", "-lm").CombinedOutput()
	if err != nil {
		t.Fatalf("gcc: %v\n%s", err, out)
	}
	return program
}

func yardstick(t testing.TB, members int) *Cloud {
	t.Helper()
	at := time.Date(2026, 6, 1, 10, 0, 0, 0, time.UTC)
	person, err := ClassByID(DefaultClass)
	if err != nil {
		t.Fatal(err)
	}
	w, err := weather.NewWinds(
		weather.Sample{From: at, Velocity: nav.BlowingFrom(240, 15), Source: weather.Instrument},
		weather.Sample{From: at.Add(2 * time.Hour), Velocity: nav.BlowingFrom(260, 20), Source: weather.Instrument})
	if err != nil {
		t.Fatal(err)
	}
	c, err := weather.NewCurrents(
		weather.Sample{From: at, Velocity: nav.Towards(100, 1.2), Source: weather.Person},
		weather.Sample{From: at.Add(3 * time.Hour), Velocity: nav.Towards(280, 0.8), Source: weather.Person})
	if err != nil {
		t.Fatal(err)
	}
	fall := Case{Start: Start{Position: nav.PositionFromDegrees(50, -1)}, FellFrom: at, FellTo: at, Class: person, Winds: w, Currents: c}
	cl, err := NewCloud(fall, Options{Members: members, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	return cl
}

// problem writes a fresh cloud and its forcing for the C loop.
func problem(t testing.TB, cl *Cloud, steps int) string {
	t.Helper()
	var b bytes.Buffer
	k := cl.coefficients()
	put := func(v any) {
		if err := binary.Write(&b, binary.NativeEndian, v); err != nil {
			t.Fatal(err)
		}
	}
	put([]float64{float64(cl.N()), float64(steps), k.dt, k.keep, k.kick, float64(k.jibe)})
	for _, c := range normals() {
		put([]float64{c.c0, c.c1})
	}
	for s := range steps {
		f := cl.forcing(cl.c, s)
		put([]float64{f.wind.EastMs, f.wind.NorthMs, f.windSD, f.current.EastMs, f.current.NorthMs, f.currentSD})
	}
	put(cl.m.key)
	m := &cl.m
	for _, f := range [][]float64{
		m.east, m.north, m.windE, m.windN, m.currentE, m.currentN, m.pullE, m.pullN, m.drawE, m.drawN,
		m.downA, m.downB, m.sideA, m.sideB, m.otherA, m.otherB,
	} {
		put(f)
	}
	name := filepath.Join(t.TempDir(), "problem")
	if err := os.WriteFile(name, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return name
}

func runC(t testing.TB, program, file string, times int) (seconds, meanE, meanN float64) {
	t.Helper()
	out, err := exec.Command(program, file, fmt.Sprint(times)).Output()
	if err != nil {
		t.Fatal(err)
	}
	if _, err := fmt.Sscan(string(out), &seconds, &meanE, &meanN); err != nil {
		t.Fatal(err)
	}
	return seconds, meanE, meanN
}

// The steps of the cloud give what a loop written in C gives.
func TestStepsAgreeWithC(t *testing.T) {
	const steps = 360
	program := plainC(t)
	cl := yardstick(t, 300)
	_, e, n := runC(t, program, problem(t, cl, steps), 1)
	if err := cl.Advance(cl.begin.Add(steps * time.Minute)); err != nil {
		t.Fatal(err)
	}
	s := cl.Spread()
	// Where this machine fuses multiply and add, each of 360 steps rounds
	// differently by 2^-52 of some 10 km at most.
	tol := steps * 1e4 * 0x1p-52 * 10
	if math.Abs(s.Mean.EastM-e) > tol || math.Abs(s.Mean.NorthM-n) > tol {
		t.Errorf("mean %v %v, in C %v %v", s.Mean.EastM, s.Mean.NorthM, e, n)
	}
}

// BenchmarkBesideC is 10,000 members for 6 h in steps of a minute, here and in
// plain C in the same run: the least of several turns of each, as other work on
// the machine only ever adds.
func BenchmarkBesideC(b *testing.B) {
	const steps, turns = 360, 5
	program := plainC(b)
	cl := yardstick(b, 10_000)
	file := problem(b, cl, steps)
	least := map[string]float64{"go": math.Inf(1), "c": math.Inf(1)}
	for b.Loop() {
		for range turns {
			cl.restart(cl.c)
			begin := time.Now()
			for cl.steps < steps {
				cl.run(min(chunk, steps-cl.steps))
			}
			least["go"] = min(least["go"], time.Since(begin).Seconds())
			c, _, _ := runC(b, program, file, 1)
			least["c"] = min(least["c"], c)
		}
	}
	const all = 10_000 * steps
	b.ReportMetric(least["go"]*1e9/all, "go-ns/step")
	b.ReportMetric(least["c"]*1e9/all, "c-ns/step")
	b.ReportMetric(least["go"]/least["c"], "go/c")
}
