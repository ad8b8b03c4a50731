package drift

import (
	_ "embed"
	"fmt"
	"strings"
	"sync"
	"time"

	"wakeback/drift/nav"
)

//go:embed coldwater.csv
var coldwaterCSV string

// coldRow is a row of the table.
type coldRow struct {
	what       string
	minC, maxC float64
	flotation  Flotation // "any" for all
	low, high  nav.Opt[float64]
	source     string
}

var coldRows = sync.OnceValues(func() ([]coldRow, error) { return parseCold(coldwaterCSV) })

func parseCold(text string) ([]coldRow, error) {
	var rows []coldRow
	for i, line := range strings.Split(strings.TrimSpace(text), "\n") {
		if i < 2 || line == "" { // the note, the column names
			continue
		}
		r := row{cells: strings.Split(line, ",")}
		if len(r.cells) != 7 {
			return nil, fmt.Errorf("table line %d: %d columns, expected 7", i+1, len(r.cells))
		}
		rows = append(rows, coldRow{
			what: r.cells[0], minC: r.number(1, 1), maxC: r.number(2, 1), flotation: Flotation(r.cells[3]),
			low: r.opt(4, 1), high: r.opt(5, 1), source: r.cells[6],
		})
		if r.err != nil {
			return nil, fmt.Errorf("table line %d: %w", i+1, r.err)
		}
	}
	return rows, nil
}

// holds reports whether a row is about such flotation. Of someone of whom it is
// not known, every row may be true.
func (r coldRow) holds(f Flotation) bool {
	switch {
	case r.flotation == "any":
		return true
	case f == FlotationNone, f == FlotationWorn:
		return r.flotation == f
	case f == SuitWorn:
		return r.flotation == SuitWorn || r.flotation == FlotationWorn
	}
	return true
}

func (r coldRow) point() bool { return r.minC == r.maxC }

func (r coldRow) figure(low, high nav.Opt[float64]) Figure {
	return Figure{r.what, Band{minutes(low), minutes(high)}, r.source}
}

func minutes(m nav.Opt[float64]) nav.Opt[time.Duration] {
	v, ok := m.Get()
	if !ok {
		return nav.None[time.Duration]()
	}
	return nav.Some(time.Duration(v * float64(time.Minute)))
}

// figuresOf are what the rows say of a temperature.
func figuresOf(rows []coldRow, tempC float64, f Flotation) []Figure {
	var out []Figure
	for i, r := range rows {
		switch {
		case !r.holds(f):
		case !r.point():
			if tempC > r.minC && tempC <= r.maxC {
				out = append(out, r.figure(r.low, r.high))
			}
		case tempC == r.minC:
			out = append(out, r.figure(r.low, r.high))
		case i+1 < len(rows) && joined(r, rows[i+1]) && tempC > r.minC && tempC < rows[i+1].minC:
			share := (tempC - r.minC) / (rows[i+1].minC - r.minC)
			out = append(out, r.figure(between(r.low, rows[i+1].low, share), between(r.high, rows[i+1].high, share)))
		}
	}
	return out
}

// joined reports whether two points belong to one line.
func joined(a, b coldRow) bool {
	return b.point() && a.source == b.source && a.what == b.what && a.flotation == b.flotation
}

func between(a, b nav.Opt[float64], share float64) nav.Opt[float64] {
	x, ok := a.Get()
	y, also := b.Get()
	if !ok || !also {
		return nav.None[float64]()
	}
	return nav.Some(x + share*(y-x))
}
