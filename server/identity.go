package server

import (
	"errors"
	"fmt"
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"wakeback/search/incident"
	"wakeback/server/gate"
)

// serverName is who the server is in the log.
const serverName = "server"

// cookieName is the cookie of a paired browser. Over TLS it has the prefix
// that binds it to this host (RFC 6265bis, section 4.1.3.2).
const (
	cookiePlain = "wakeback"
	cookieTLS   = "__Host-wakeback"
)

// identity is who makes a request.
type identity struct {
	Device incident.DeviceID
	Name   string
	Role   gate.Role
	Paired bool
}

const identityKey = "identity"

// who is the identity that the middleware found.
func who(c echo.Context) identity {
	id, _ := c.Get(identityKey).(identity)
	return id
}

// identify finds out who makes a request.
func (s *Server) identify(c echo.Context) (identity, error) {
	token, sent := s.token(c.Request())
	if sent {
		d, err := s.gate.Who(token)
		if err == nil {
			return identity{Device: d.ID, Name: d.Name, Role: d.Role, Paired: true}, nil
		}
		if !s.gate.Open() {
			return identity{}, err
		}
	}
	if s.gate.Open() {
		return identity{Device: "open", Name: "someone", Role: gate.Skipper}, nil
	}
	return identity{}, gate.ErrUnpaired
}

// token is what the client shows: a bearer token of a script, or the cookie
// of a browser.
func (s *Server) token(r *http.Request) (string, bool) {
	if scheme, token, ok := strings.Cut(r.Header.Get("Authorization"), " "); ok && strings.EqualFold(scheme, "bearer") {
		return strings.TrimSpace(token), true
	}
	if c, err := r.Cookie(s.cookieName()); err == nil {
		return c.Value, true
	}
	return "", false
}

func (s *Server) cookieName() string {
	if s.cfg.TLS != nil {
		return cookieTLS
	}
	return cookiePlain
}

// needs lets only a role and those above it through.
func (s *Server) needs(role gate.Role) echo.MiddlewareFunc {
	return func(next echo.HandlerFunc) echo.HandlerFunc {
		return func(c echo.Context) error {
			id, err := s.identify(c)
			if err != nil {
				return err
			}
			if id.Role < role {
				return forbidden(role, id.Role)
			}
			c.Set(identityKey, id)
			return next(c)
		}
	}
}

func forbidden(need, have gate.Role) error {
	return pForbidden.problem(fmt.Sprintf("This takes the role %s; this device has the role %s. The skipper can change it.", need, have))
}

// watchMay are the events that a device of the role watch may write: what
// someone sees, and taking back one's own press. All others need crew. Who
// decides is not a matter of the role: the fold counts a decision of one who
// is not in charge as a question.
var watchMay = map[incident.Kind]bool{
	incident.KindMarked: true, incident.KindSeen: true, incident.KindLostSight: true,
	incident.KindClue: true, incident.KindNote: true, incident.KindMissing: true,
	incident.KindMarkDismissed: true, incident.KindUndone: true,
}

// maySend checks that a device may write these events.
func (s *Server) maySend(from identity, events []incident.Event) error {
	for i, e := range events {
		if from.Role < gate.Crew && !watchMay[e.Kind] {
			p := pForbidden.problem(fmt.Sprintf("Events of the kind %s take the role crew; this device has the role %s.", e.Kind, from.Role))
			return withField(p, fmt.Sprintf("events[%d].kind", i), "a kind that a watch may write")
		}
		if e.Device == s.ledger.self {
			return &fieldIn{prefix: fmt.Sprintf("events[%d].", i), err: gate.ErrForeign}
		}
		if !from.Paired {
			continue
		}
		switch err := s.gate.MayWriteAs(from.Device, e.Device); {
		case errors.Is(err, gate.ErrForeign), errors.Is(err, gate.ErrUnpaired):
			return err
		case err != nil:
			// The binding could not be kept. A mark is not refused for that.
			s.log.Warn("bind device", "device", from.Device, "writes", e.Device, "error", err)
		}
	}
	return nil
}
