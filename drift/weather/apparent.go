package weather

import "wakeback/drift/nav"

// TrueWind is the velocity of the air from an apparent wind, which blows from
// relative to the bow at speedMs, on a vessel that points to heading and moves
// with motion. With the motion through the water it is the wind relative to
// the water, which is what drives leeway and waves; with that over the ground
// it is the wind over the ground, which a forecast gives.
func TrueWind(relative nav.RelativeDeg, speedMs float64, heading nav.TrueDeg, motion nav.Velocity) nav.Velocity {
	from := heading.Add(float64(relative))
	return nav.BlowingFrom(from, speedMs/nav.MsPerKn).Add(motion)
}

// ApparentWind is what [TrueWind] undoes: the relative direction the wind is
// felt from, absent when none is felt, and its speed.
func ApparentWind(wind nav.Velocity, heading nav.TrueDeg, motion nav.Velocity) (nav.Opt[nav.RelativeDeg], float64) {
	felt := wind.Sub(motion)
	to, ok := felt.Direction().Get()
	if !ok {
		return nav.None[nav.RelativeDeg](), felt.SpeedMs()
	}
	return nav.Some(to.Reciprocal().RelativeTo(heading)), felt.SpeedMs()
}

// ThroughWater is the motion of a vessel through the water: along its heading,
// turned by its own leeway angle, positive to starboard.
func ThroughWater(heading nav.TrueDeg, leewayDeg, stwKn float64) nav.Velocity {
	return nav.Towards(heading.Add(leewayDeg), stwKn)
}
