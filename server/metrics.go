package server

import (
	"net/http"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"
	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"
)

// meters are the figures for /metrics. They hold no position and no name.
type meters struct {
	requests *prometheus.HistogramVec
	handler  echo.HandlerFunc
}

func newMeters(s *Server) *meters {
	reg := prometheus.NewRegistry() // its own: nothing that a library registers by itself
	m := &meters{requests: prometheus.NewHistogramVec(prometheus.HistogramOpts{
		Name: "wakeback_request_seconds", Help: "Time to answer, by route, method and status.",
		Buckets: []float64{0.001, 0.003, 0.01, 0.03, 0.1, 0.3, 1, 3},
	}, []string{"route", "method", "status"})}
	gauge := func(name, help string, value func() float64) prometheus.Collector {
		return prometheus.NewGaugeFunc(prometheus.GaugeOpts{Name: name, Help: help}, value)
	}
	counter := func(name, help string, value func() float64) prometheus.Collector {
		return prometheus.NewCounterFunc(prometheus.CounterOpts{Name: name, Help: help}, value)
	}
	reg.MustRegister(
		m.requests, collectors.NewGoCollector(),
		collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}),
		gauge("wakeback_streams", "Streams that are open.", func() float64 { return float64(s.hub.Stats().Clients) }),
		counter("wakeback_stream_messages_total", "Messages sent on streams.", func() float64 { return float64(s.hub.Stats().Sent) }),
		counter("wakeback_stream_resyncs_total", "Streams closed because they fell behind.", func() float64 { return float64(s.hub.Stats().Resyncs) }),
		counter("wakeback_stream_failures_total", "Streams closed because a write failed.", func() float64 { return float64(s.hub.Stats().Failures) }),
		gauge("wakeback_last_seq", "Number of the newest event.", func() float64 { return float64(s.store.LastSeq()) }),
		gauge("wakeback_store_durable", "1 when what is acknowledged is on disk.", func() float64 {
			if s.store.Health().Durable {
				return 1
			}
			return 0
		}),
		gauge("wakeback_open_incidents", "Incidents that are open.", func() float64 { return float64(len(s.book.live())) }),
	)
	m.handler = echo.WrapHandler(promhttp.HandlerFor(reg, promhttp.HandlerOpts{}))
	return m
}

// request counts one request. Paths that lead nowhere share one label, so that
// nobody fills the memory with names.
func (m *meters) request(route, method string, status int, took time.Duration) {
	if route == "" || status == http.StatusNotFound {
		route = "none"
	}
	switch method {
	case http.MethodGet, http.MethodHead, http.MethodPost, http.MethodPatch, http.MethodDelete:
	default:
		method = "other"
	}
	m.requests.WithLabelValues(route, method, strconv.Itoa(status)).Observe(took.Seconds())
}
