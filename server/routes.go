package server

import (
	"net/http"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/server/gate"
)

// api is where the API lies.
const api = "/api/v1"

// routes lays out all routes. The OpenAPI document beside it lists the same;
// a test compares the two.
func (s *Server) routes() *echo.Echo {
	e := echo.New()
	e.HideBanner, e.HidePort = true, true
	e.HTTPErrorHandler = s.sendProblem
	e.IPExtractor = echo.ExtractIPDirect() // no proxy is between a phone and the boat
	e.Pre(s.recovered, s.logged, s.known, s.sameSite, headers)

	g := e.Group(api)
	watch, skipper := s.needs(gate.Watch), s.needs(gate.Skipper)
	g.POST("/marks", s.postMark, watch)
	g.GET("/incidents", s.getIncidents, watch)
	g.GET("/incidents/:id", s.getIncident, watch)
	g.GET("/incidents/:id/events", s.getEvents, watch)
	g.POST("/incidents/:id/events", s.postEvents, watch)
	g.GET("/stream", s.getStream, watch)
	g.GET("/status", s.getStatus, watch)
	g.GET("/track", s.getTrack, watch)
	g.GET("/me", s.getMe, watch)

	g.POST("/pair", s.postPair)
	g.POST("/codes", s.postCode, skipper)
	g.GET("/devices", s.getDevices, watch)
	g.PATCH("/devices/:id", s.patchDevice, skipper)
	g.DELETE("/devices/:id", s.deleteDevice, skipper)

	// The contract names these without saying whether the API's path comes
	// before them, so they answer at both.
	for _, at := range []string{"", api} {
		e.GET(at+"/openapi.json", s.getOpenAPI)
		e.GET(at+"/healthz", s.getHealth)
		e.GET(at+"/readyz", s.getReady)
		e.GET(at+"/metrics", s.meters.handler)
	}
	if s.cfg.Page != nil {
		page := newPageServer(s.cfg.Page)
		e.GET("/*", page.serve)
		e.HEAD("/*", page.serve)
	}
	return e
}

// httpServer has the limits that Go leaves open: without them a client that
// sends a byte a minute holds a connection for ever.
func (s *Server) httpServer() *http.Server {
	return &http.Server{
		Handler:           s.echo,
		ReadHeaderTimeout: 5 * time.Second,
		ReadTimeout:       15 * time.Second,
		WriteTimeout:      30 * time.Second,
		IdleTimeout:       60 * time.Second,
		MaxHeaderBytes:    16 << 10,
		TLSConfig:         s.cfg.TLS,
		ErrorLog:          newErrorLog(s.log),
	}
}
