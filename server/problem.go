package server

import (
	"errors"
	"fmt"
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"wakeback/search/incident"
	"wakeback/server/gate"
	"wakeback/server/store"
)

// Problem is an RFC 9457 problem document. Field and Expected are extensions
// for what was wrong in a request.
type Problem struct {
	Type     string `json:"type"`
	Title    string `json:"title"`
	Status   int    `json:"status"`
	Detail   string `json:"detail,omitempty"`
	Field    string `json:"field,omitempty"`
	Expected string `json:"expected,omitempty"`
}

// problemType names a kind of problem. The type's URI leads into the OpenAPI
// document, where each is described.
type problemType struct {
	name   string
	title  string
	status int
}

const problemBase = "/api/v1/openapi.json#/x-problems/"

// The kinds of problem.
var (
	pMalformed   = problemType{"malformed", "The request could not be read", http.StatusBadRequest}
	pInvalid     = problemType{"invalid", "A field is not as expected", http.StatusBadRequest}
	pUnpaired    = problemType{"unpaired", "This device is not paired", http.StatusUnauthorized}
	pForbidden   = problemType{"forbidden", "This device may not do that", http.StatusForbidden}
	pNotFound    = problemType{"not-found", "There is no such thing", http.StatusNotFound}
	pMethod      = problemType{"method", "That cannot be done here", http.StatusMethodNotAllowed}
	pConflict    = problemType{"conflict", "The id was used for something else", http.StatusConflict}
	pTooLarge    = problemType{"too-large", "The request is too large", http.StatusRequestEntityTooLarge}
	pMediaType   = problemType{"media-type", "Expected JSON", http.StatusUnsupportedMediaType}
	pMisdirected = problemType{"misdirected", "This server does not go by that name", http.StatusMisdirectedRequest}
	pTooMany     = problemType{"too-many", "Too much at once", http.StatusTooManyRequests}
	pFault       = problemType{"fault", "The server made a mistake", http.StatusInternalServerError}
	pNotSaved    = problemType{"not-saved", "Not saved: keep it on the phone", http.StatusServiceUnavailable}
	pNotReady    = problemType{"not-ready", "The server is not ready", http.StatusServiceUnavailable}
)

var problemTypes = []problemType{
	pMalformed, pInvalid, pUnpaired, pForbidden, pNotFound, pMethod, pConflict, pTooLarge,
	pMediaType, pMisdirected, pTooMany, pFault, pNotSaved, pNotReady,
}

func (t problemType) problem(detail string) *problemError {
	return &problemError{Problem: Problem{Type: problemBase + t.name, Title: t.title, Status: t.status, Detail: detail}}
}

func (t problemType) because(err error, detail string) *problemError {
	p := t.problem(detail)
	p.cause = err
	return p
}

// problemError is a problem on its way to the client. Its cause is for the
// log and never sent.
type problemError struct {
	Problem
	cause error
}

func (p *problemError) Error() string {
	if p.cause != nil {
		return fmt.Sprintf("%s: %s: %v", p.Title, p.Detail, p.cause)
	}
	return fmt.Sprintf("%s: %s", p.Title, p.Detail)
}

func (p *problemError) Unwrap() error { return p.cause }

// at says where in the request a wrong field stands.
type fieldIn struct {
	prefix string
	err    error
}

func (f *fieldIn) Error() string { return f.prefix + f.err.Error() }
func (f *fieldIn) Unwrap() error { return f.err }

// errConflict: the id is in the log already, with other content.
var errConflict = errors.New("the id is in the log with other content")

