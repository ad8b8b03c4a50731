package server

import (
	_ "embed"
	"net/http"

	"github.com/labstack/echo/v4"
)

// openAPI describes the API; a test compares it with the routes and with real
// answers.
//
//go:embed openapi.json
var openAPI []byte

func (s *Server) getOpenAPI(c echo.Context) error {
	return c.Blob(http.StatusOK, "application/json", openAPI)
}
