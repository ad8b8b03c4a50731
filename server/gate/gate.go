package gate

import (
	"cmp"
	"encoding/json"
	"errors"
	"fmt"
	"slices"
	"strings"
	"sync"
	"time"
	"unicode"
	"unicode/utf8"

	"github.com/google/uuid"

	"wakeback/search/incident"
)

// Docs keeps small documents by name, on disk before it returns.
type Docs interface {
	PutDoc(kind, name string, doc []byte) error
	Docs(kind string) (map[string][]byte, error)
	DeleteDoc(kind, name string) error
}

// docKind is the kind of the documents of devices.
const docKind = "device"

// Errors about devices.
var (
	ErrUnpaired = errors.New("this device is not paired")
	ErrNoDevice = errors.New("no such device")
	ErrName     = errors.New("expected a name of 1 to 60 letters")
	// ErrForeign: an event names a device that another paired device writes as.
	ErrForeign = errors.New("the event is written as a device that belongs to another")
)

// Device is a phone or script that was paired.
type Device struct {
	ID       incident.DeviceID `json:"id"`
	Name     string            `json:"name"`
	Role     Role              `json:"role"`
	PairedAt time.Time         `json:"paired_at"`
	// Writes is the device id in the events it writes: its own choice, bound
	// to it by the first event it sends.
	Writes incident.DeviceID `json:"writes,omitempty"`
}

// record is a device as it is kept.
type record struct {
	Device
	TokenHash string `json:"token_sha256"`
}

// Gate is safe for use by several goroutines.
type Gate struct {
	docs Docs
	now  func() time.Time
	open bool

	// mu guards the maps. It is held while a document is written, which
	// happens only when devices are paired, renamed or revoked.
	mu      sync.RWMutex
	devices map[incident.DeviceID]record
	byToken map[string]incident.DeviceID // by hash
	codes   []Code
	wrong   int // wrong codes since a code was made
}

// New reads the devices. With open set whoever asks is a skipper.
func New(docs Docs, open bool, now func() time.Time) (*Gate, error) {
	g := &Gate{
		docs: docs, now: now, open: open,
		devices: make(map[incident.DeviceID]record), byToken: make(map[string]incident.DeviceID),
	}
	kept, err := docs.Docs(docKind)
	if err != nil {
		return nil, fmt.Errorf("read the paired devices: %w", err)
	}
	for name, doc := range kept {
		var r record
		if err := json.Unmarshal(doc, &r); err != nil {
			return nil, fmt.Errorf("read paired device %s: %w", name, err)
		}
		g.devices[r.ID], g.byToken[r.TokenHash] = r, r.ID
	}
	return g, nil
}

// Open reports whether pairing is open.
func (g *Gate) Open() bool { return g.open }

// NewCode makes a one-time code for a role.
func (g *Gate) NewCode(role Role) (Code, error) {
	g.mu.Lock()
	defer g.mu.Unlock()
	now := g.now()
	g.dropOld(now)
	if len(g.codes) >= codesOpen {
		return Code{}, ErrManyCodes
	}
	c := Code{Code: newCode(), Role: role, ExpiresAt: now.Add(codeLife).UTC()}
	g.codes, g.wrong = append(g.codes, c), 0
	return c, nil
}

func (g *Gate) dropOld(now time.Time) {
	g.codes = slices.DeleteFunc(g.codes, func(c Code) bool { return !now.Before(c.ExpiresAt) })
}

// Pair turns a code into a device and its token. The code is used up even if
// the device cannot be kept. With pairing open an empty code makes a skipper.
func (g *Gate) Pair(code, name string) (Device, string, error) {
	name, err := cleanName(name)
	if err != nil {
		return Device{}, "", err
	}
	g.mu.Lock()
	defer g.mu.Unlock()
	role, err := g.use(code)
	if err != nil {
		return Device{}, "", err
	}
	id, err := uuid.NewRandom()
	if err != nil {
		return Device{}, "", fmt.Errorf("name the device: %w", err)
	}
	token, hash := newToken()
	r := record{TokenHash: hash, Device: Device{
		ID: incident.DeviceID(id.String()), Name: name, Role: role, PairedAt: g.now().UTC(),
	}}
	if err := g.keep(r); err != nil {
		return Device{}, "", err
	}
	return r.Device, token, nil
}

// use takes a code out. Needs mu.
func (g *Gate) use(code string) (Role, error) {
	if g.open && code == "" {
		return Skipper, nil
	}
	g.dropOld(g.now())
	code = normal(code)
	for i, c := range g.codes {
		if equal(c.Code, code) {
			g.codes = slices.Delete(g.codes, i, i+1)
			return c.Role, nil
		}
	}
	if g.wrong++; g.wrong >= codeTries {
		g.codes = nil
		return Nobody, ErrTries
	}
	return Nobody, ErrCode
}

