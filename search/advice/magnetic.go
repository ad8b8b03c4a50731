package advice

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/sky"
)

// variation fills in the magnetic variation here and now, or the word why
// there is none: no variation is better than a wrong one.
func (f *Frame) variation(p nav.Position, at time.Time) {
	r, err := sky.Variation(p, 0, at)
	if err != nil {
		f.VariationNote = err.Error()
		return
	}
	f.VariationDeg = r.Usable()
	if r.State != sky.FieldGood {
		f.VariationNote = r.State.String()
	}
}