// problemOf turns any error into what the client is told. What is not known
// here is a fault, and only its title leaves the server.
func problemOf(err error) *problemError {
	var p *problemError
	var field *incident.FieldError
	var he *echo.HTTPError
	var tooLarge *http.MaxBytesError
	var conflict *store.ConflictError
	switch {
	case errors.As(err, &p):
		return p
	case errors.As(err, &field):
		return fieldProblem(err, field)
	case errors.As(err, &tooLarge):
		return pTooLarge.because(err, fmt.Sprintf("The body may have %d bytes.", tooLarge.Limit))
	case errors.Is(err, store.ErrNotDurable):
		return pNotSaved.because(err, "The server cannot write at the moment. Keep what you have and send it again later; guidance goes on.")
	case errors.Is(err, errConflict), errors.As(err, &conflict):
		return withField(pConflict.because(err, "An event of this id is in the log with other content. Use a new id."), "id", "an id that was not used")
	case errors.As(err, &he):
		return echoProblem(he)
	}
	if p := gateProblem(err); p != nil {
		return p
	}
	return pFault.because(err, "It was written to the log. What was sent before is safe.")
}

func fieldProblem(err error, field *incident.FieldError) *problemError {
	name := field.Field
	var in *fieldIn
	if errors.As(err, &in) {
		name = in.prefix + name
	}
	return withField(pInvalid.because(err, fmt.Sprintf("%s: expected %s.", name, field.Expected)), name, field.Expected)
}

func withField(p *problemError, field, expected string) *problemError {
	p.Field, p.Expected = field, expected
	return p
}

func gateProblem(err error) *problemError {
	switch {
	case errors.Is(err, gate.ErrUnpaired):
		return pUnpaired.because(err, "Pair this device: on the server's machine run wakeback pair, and open the link it prints.")
	case errors.Is(err, gate.ErrForeign):
		return withField(pForbidden.because(err, "An event may be written only as the device that sends it."), "device", "the id this device has written as before")
	case errors.Is(err, gate.ErrCode):
		return withField(pForbidden.because(err, "The code is not valid: wrong, used, or older than ten minutes. Ask for a new one."), "code", "a pairing code of 8 letters and digits")
	case errors.Is(err, gate.ErrTries), errors.Is(err, gate.ErrManyCodes):
		return pTooMany.because(err, "Too many pairing codes. Ask for a new one on the server's machine with wakeback pair.")
	case errors.Is(err, gate.ErrName):
		return withField(pInvalid.because(err, "name: "+gate.ErrName.Error()+"."), "name", "a name of 1 to 60 letters")
	case errors.Is(err, gate.ErrNoDevice):
		return pNotFound.because(err, "No device of that id is paired.")
	}
	return nil
}

// echoProblem is for what the router itself refuses.
func echoProblem(he *echo.HTTPError) *problemError {
	switch he.Code {
	case http.StatusNotFound:
		return pNotFound.because(he, "Nothing lies at this path.")
	case http.StatusMethodNotAllowed:
		return pMethod.because(he, "The path is right, the method is not.")
	case http.StatusRequestEntityTooLarge:
		return pTooLarge.because(he, "The body is too large.")
	}
	if he.Code >= 400 && he.Code < 500 {
		p := pMalformed.because(he, fmt.Sprint(he.Message))
		p.Status = he.Code
		return p
	}
	return pFault.because(he, "It was written to the log.")
}

// sendProblem is the one place where an error becomes an answer.
func (s *Server) sendProblem(err error, c echo.Context) {
	if c.Response().Committed {
		return
	}
	p := problemOf(err)
	if p.Status >= 500 {
		s.log.Error("request failed", "method", c.Request().Method, "path", c.Request().URL.Path, "error", err)
	}
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "application/problem+json")
	h.Set(echo.HeaderCacheControl, "no-store")
	if p.Status == http.StatusServiceUnavailable || p.Status == http.StatusTooManyRequests {
		h.Set("Retry-After", "5")
	}
	if p.Status == http.StatusUnauthorized {
		h.Set("WWW-Authenticate", `Bearer realm="vessel"`)
	}
	if c.Request().Method == http.MethodHead {
		_ = c.NoContent(p.Status)
		return
	}
	_ = c.JSON(p.Status, p.Problem)
}

// fieldError is a wrong field of a request.
func fieldError(field, expected string, cause error) error {
	return &incident.FieldError{Field: field, Expected: strings.TrimSuffix(expected, "."), Err: cause}
}
