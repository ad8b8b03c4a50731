package drift_test

import (
	"fmt"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// Someone went overboard at ten; where are they at half past?
func ExampleDatumAt() {
	fell := time.Date(2026, 6, 1, 10, 0, 0, 0, time.UTC)
	winds, _ := weather.NewWinds(weather.Sample{From: fell, Velocity: nav.BlowingFrom(240, 15), Source: weather.Instrument})
	currents, _ := weather.NewCurrents(weather.Sample{From: fell, Velocity: nav.Towards(100, 1.2), Source: weather.Person})
	person, _ := drift.ClassByID(drift.DefaultClass)
	c := drift.Case{
		Start:    drift.Start{Position: nav.PositionFromDegrees(50, -1), Error95M: nav.Some(30.0)},
		FellFrom: fell, FellTo: fell, Class: person, Winds: winds, Currents: currents,
	}
	d, err := drift.DatumAt(c, fell.Add(30*time.Minute))
	if err != nil {
		fmt.Println(err)
		return
	}
	p, _ := d.Point.Get()
	fmt.Printf("%v, moved %.2f NM, within %.1f NM in 95 of 100 cases\n", p, d.Shift.RangeM()/nav.MetresPerNM, d.Error95M/nav.MetresPerNM)
	// Output: 49°59.955'N 000°58.927'W, moved 0.69 NM, within 0.3 NM in 95 of 100 cases
}
