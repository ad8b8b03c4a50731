// Command dump makes one cloud and prints it, to compare machines. With "time"
// it prints the least milliseconds of several runs of 10,000 members over 6 h
// instead.
package main

import (
	"fmt"
	"math"
	"os"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

func main() {
	if err := run(len(os.Args) > 1 && os.Args[1] == "time"); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(timed bool) error {
	c, err := fall()
	if err != nil {
		return err
	}
	if timed {
		return measure(c)
	}
	// A window, so that members leave at their own times, and some seconds over.
	c.FellTo = c.FellFrom.Add(20 * time.Minute)
	cl, err := drift.NewCloud(c, drift.Options{Members: 500, Seed: 42})
	if err != nil {
		return err
	}
	if err := cl.Advance(c.FellFrom.Add(6*time.Hour + 13*time.Second)); err != nil {
		return err
	}
	east, north := cl.Points()
	for i := range east {
		fmt.Printf("member %x %x\n", math.Float64bits(east[i]), math.Float64bits(north[i]))
	}
	return nil
}

// fall is a wind and a current that each change once.
func fall() (drift.Case, error) {
	at := time.Date(2026, 6, 1, 10, 0, 0, 0, time.UTC)
	person, err := drift.ClassByID(drift.DefaultClass)
	if err != nil {
		return drift.Case{}, err
	}
	winds, err := weather.NewWinds(
		weather.Sample{From: at, Velocity: nav.BlowingFrom(240, 15), Source: weather.Instrument},
		weather.Sample{From: at.Add(2 * time.Hour), Velocity: nav.BlowingFrom(260, 20), Source: weather.Instrument})
	if err != nil {
		return drift.Case{}, err
	}
	currents, err := weather.NewCurrents(
		weather.Sample{From: at, Velocity: nav.Towards(100, 1.2), Source: weather.Person},
		weather.Sample{From: at.Add(3 * time.Hour), Velocity: nav.Towards(280, 0.8), Source: weather.Person})
	return drift.Case{
		Start: drift.Start{Position: nav.PositionFromDegrees(50, -1)}, FellFrom: at, FellTo: at,
		Class: person, Winds: winds, Currents: currents,
	}, err
}

func measure(c drift.Case) error {
	least := math.Inf(1)
	for range 7 {
		begin := time.Now()
		cl, err := drift.NewCloud(c, drift.Options{Members: 10_000, Seed: 1})
		if err != nil {
			return err
		}
		if err := cl.Advance(c.FellFrom.Add(6 * time.Hour)); err != nil {
			return err
		}
		least = min(least, float64(time.Since(begin).Microseconds())/1000)
	}
	fmt.Println(least)
	return nil
}
