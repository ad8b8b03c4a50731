package drift

import (
	"fmt"
	"time"
)

// staleAfter is when a single observation is pointed out as old. Our choice,
// because a tide is noticeably another one an hour later.
const staleAfter = time.Hour

// caution collects what has to be said beside the figures.
func (d *Datum) caution(c Case) {
	say := func(format string, a ...any) { d.Cautions = append(d.Cautions, fmt.Sprintf(format, a...)) }
	if d.BeforeFall {
		say("This moment is not after the fall: nothing has drifted yet.")
	}
	if c.Start.Corridor() {
		say("Nobody saw the fall: the datum is a stretch, not a point.")
	}
	if c.Winds.Len() == 0 {
		say("No wind is known. This is not calm: say what the wind is.")
	}
	if c.Currents.Len() == 0 && !c.WindDriven {
		say("No current is known. This is not slack: say what the stream does, or watch a marker.")
	}
	if w, ok := d.Wind.Get(); ok && w.Age > staleAfter {
		say("The wind was last observed %d minutes ago.", int(w.Age.Minutes()))
	}
	if v, ok := d.Current.Get(); ok && v.Age > staleAfter {
		say("The current was last observed %d minutes ago.", int(v.Age.Minutes()))
	}
	for _, w := range d.pull.winds {
		if r := c.Class.RangeOf(w.Velocity.SpeedMs()); r == RangeAbove || r == RangeBelow {
			say("The wind was %s.", r)
			break
		}
	}
	if c.Class.Derived() {
		say("Sideways leeway is derived from the published divergence; the spread of the speed is an assumption.")
	}
}
