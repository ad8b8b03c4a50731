package weather

import (
	"fmt"
	"math"
)

// RoughnessM is the aerodynamic roughness of the open sea, 0.2 mm: the class
// "sea" of the usual roughness classes (from memory).
const RoughnessM = 0.0002

// powerExponent is that of the power law over the open sea in near-neutral
// air (Hsu, Meindl and Gilhousen 1994, J. Appl. Meteorol. 33; from memory).
const powerExponent = 0.11

// Heights the reduction is used for, in metres. Our choice: below, the waves
// rule; above, no vessel's masthead.
const (
	minHeightM = 1
	maxHeightM = 100
)

// ErrHeight is returned for a sensor height that cannot be one.
var ErrHeight = fmt.Errorf("%w: height of the wind sensor out of %d to %d m above the water", ErrSample, minHeightM, maxHeightM)

// LogFactor turns a true wind at heightM above the water, 1 to 100, into that
// at 10 m by the logarithmic law: 0.964 at 15 m. It holds in near-neutral air
// over open sea, not in warm air over cold water nor in the lee of land.
func LogFactor(heightM float64) (float64, error) {
	if !(heightM >= minHeightM && heightM <= maxHeightM) {
		return 1, ErrHeight
	}
	return math.Log(10/RoughnessM) / math.Log(heightM/RoughnessM), nil
}

// PowerFactor is [LogFactor] by the power law: 0.956 at 15 m. The two differ
// by less than two in a hundred above 3 m; sensor, heel and gusts by more.
func PowerFactor(heightM float64) (float64, error) {
	if !(heightM >= minHeightM && heightM <= maxHeightM) {
		return 1, ErrHeight
	}
	return math.Pow(10/heightM, powerExponent), nil
}
