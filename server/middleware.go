package server

import (
	"bytes"
	"context"
	"fmt"
	"log"
	"log/slog"
	"net"
	"net/http"
	"runtime/debug"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/server/gate"
)

// recovered turns a panic in one request into a fault of that request.
func (s *Server) recovered(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) (err error) {
		defer func() {
			if r := recover(); r != nil {
				s.log.Error("panic", "value", fmt.Sprint(r), "stack", string(debug.Stack()))
				err = pFault.problem("It was written to the log. What was sent before is safe.")
			}
		}()
		return next(c)
	}
}

// logged writes one line for each request: no query, no header, no body, so no
// token and no position.
func (s *Server) logged(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		began := time.Now()
		err := next(c)
		if err != nil {
			s.sendProblem(err, c)
		}
		status := c.Response().Status
		s.meters.request(c.Path(), c.Request().Method, status, time.Since(began))
		level := slog.LevelDebug
		if status >= 400 && status != http.StatusNotFound {
			level = slog.LevelInfo
		}
		s.log.Log(context.Background(), level, "request",
			"method", c.Request().Method, "path", c.Request().URL.Path, "status", status,
			"ms", time.Since(began).Milliseconds(), "remote", c.RealIP(), "device", string(who(c).Device))
		return nil
	}
}

// known refuses a host name that is not the server's (DNS rebinding).
func (s *Server) known(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		r := c.Request()
		local, _ := r.Context().Value(http.LocalAddrContextKey).(net.Addr)
		if !s.hosts.Allowed(r.Host) && !gate.IsAddress(r.Host, local) {
			return pMisdirected.problem("Use the address that the server printed when it started.")
		}
		return next(c)
	}
}

// sameSite refuses what a page of another site has a browser send: with
// http.CrossOriginProtection for all that changes something, and by Origin for
// a websocket, whose handshake is a GET.
func (s *Server) sameSite(next echo.HandlerFunc) echo.HandlerFunc {
	cross := http.NewCrossOriginProtection()
	return func(c echo.Context) error {
		r := c.Request()
		if err := cross.Check(r); err != nil {
			return pForbidden.because(err, "The request comes from a page of another site.")
		}
		origin := r.Header.Get("Origin")
		if origin != "" && !gate.SameOrigin(origin, r.Host) {
			return pForbidden.problem("The request comes from a page of another site.")
		}
		if origin == "" && isUpgrade(r) && byCookie(r) {
			return pForbidden.problem("A stream that a browser opens has to say where it comes from.")
		}
		return next(c)
	}
}

func isUpgrade(r *http.Request) bool {
	return strings.EqualFold(r.Header.Get("Upgrade"), "websocket")
}

// byCookie: a script shows a bearer token and has no Origin; a browser sends
// its cookie and always says where it comes from.
func byCookie(r *http.Request) bool { return r.Header.Get("Cookie") != "" }

// policy lets the page load its own files and talk to its own server, and
// nothing else; wasm-unsafe-eval lets it compile the engine.
const policy = "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; style-src 'self'; img-src 'self' data: blob:; " +
	"connect-src 'self'; worker-src 'self'; manifest-src 'self'; media-src 'self'; base-uri 'none'; " +
	"form-action 'self'; frame-ancestors 'none'"

// headers go with every answer. There is no Strict-Transport-Security: a
// clock that slips at sea makes every certificate look wrong, and with it the
// crew could not even choose to go on.
func headers(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		h := c.Response().Header()
		h.Set("Content-Security-Policy", policy)
		h.Set("X-Content-Type-Options", "nosniff")
		h.Set("Referrer-Policy", "no-referrer")
		h.Set("Cross-Origin-Opener-Policy", "same-origin")
		h.Set("Cross-Origin-Resource-Policy", "same-origin")
		h.Set("Permissions-Policy", "geolocation=(self), gyroscope=(self), magnetometer=(self), accelerometer=(self), screen-wake-lock=(self)")
		if strings.HasPrefix(c.Request().URL.Path, api+"/") {
			h.Set("Cache-Control", "no-store")
		}
		return next(c)
	}
}

// newErrorLog leads what net/http has to say into the log.
func newErrorLog(l *slog.Logger) *log.Logger { return log.New(&logWriter{l}, "", 0) }

type logWriter struct{ log *slog.Logger }

func (w *logWriter) Write(p []byte) (int, error) {
	w.log.Info("http", "message", string(bytes.TrimSpace(p)))
	return len(p), nil
}
