package server

import (
	"net/http"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/search/incident"
	"wakeback/server/gate"
)

// pairAnswer is a device that was just paired, with its token: the only time
// it is told.
type pairAnswer struct {
	Device gate.Device `json:"device"`
	Token  string      `json:"token"`
}

// postPair is POST /pair: a code becomes a device.
func (s *Server) postPair(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	r := &reader{o: o}
	var code, name string
	if s.gate.Open() {
		take(r, "code", "a pairing code of 8 letters and digits", &code)
	} else {
		need(r, "code", "a pairing code of 8 letters and digits", &code)
	}
	need(r, "name", "a name of 1 to 60 letters", &name)
	if r.err != nil {
		return r.err
	}
	d, token, err := s.gate.Pair(code, name)
	if err != nil {
		return err
	}
	s.log.Info("paired", "device", string(d.ID), "name", d.Name, "role", d.Role.String(), "remote", c.RealIP())
	c.SetCookie(s.cookie(token))
	return c.JSON(http.StatusCreated, pairAnswer{d, token})
}

// cookieLife: a phone that was paired marks after months without asking. Four
// hundred days is the longest a browser keeps a cookie (RFC 6265bis, 5.5).
const cookieLife = 400 * 24 * time.Hour

func (s *Server) cookie(token string) *http.Cookie {
	return &http.Cookie{
		Name: s.cookieName(), Value: token, Path: "/", MaxAge: int(cookieLife.Seconds()),
		HttpOnly: true, Secure: s.cfg.TLS != nil, SameSite: http.SameSiteStrictMode,
	}
}

// meAnswer is who asks.
type meAnswer struct {
	Device incident.DeviceID `json:"device"`
	Name   string            `json:"name"`
	Role   gate.Role         `json:"role"`
	Paired bool              `json:"paired"`
}

func (s *Server) getMe(c echo.Context) error {
	return c.JSON(http.StatusOK, meAnswer(who(c)))
}

// postCode is POST /codes: a one-time code for another device.
func (s *Server) postCode(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	role := gate.Crew
	r := &reader{o: o}
	take(r, "role", "watch, crew or skipper", &role)
	if r.err != nil {
		return r.err
	}
	code, err := s.gate.NewCode(role)
	if err != nil {
		return err
	}
	return c.JSON(http.StatusCreated, code)
}

func (s *Server) getDevices(c echo.Context) error {
	return c.JSON(http.StatusOK, map[string]any{"devices": s.gate.Devices()})
}

// patchDevice is PATCH /devices/ID: another name or role.
func (s *Server) patchDevice(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	r := &reader{o: o}
	var name *string
	var role *gate.Role
	take(r, "name", "a name of 1 to 60 letters", &name)
	take(r, "role", "watch, crew or skipper", &role)
	if r.err == nil && name == nil && role == nil {
		r.err = fieldError("name", "a name, a role or both", nil)
	}
	if r.err != nil {
		return r.err
	}
	d, err := s.gate.Change(incident.DeviceID(c.Param("id")), name, role)
	if err != nil {
		return err
	}
	return c.JSON(http.StatusOK, d)
}

// deleteDevice is DELETE /devices/ID: it is locked out at once, its open
// streams too.
func (s *Server) deleteDevice(c echo.Context) error {
	id := incident.DeviceID(c.Param("id"))
	err := s.gate.Revoke(id)
	s.hub.CloseDevice(id, "this device was revoked")
	if err != nil {
		return err
	}
	return c.NoContent(http.StatusNoContent)
}
