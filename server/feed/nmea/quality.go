package nmea

// Quality says how a position was found, the worst first, so that a greater one
// is a better one.
type Quality uint8

// The qualities.
const (
	NoFix        Quality = iota // there is no position
	Simulated                   // invented by the instrument: simulator mode
	Manual                      // typed in by a person
	Estimated                   // the receiver's own dead reckoning
	Autonomous                  // satellites alone
	Differential                // satellites with corrections
	Precise                     // satellites, no deliberate degradation (PPS)
	FloatRTK                    // carrier phase, ambiguities not fixed
	RTK                         // carrier phase, fixed
)

var qualityNames = [...]string{
	"no fix", "simulated", "manual", "estimated", "autonomous",
	"differential", "precise", "float rtk", "rtk",
}

// String is the quality as a word.
func (q Quality) String() string {
	if int(q) < len(qualityNames) {
		return qualityNames[q]
	}
	return "unknown"
}

// MarshalText writes the quality as its word.
func (q Quality) MarshalText() ([]byte, error) { return []byte(q.String()), nil }

// UsesSatellites says that satellites were seen for this very position.
func (q Quality) UsesSatellites() bool { return q >= Autonomous }

// qualityLetters are the mode indicators of RMC, GLL, VTG and GNS.
const qualityLetters = "ADEFMNPRS"

func qualityOfLetter(c byte) Quality {
	switch c {
	case 'A':
		return Autonomous
	case 'D':
		return Differential
	case 'E':
		return Estimated
	case 'F':
		return FloatRTK
	case 'M':
		return Manual
	case 'P':
		return Precise
	case 'R':
		return RTK
	case 'S':
		return Simulated
	}
	return NoFix
}

// qualityOfGGA maps the quality digit of GGA (gpsd NMEA.adoc, GGA field 6).
var qualityOfGGA = [...]Quality{
	0: NoFix, 1: Autonomous, 2: Differential, 3: Precise, 4: RTK,
	5: FloatRTK, 6: Estimated, 7: Manual, 8: Simulated,
}

// statusAndMode reads nothing; it joins a status letter (A or V) with a mode
// letter that older talkers do not send. V, or the absence of a status, is no
// fix whatever the mode says.
func statusAndMode(status, mode byte) Quality {
	if status != 'A' {
		return NoFix
	}
	if mode == 0 {
		return Autonomous
	}
	return qualityOfLetter(mode)
}
