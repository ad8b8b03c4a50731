package gate

import "fmt"

// Role is what a device may do. Each may all that the one before it may.
type Role int

// The roles. The zero Role may nothing.
const (
	Nobody Role = iota
	// Watch sees and hears everything, and may mark: no one who sees a person
	// fall is asked for a rank.
	Watch
	// Crew also reports: sightings, wind, who is alongside.
	Crew
	// Skipper also decides: stands down, pairs and revokes devices.
	Skipper
)

var roleNames = [...]string{"nobody", "watch", "crew", "skipper"}

func (r Role) String() string {
	if r < 0 || int(r) >= len(roleNames) {
		return "nobody"
	}
	return roleNames[r]
}

// ParseRole reads watch, crew or skipper.
func ParseRole(s string) (Role, error) {
	for r := Watch; r <= Skipper; r++ {
		if s == roleNames[r] {
			return r, nil
		}
	}
	return Nobody, fmt.Errorf("role %q, expected watch, crew or skipper", s)
}

// MarshalText writes the name.
func (r Role) MarshalText() ([]byte, error) { return []byte(r.String()), nil }

// UnmarshalText reads the name.
func (r *Role) UnmarshalText(text []byte) error {
	v, err := ParseRole(string(text))
	if err != nil {
		return err
	}
	*r = v
	return nil
}
