package nmea

import "wakeback/drift/nav"

// Body is what a sentence says: a pointer to one of the types of this package
// that are named for their formatter.
type Body interface{ Formatter() string }

// RMC is the recommended minimum: position, course, speed, date and time.
type RMC struct {
	Time     nav.Opt[TimeOfDay]
	Quality  Quality
	Position nav.Opt[nav.Position] // absent without a fix, as are speed and course
	SogKn    nav.Opt[float64]
	CogTrue  nav.Opt[nav.TrueDeg]
	Date     nav.Opt[Date]
	// Variation is as the receiver sent it, from a model or a setting of its own.
	Variation nav.Opt[nav.VariationDeg]
}

// GGA is a position with its quality.
type GGA struct {
	Time       nav.Opt[TimeOfDay]
	Position   nav.Opt[nav.Position] // absent without a fix
	Quality    Quality
	Satellites nav.Opt[int] // used for the fix
	HDOP       nav.Opt[float64]
	AltitudeM  nav.Opt[float64] // antenna above mean sea level
	GeoidM     nav.Opt[float64] // geoid above the ellipsoid
}

// GLL is a position and its time.
type GLL struct {
	Position nav.Opt[nav.Position] // absent without a fix
	Time     nav.Opt[TimeOfDay]
	Quality  Quality
}

// GNS is a position from several satellite systems at once.
type GNS struct {
	Time       nav.Opt[TimeOfDay]
	Position   nav.Opt[nav.Position] // absent without a fix
	Quality    Quality               // the best among the systems
	Satellites nav.Opt[int]
	HDOP       nav.Opt[float64]
	AltitudeM  nav.Opt[float64]
	GeoidM     nav.Opt[float64]
}

// VTG is course and speed over the ground.
type VTG struct {
	CogTrue nav.Opt[nav.TrueDeg]
	CogMag  nav.Opt[nav.MagneticDeg]
	SogKn   nav.Opt[float64]
	Quality Quality
}

// HDG is a magnetic compass. SensorMag is what the compass reads; with the
// deviation added, where one is sent, it is the magnetic heading.
type HDG struct {
	SensorMag    nav.Opt[nav.MagneticDeg]
	DeviationDeg nav.Opt[float64] // east positive
	Variation    nav.Opt[nav.VariationDeg]
}

// HeadingMag is the compass reading with its deviation, if one is sent.
func (h *HDG) HeadingMag() nav.Opt[nav.MagneticDeg] {
	m, ok := h.SensorMag.Get()
	if !ok {
		return nav.None[nav.MagneticDeg]()
	}
	return nav.Some(nav.MagneticDeg(nav.NormDeg(float64(m) + h.DeviationDeg.Or(0))))
}

// HDT is the heading from true north.
type HDT struct{ HeadingTrue nav.Opt[nav.TrueDeg] }

// HDM is the heading from magnetic north.
type HDM struct{ HeadingMag nav.Opt[nav.MagneticDeg] }

// VHW is heading and speed through the water.
type VHW struct {
	HeadingTrue nav.Opt[nav.TrueDeg]
	HeadingMag  nav.Opt[nav.MagneticDeg]
	StwKn       nav.Opt[float64]
}

// VBW is speed in two axes, ahead and to starboard positive. Speeds whose
// status is not A are absent.
type VBW struct {
	WaterAheadKn, WaterStarboardKn   nav.Opt[float64]
	GroundAheadKn, GroundStarboardKn nav.Opt[float64]
}

// VDR is the set and drift of the current.
type VDR struct {
	SetTrue nav.Opt[nav.TrueDeg] // towards
	SetMag  nav.Opt[nav.MagneticDeg]
	DriftKn nav.Opt[float64]
}

// MWV is the wind as the bow sees it. Without status A all is absent.
type MWV struct {
	// Angle is where the wind comes from, seen from the bow.
	Angle nav.Opt[nav.RelativeDeg]
	// True says that the talker has taken the vessel's own speed out of it;
	// else the wind is apparent.
	True    bool
	SpeedKn nav.Opt[float64]
}