// keep writes a device down and then knows it. Needs mu.
func (g *Gate) keep(r record) error {
	doc, err := json.Marshal(r)
	if err != nil {
		return fmt.Errorf("write device %s: %w", r.ID, err)
	}
	if err := g.docs.PutDoc(docKind, string(r.ID), doc); err != nil {
		return fmt.Errorf("keep device %s: %w", r.ID, err)
	}
	g.devices[r.ID], g.byToken[r.TokenHash] = r, r.ID
	return nil
}

// Who finds the device of a token.
func (g *Gate) Who(token string) (Device, error) {
	g.mu.RLock()
	defer g.mu.RUnlock()
	id, ok := g.byToken[hashToken(token)]
	if !ok {
		return Device{}, ErrUnpaired
	}
	return g.devices[id].Device, nil
}

// Devices lists the paired devices in order of their pairing.
func (g *Gate) Devices() []Device {
	g.mu.RLock()
	defer g.mu.RUnlock()
	list := make([]Device, 0, len(g.devices))
	for _, r := range g.devices {
		list = append(list, r.Device)
	}
	slices.SortFunc(list, func(a, b Device) int {
		return cmp.Or(a.PairedAt.Compare(b.PairedAt), cmp.Compare(a.ID, b.ID))
	})
	return list
}

// Change gives a device another name or role; nil leaves it.
func (g *Gate) Change(id incident.DeviceID, name *string, role *Role) (Device, error) {
	g.mu.Lock()
	defer g.mu.Unlock()
	r, ok := g.devices[id]
	if !ok {
		return Device{}, ErrNoDevice
	}
	if name != nil {
		clean, err := cleanName(*name)
		if err != nil {
			return Device{}, err
		}
		r.Name = clean
	}
	if role != nil {
		r.Role = *role
	}
	return r.Device, g.keep(r)
}

// Revoke forgets a device: its token opens nothing any more.
func (g *Gate) Revoke(id incident.DeviceID) error {
	g.mu.Lock()
	defer g.mu.Unlock()
	r, ok := g.devices[id]
	if !ok {
		return ErrNoDevice
	}
	// Out of memory first: a disk that fails must not keep a door open now.
	delete(g.devices, id)
	delete(g.byToken, r.TokenHash)
	if err := g.docs.DeleteDoc(docKind, string(id)); err != nil {
		return fmt.Errorf("revoke device %s, which is locked out until the server starts again: %w", id, err)
	}
	return nil
}

// MayWriteAs checks that a paired device writes events under its own device
// id, and binds the id at the first event. A device that was paired anew and
// is not bound yet takes the id over from its older pairing: the code it was
// paired with stands for that. One that is bound and comes with an id that
// nobody writes as has lost its storage and begun anew: it is bound to the new
// id, because a mark must never be refused for that.
func (g *Gate) MayWriteAs(who incident.DeviceID, as incident.DeviceID) error {
	g.mu.RLock()
	bound := g.devices[who].Writes
	g.mu.RUnlock()
	if bound == as {
		return nil
	}
	g.mu.Lock()
	defer g.mu.Unlock()
	r, ok := g.devices[who]
	if !ok {
		return ErrUnpaired
	}
	for _, other := range g.devices {
		if other.Writes == as && other.ID != who {
			if r.Writes != "" {
				return fmt.Errorf("%w: expected %s", ErrForeign, r.Writes)
			}
			other.Writes = ""
			if other.PairedAt.After(r.PairedAt) {
				return ErrForeign
			}
			if err := g.keep(other); err != nil {
				return err
			}
		}
	}
	r.Writes = as
	return g.keep(r)
}

// cleanName takes a name as typed; control characters could disturb a terminal
// or a report.
func cleanName(name string) (string, error) {
	name = strings.Join(strings.Fields(name), " ")
	n := utf8.RuneCountInString(name)
	if n < 1 || n > 60 || !utf8.ValidString(name) || strings.ContainsFunc(name, unicode.IsControl) {
		return "", ErrName
	}
	return name, nil
}

// Device finds a paired device.
func (g *Gate) Device(id incident.DeviceID) (Device, error) {
	g.mu.RLock()
	defer g.mu.RUnlock()
	r, ok := g.devices[id]
	if !ok {
		return Device{}, ErrNoDevice
	}
	return r.Device, nil
}
