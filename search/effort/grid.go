package effort

import (
	"errors"
	"math"

	"wakeback/drift/nav"
)

// Grid is the exposure over a rectangle of the datum frame, in square cells.
type Grid struct {
	SouthWest nav.Offset
	CellM     float64
	Columns   int
	Rows      int
	exposure  []float64 // row by row from the south-west
}

// ErrGrid is returned for a grid that cannot be.
var ErrGrid = errors.New("a grid needs cells of more than nothing, and up to 400 by 400 of them")

// maxCells bounds a side of the grid; our choice: a phone's screen shows no more.
const maxCells = 400

// NewGrid makes an empty grid.
func NewGrid(southWest nav.Offset, cellM float64, columns, rows int) (*Grid, error) {
	if !(cellM > 0) || columns < 1 || rows < 1 || columns > maxCells || rows > maxCells {
		return nil, ErrGrid
	}
	return &Grid{SouthWest: southWest, CellM: cellM, Columns: columns, Rows: rows, exposure: make([]float64, columns*rows)}, nil
}

// Add counts a run in every cell, at the cell's middle.
func (g *Grid) Add(r Run) {
	for row := range g.Rows {
		for column := range g.Columns {
			g.exposure[row*g.Columns+column] += r.Exposure(g.middle(column, row))
		}
	}
}

func (g *Grid) middle(column, row int) nav.Offset {
	return g.SouthWest.Add(nav.Offset{EastM: (float64(column) + 0.5) * g.CellM, NorthM: (float64(row) + 0.5) * g.CellM})
}

// POD is the chance that a person in the cell was seen.
func (g *Grid) POD(column, row int) float64 {
	return -math.Expm1(-g.exposure[row*g.Columns+column])
}

// MeanPOD is the mean over all cells.
func (g *Grid) MeanPOD() float64 {
	var sum float64
	for _, e := range g.exposure {
		sum -= math.Expm1(-e)
	}
	return sum / float64(len(g.exposure))
}