// MWD is the wind with respect to north.
type MWD struct {
	FromTrue nav.Opt[nav.TrueDeg]
	FromMag  nav.Opt[nav.MagneticDeg]
	SpeedKn  nav.Opt[float64]
}

// MTW is the temperature of the water.
type MTW struct{ WaterC nav.Opt[float64] }

// DPT is the depth.
type DPT struct {
	BelowTransducerM nav.Opt[float64]
	// OffsetM is what to add: positive from the water line down to the
	// transducer, negative from the transducer down to the keel.
	OffsetM nav.Opt[float64]
}

// ZDA is date and time.
type ZDA struct {
	Time nav.Opt[TimeOfDay]
	Date nav.Opt[Date]
}

// MOB is a person-overboard alarm of a system on board.
type MOB struct {
	Emitter    string // five hexadecimal digits, "" when unknown
	Status     MOBStatus
	Activation nav.Opt[TimeOfDay]
	// FromEmitter says that the position is the emitter's own; else it is the
	// vessel's at the activation. Absent when the talker reports an error.
	FromEmitter nav.Opt[bool]
	Date        nav.Opt[Date]
	Time        nav.Opt[TimeOfDay] // of the position
	Position    nav.Opt[nav.Position]
	CogTrue     nav.Opt[nav.TrueDeg]
	SogKn       nav.Opt[float64]
	MMSI        nav.Opt[uint32]
	BatteryLow  nav.Opt[bool] // absent when the talker reports an error
}

// MOBStatus is the state of a person-overboard system.
type MOBStatus byte

// The states, by their letters.
const (
	MOBActive   MOBStatus = 'A' // an emitter is activated
	MOBTest     MOBStatus = 'T' // a test: never an alarm
	MOBManual   MOBStatus = 'M' // a button was pressed
	MOBNotInUse MOBStatus = 'V' // nothing is active
	MOBError    MOBStatus = 'E' // the system is faulty
)

// VDM is the envelope of one AIS message or a part of one, from others (VDM) or
// from the own station (VDO).
type VDM struct {
	Own       bool
	Fragments int // of the whole message, 1 to 9
	Fragment  int // this one, from 1
	// Sequence ties the fragments together; absent for a message of one.
	Sequence nav.Opt[int]
	Channel  byte   // 'A', 'B', '1', '2', or 0 when not sent
	Payload  string // six-bit armour
	FillBits int    // unused bits at the end, 0 to 5
}

// Formatter names the sentence.
func (*RMC) Formatter() string { return "RMC" }

// Formatter names the sentence.
func (*GGA) Formatter() string { return "GGA" }

// Formatter names the sentence.
func (*GLL) Formatter() string { return "GLL" }

// Formatter names the sentence.
func (*GNS) Formatter() string { return "GNS" }

// Formatter names the sentence.
func (*VTG) Formatter() string { return "VTG" }

// Formatter names the sentence.
func (*HDG) Formatter() string { return "HDG" }

// Formatter names the sentence.
func (*HDT) Formatter() string { return "HDT" }

// Formatter names the sentence.
func (*HDM) Formatter() string { return "HDM" }

// Formatter names the sentence.
func (*VHW) Formatter() string { return "VHW" }

// Formatter names the sentence.
func (*VBW) Formatter() string { return "VBW" }

// Formatter names the sentence.
func (*VDR) Formatter() string { return "VDR" }

// Formatter names the sentence.
func (*MWV) Formatter() string { return "MWV" }

// Formatter names the sentence.
func (*MWD) Formatter() string { return "MWD" }

// Formatter names the sentence.
func (*MTW) Formatter() string { return "MTW" }

// Formatter names the sentence.
func (*DPT) Formatter() string { return "DPT" }

// Formatter names the sentence.
func (*ZDA) Formatter() string { return "ZDA" }

// Formatter names the sentence.
func (*MOB) Formatter() string { return "MOB" }

// Formatter names the sentence.
func (v *VDM) Formatter() string {
	if v.Own {
		return "VDO"
	}
	return "VDM"
}
