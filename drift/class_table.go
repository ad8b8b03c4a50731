package drift

import (
	_ "embed"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"sync"

	"wakeback/drift/nav"
)

//go:embed leeway.csv
var leewayCSV string

// leewaySource is the source of a row that names none.
const leewaySource = "Allen and Plourde 1999, CG-D-08-99, table 8-1 (from memory)"

// jibesPerHour is the usual rate of jibing, 4 % an hour (Allen 2005; Breivik
// and Allen 2008; from memory).
const jibesPerHour = 0.04

var parsedClasses = sync.OnceValues(func() ([]Class, error) { return parseClasses(leewayCSV) })

// Classes are all classes of the table, in its order. The error can only come
// from a row filled in wrongly.
func Classes() ([]Class, error) {
	classes, err := parsedClasses()
	return slices.Clone(classes), err
}

// tableColumns is how many columns a row has.
const tableColumns = 19

func parseClasses(text string) ([]Class, error) {
	var classes []Class
	header := true
	for i, line := range strings.Split(text, "\n") {
		line = strings.TrimSpace(line)
		if line == "" || line[0] == '#' {
			continue
		}
		if header {
			header = false
			continue
		}
		c, err := parseClass(strings.Split(line, ","))
		if err != nil {
			return nil, fmt.Errorf("leeway table line %d: %w", i+1, err)
		}
		if slices.ContainsFunc(classes, func(o Class) bool { return o.ID == c.ID }) {
			return nil, fmt.Errorf("leeway table line %d: %q is there already", i+1, c.ID)
		}
		classes = append(classes, c)
	}
	return classes, nil
}

// row reads the cells of a line and keeps the first error.
type row struct {
	cells []string
	err   error
}

// opt is a number that may be left out, times unit.
func (r *row) opt(column int, unit float64) nav.Opt[float64] {
	cell := r.cells[column]
	if cell == "" {
		return nav.None[float64]()
	}
	v, err := strconv.ParseFloat(cell, 64)
	if (err != nil || !finite(v)) && r.err == nil {
		r.err = fmt.Errorf("column %d: %q: expected a number", column+1, cell)
	}
	return nav.Some(v * unit)
}

func (r *row) number(column int, unit float64) float64 {
	v, ok := r.opt(column, unit).Get()
	if !ok && r.err == nil {
		r.err = fmt.Errorf("column %d is empty: expected a number", column+1)
	}
	return v
}

const (
	percent = 0.01
	cmPerS  = 0.01
)

func (r *row) regression(column int) Regression {
	return Regression{r.number(column, percent), r.number(column+1, cmPerS), r.number(column+2, cmPerS)}
}

func parseClass(cells []string) (Class, error) {
	if len(cells) != tableColumns {
		return Class{}, fmt.Errorf("%d columns, expected %d", len(cells), tableColumns)
	}
	r := row{cells: cells}
	c := Class{
		ID: cells[0], ReportID: cells[1], Object: cells[2],
		Slope: r.number(3, percent), OffsetMs: r.number(4, nav.MsPerKn), DivergenceDeg: r.number(5, 1),
		WindMinMs: r.opt(15, 1), WindMaxMs: r.opt(16, 1), JibesPerHour: r.opt(17, percent).Or(jibesPerHour),
		Source: cells[18],
	}
	if strings.Join(cells[6:15], "") != "" {
		c.Components = nav.Some(Components{r.regression(6), r.regression(9), r.regression(12)})
	}
	if c.Source == "" {
		c.Source = leewaySource
	}
	if r.err == nil {
		r.err = c.Validate()
	}
	return c, r.err
}

// Validate returns an error that wraps [ErrClass] when the figures of a class
// cannot be.
func (c Class) Validate() error {
	fail := func(what string) error { return fmt.Errorf("%w: %q: %s", ErrClass, clip(c.ID), what) }
	k := c.Components.Or(Components{})
	switch {
	case c.ID == "":
		return fail("expected an id")
	case !(c.Slope >= 0 && c.Slope < 0.2):
		return fail("slope: expected a share of the wind from 0 to 0.2")
	case !(c.OffsetMs > -1 && c.OffsetMs < 1):
		return fail("offset: expected less than 1 m/s either way")
	case !(c.DivergenceDeg >= 0 && c.DivergenceDeg <= 90):
		return fail("divergence: expected 0 to 90 degrees")
	case !(c.JibesPerHour >= 0 && c.JibesPerHour <= 60):
		return fail("jibes: expected 0 to 60 an hour")
	case !(k.Downwind.SyxMs >= 0 && k.Right.SyxMs >= 0 && k.Left.SyxMs >= 0):
		return fail("standard error: expected none below zero")
	}
	return nil
}
