package weather

import (
	_ "embed"
	"fmt"
	"math"
	"strconv"
	"strings"

	"wakeback/drift/nav"
)

// Force is a force on the Beaufort scale, 0 to 12.
type Force int

// ForceInfo is a row of the scale. Wave heights are the probable and the
// highest probable one in the open sea, with a fully risen sea; absent where
// the table has none.
type ForceInfo struct {
	Force           Force
	Name            string
	MinKn           float64
	MaxKn           nav.Opt[float64]
	MinMs           float64
	MaxMs           nav.Opt[float64]
	WaveM, MaxWaveM nav.Opt[float64]
}

//go:embed beaufort.csv
var beaufortCSV string

// Beaufort is the scale, force 0 first, with its source. The error can only
// come from a damaged build.
func Beaufort() (rows []ForceInfo, source string, err error) {
	lines := strings.Split(strings.TrimSpace(beaufortCSV), "\n")
	for i, line := range lines[2:] {
		cells := strings.Split(line, ",")
		if len(cells) != 8 {
			return nil, "", fmt.Errorf("beaufort.csv line %d: %d columns, expected 8", i+3, len(cells))
		}
		var v [8]nav.Opt[float64]
		for c, cell := range cells {
			if c == 1 || cell == "" {
				continue
			}
			f, err := strconv.ParseFloat(cell, 64)
			if err != nil {
				return nil, "", fmt.Errorf("beaufort.csv line %d column %d: %w", i+3, c+1, err)
			}
			v[c] = nav.Some(f)
		}
		rows = append(rows, ForceInfo{
			Force: Force(v[0].Or(0)), Name: cells[1], MinKn: v[2].Or(0), MaxKn: v[3],
			MinMs: v[4].Or(0), MaxMs: v[5], WaveM: v[6], MaxWaveM: v[7],
		})
	}
	return rows, strings.TrimPrefix(lines[0], "# "), nil
}

// beaufortFactor and exponent: v = 0.836 B^1.5 m/s (World Meteorological
// Organization 1946; from memory).
const beaufortFactor = 0.836

// Ms is the speed in m/s that stands for a force: 0.836 B^1.5.
func (f Force) Ms() float64 { return beaufortFactor * math.Pow(float64(f), 1.5) }

// SDMs is the standard deviation of a wind estimated as this force: what the
// next force is away. Our choice, because people are commonly one force off.
func (f Force) SDMs() float64 { return math.Max((f+1).Ms()-f.Ms(), beaufortFactor) }

// firstMs is where each force begins, m/s: the limits of the table, which
// leaves a gap of a tenth between one force and the next.
var firstMs = [...]float64{0, 0.3, 1.6, 3.4, 5.5, 8.0, 10.8, 13.9, 17.2, 20.8, 24.5, 28.5, 32.7}

// ForceOf is the force of a wind at 10 m of speedMs, taken to a tenth as the
// table is; 12 has no upper end. A speed that is not a number, or negative,
// has none.
func ForceOf(speedMs float64) nav.Opt[Force] {
	if !(speedMs >= 0) {
		return nav.None[Force]()
	}
	f := Force(0)
	for i, first := range firstMs {
		if math.Round(speedMs*10) >= math.Round(first*10) {
			f = Force(i)
		}
	}
	return nav.Some(f)
}
