package server

import (
	"net/http"
	"sync"

	"github.com/labstack/echo/v4"

	"wakeback/server/hub"
)

// health remembers what everyone was told about the store.
type health struct {
	mu   sync.Mutex // guards told
	told bool       // that nothing can be saved
}

// showHealth tells everyone when the store stops or begins again to keep what
// it is given.
func (s *Server) showHealth() {
	h := s.store.Health()
	s.health.mu.Lock()
	defer s.health.mu.Unlock()
	if s.health.told == !h.Durable {
		return
	}
	s.health.told = !h.Durable
	word := hub.Problem{
		T: "problem", Code: pNotSaved.name, Title: "The server cannot save",
		Detail: "What you enter stays on the phone and is sent again later. Guidance goes on. " + h.Problem,
		Over:   h.Durable,
	}
	if h.Durable {
		word.Title, word.Detail = "The server saves again", ""
	}
	if err := s.hub.Show(hub.Word{Key: "health", Message: word}); err != nil {
		s.log.Error("show health", "error", err)
	}
	s.log.Error("store", "durable", h.Durable, "problem", h.Problem)
}

// getHealth is GET /healthz: the process runs and answers.
func (s *Server) getHealth(c echo.Context) error {
	c.Response().Header().Set(echo.HeaderCacheControl, "no-store")
	return c.JSON(http.StatusOK, map[string]string{"status": "ok"})
}

// getReady is GET /readyz: what is sent is kept.
func (s *Server) getReady(c echo.Context) error {
	if h := s.store.Health(); !h.Durable {
		return pNotReady.problem("Nothing can be saved: " + h.Problem)
	}
	return s.getHealth(c)
}
