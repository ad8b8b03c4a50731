package weather

import (
	"fmt"
	"strconv"
	"strings"
	"time"

	"wakeback/drift/nav"
)

// What an import takes at most. Our choice: two weeks by the quarter hour, and
// lines that fit a screen twice over.
const (
	maxRows = 1500
	maxLine = 500
)

// timeColumn and the others are what the columns of an import may be called.
var (
	timeColumns = []string{"time", "at", "valid", "utc"}
	windDirs    = []string{"wind_from_deg", "from_deg", "dir_deg", "from"}
	windSpeeds  = []string{"wind_speed_kn", "speed_kn", "wind_kn", "kn"}
	gusts       = []string{"gust_kn", "wind_gust_kn"}
	sets        = []string{"set_deg", "towards_deg", "set"}
	drifts      = []string{"drift_kn", "rate_kn", "speed_kn", "kn"}
	sds         = []string{"sd_kn", "error_kn"}
)

// ParseCSV reads a forecast of wind or a table of the stream: a line of column
// names, then a row for each time. Columns are "time" (RFC 3339),
// "wind_from_deg" and "wind_speed_kn", or "set_deg" and "drift_kn"; "gust_kn"
// and "sd_kn" may be there. Comma, semicolon or tab separate; lines that begin
// with # are left out; other columns are left alone. The first fault is
// returned as a [*FieldError] and no sample with it.
func ParseCSV(text string, m Medium, source Source, name string, said time.Time) ([]Sample, error) {
	p := importer{medium: m, source: source, name: name, said: said}
	var samples []Sample
	for i, line := range strings.Split(strings.TrimPrefix(text, "\ufeff"), "\n") {
		line = strings.TrimSpace(line)
		if line == "" || line[0] == '#' {
			continue
		}
		if len(line) > maxLine || len(samples) >= maxRows {
			return nil, &FieldError{Line: i + 1, Field: "text", Value: line[:min(len(line), 20)], Expected: fmt.Sprintf("at most %d rows of %d characters", maxRows, maxLine)}
		}
		if p.columns == nil {
			if err := p.header(i+1, line); err != nil {
				return nil, err
			}
			continue
		}
		s, err := p.row(i+1, line)
		if err != nil {
			return nil, err
		}
		samples = append(samples, s)
	}
	if len(samples) == 0 {
		return nil, &FieldError{Field: "text", Expected: "column names such as " + p.example() + " and a row for each time"}
	}
	return samples, nil
}

type importer struct {
	medium                   Medium
	source                   Source
	name                     string
	said                     time.Time
	separator                string
	columns                  []string
	at, dir, speed, gust, sd int // columns; -1 for none
}

func (p *importer) example() string {
	if p.medium == Current {
		return "time,set_deg,drift_kn"
	}
	return "time,wind_from_deg,wind_speed_kn"
}

// header finds the columns.
func (p *importer) header(line int, text string) error {
	p.separator = ","
	for _, sep := range []string{";", "\t"} {
		if strings.Count(text, sep) > strings.Count(text, p.separator) {
			p.separator = sep
		}
	}
	p.columns = p.split(strings.ToLower(text))
	dirs, speeds := windDirs, windSpeeds
	if p.medium == Current {
		dirs, speeds = sets, drifts
	}
	p.at, p.dir, p.speed = p.find(timeColumns), p.find(dirs), p.find(speeds)
	p.gust, p.sd = p.find(gusts), p.find(sds)
	if p.at < 0 || p.dir < 0 || p.speed < 0 {
		return &FieldError{Line: line, Field: "column names", Value: text[:min(len(text), 60)], Expected: p.example()}
	}
	return nil
}

func (p *importer) split(text string) []string {
	cells := strings.Split(text, p.separator)
	for i, c := range cells {
		cells[i] = strings.TrimSpace(strings.Trim(strings.TrimSpace(c), `"`))
	}
	return cells
}

func (p *importer) find(names []string) int {
	for _, n := range names {
		for i, c := range p.columns {
			if c == n {
				return i
			}
		}
	}
	return -1
}

// row reads one row; the errors of the cells name line and column.
func (p *importer) row(line int, text string) (Sample, error) {
	cells := p.split(text)
	if len(cells) != len(p.columns) {
		return Sample{}, &FieldError{Line: line, Field: "row", Value: text[:min(len(text), 60)], Expected: strconv.Itoa(len(p.columns)) + " columns"}
	}
	bad := func(column int, expected string) (Sample, error) {
		return Sample{}, &FieldError{Line: line, Field: p.columns[column], Value: cells[column][:min(len(cells[column]), 40)], Expected: expected}
	}
	at, err := nav.ParseTime(cells[p.at])
	if err != nil {
		return bad(p.at, "date, time and zone like 2026-05-04T14:30:00Z")
	}
	dir, err := nav.ParseDirection(cells[p.dir])
	if err != nil {
		return bad(p.dir, "degrees true from 0 to 360")
	}
	kn, err := nav.ParseSpeedKn(cells[p.speed])
	if err != nil {
		return bad(p.speed, "knots")
	}
	gust, ok := p.optional(cells, p.gust)
	if !ok {
		return bad(p.gust, "knots, or nothing")
	}
	sd, ok := p.optional(cells, p.sd)
	if !ok {
		return bad(p.sd, "knots, or nothing")
	}
	s := Sample{From: at, Velocity: nav.Towards(dir, kn), GustMs: gust, SDMs: sd, Source: p.source, Name: p.name, Said: p.said}
	if p.medium == Wind {
		s.Velocity = nav.BlowingFrom(dir, kn)
	}
	if err := s.Validate(p.medium); err != nil {
		if e, ok := err.(*FieldError); ok {
			e.Line = line
		}
		return Sample{}, err
	}
	return s, nil
}

// optional reads a speed that may be left out, in m/s.
func (p *importer) optional(cells []string, column int) (nav.Opt[float64], bool) {
	if column < 0 || cells[column] == "" {
		return nav.None[float64](), true
	}
	kn, err := nav.ParseSpeedKn(cells[column])
	return nav.Some(kn * nav.MsPerKn), err == nil
}
