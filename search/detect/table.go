package detect

import (
	_ "embed"
	"errors"
	"fmt"
	"strconv"
	"strings"
)

// Table holds sweep widths by object and visibility.
type Table struct {
	Name   string
	Source string
	visNM  []float64
	rows   []row
}

type row struct {
	object string
	width  []float64
}

//go:embed small_boat.csv
var smallBoatCSV string

//go:embed merchant_ship.csv
var merchantShipCSV string

// SmallBoat is the table for a small boat that searches.
func SmallBoat() (Table, error) { return parseTable("small boat", smallBoatCSV) }

// MerchantShip is the table for a merchant ship that searches; its figures
// are from memory. For a person in the water it gives twice what the table for
// a small boat gives: the eye is higher.
func MerchantShip() (Table, error) { return parseTable("merchant ship", merchantShipCSV) }

// parseTable reads a table: a source line, the columns, a row for each object.
func parseTable(name, text string) (Table, error) {
	lines := strings.Split(strings.TrimSpace(text), "\n")
	if len(lines) < 3 || !strings.HasPrefix(lines[0], "# ") {
		return Table{}, fmt.Errorf("table %s: expected a source line, the columns and rows", name)
	}
	t := Table{Name: name, Source: lines[0][2:]}
	for _, column := range strings.Split(lines[1], ",")[1:] {
		vis, err := strconv.ParseFloat(strings.TrimSuffix(strings.TrimPrefix(column, "vis_"), "nm"), 64)
		if err != nil {
			return Table{}, fmt.Errorf("table %s: column %q: %w", name, column, err)
		}
		t.visNM = append(t.visNM, vis)
	}
	for _, line := range lines[2:] {
		cells := strings.Split(line, ",")
		if len(cells) != len(t.visNM)+1 {
			return Table{}, fmt.Errorf("table %s: %q has %d columns, want %d", name, line, len(cells), len(t.visNM)+1)
		}
		r := row{object: cells[0]}
		for _, cell := range cells[1:] {
			w, err := strconv.ParseFloat(cell, 64)
			if err != nil {
				return Table{}, fmt.Errorf("table %s: %s: %w", name, r.object, err)
			}
			r.width = append(r.width, w)
		}
		t.rows = append(t.rows, r)
	}
	return t, nil
}

// Objects are the objects of the table, in its order.
func (t Table) Objects() []string {
	out := make([]string, len(t.rows))
	for i, r := range t.rows {
		out[i] = r.object
	}
	return out
}

// The refusals of a table.
var (
	ErrObject     = errors.New("the table has no such object")
	ErrVisibility = errors.New("the table has no figure for this visibility")
)

// Uncorrected looks up the sweep width in nautical miles, interpolating
// linearly between the columns, which the source of the method allows (JP
// 3-50 National SAR Manual vol. I, appendix D: "interpolate as necessary").
// Beyond the last column the last counts: a wider view does not show more.
// Below the first there is no figure: ErrVisibility.
func (t Table) Uncorrected(object string, visNM float64) (float64, error) {
	for _, r := range t.rows {
		if r.object == object {
			return t.interpolate(r, visNM)
		}
	}
	return 0, fmt.Errorf("%w: %q; it has %s", ErrObject, object, strings.Join(t.Objects(), ", "))
}

func (t Table) interpolate(r row, visNM float64) (float64, error) {
	first, last := t.visNM[0], t.visNM[len(t.visNM)-1]
	if !(visNM >= first) {
		return 0, fmt.Errorf("%w: %.2g nm; the %s table begins at %g nm", ErrVisibility, visNM, t.Name, first)
	}
	if visNM >= last {
		return r.width[len(r.width)-1], nil
	}
	i := 0
	for t.visNM[i+1] < visNM {
		i++
	}
	part := (visNM - t.visNM[i]) / (t.visNM[i+1] - t.visNM[i])
	return r.width[i] + part*(r.width[i+1]-r.width[i]), nil
}
