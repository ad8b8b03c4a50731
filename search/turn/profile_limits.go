package turn

import "fmt"

// Limits of the Standards for Ship Manoeuvrability, IMO resolution
// MSC.137(76), 5.3.1 and 5.3.4, in ship's lengths. They are written for ships
// of 100 m and over; small craft do far better, so they serve as a ceiling.
const (
	advanceLimitL  = 4.5
	tacticalLimitL = 5.0
	stoppingLimitL = 15.0
)

// tightestL is the turning diameter in lengths below which a figure is more
// likely a radius or in other units; our choice.
const tightestL = 1.0

// Warning is a figure of a profile that is unlikely.
type Warning struct {
	Field string `json:"field"`
	Text  string `json:"text"`
}

// Warnings compares a profile with the standards' limits. A warning is a
// question to the crew and never a refusal.
func (p Profile) Warnings() []Warning {
	var out []Warning
	above := func(field string, v, limitL float64) {
		if l := v / p.LengthM; l > limitL {
			out = append(out, Warning{field, fmt.Sprintf("%.1f lengths, and a ship of 100 m is allowed %g (IMO MSC.137(76))", l, limitL)})
		}
	}
	for i, c := range p.Circles {
		at := fmt.Sprintf("circles[%d].", i)
		// A planing vessel at speed turns wider by lengths than any ship.
		if p.Kind != PlaningMotor {
			above(at+"diameter_m", c.DiameterM.Or(0), tacticalLimitL)
			above(at+"advance_m", c.AdvanceM.Or(0), advanceLimitL)
		}
		if d, ok := c.DiameterM.Get(); ok && d < tightestL*p.LengthM {
			out = append(out, Warning{at + "diameter_m", "less than her length: is it the radius?"})
		}
	}
	above("stopping_m", p.StoppingM.Or(0), stoppingLimitL)
	if cruise, ok := p.CruisingKn.Get(); ok && p.SearchKn.Or(0) > cruise {
		out = append(out, Warning{"search_kn", "more than the cruising speed"})
	}
	return out
}
