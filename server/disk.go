package server

import (
	"wakeback/server/store"
)

// disk is the store on disk, with what was found when it was opened.
type disk struct {
	*store.Store
	report store.Report
}

// Health says how the store is.
func (d disk) Health() Health {
	h := d.Store.Health()
	warnings := append([]string{}, d.report.Warnings...)
	if h.TrackProblem != "" {
		warnings = append(warnings, h.TrackProblem)
	}
	return Health{
		Durable: h.Durable, Problem: h.Problem, Warnings: warnings, Mode: string(d.report.Mode),
		CommitMs: float64(h.Median.Microseconds()) / 1000, CommitP99Ms: float64(h.P99.Microseconds()) / 1000,
	}
}
