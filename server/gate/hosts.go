package gate

import (
	"net"
	"net/netip"
	"net/url"
	"slices"
	"strings"
)

// Hosts is the list of names and addresses under which the server may be
// asked for. A page on another site that has its name point at the server
// (DNS rebinding) asks for that other name, and is refused.
type Hosts struct {
	names []string // without port, lower case
	port  string   // "" for any
}

// NewHosts makes the list for an address that the server listens on: the
// machine's own loopback names, the address itself, and the extra names
// given. With port "" any port is taken.
func NewHosts(port string, names ...string) Hosts {
	h := Hosts{port: port}
	for _, n := range append([]string{"localhost", "127.0.0.1", "::1"}, names...) {
		if n = canonicalHost(n); n != "" && !slices.Contains(h.names, n) {
			h.names = append(h.names, n)
		}
	}
	return h
}

// Allowed reports whether a Host header is on the list.
func (h Hosts) Allowed(host string) bool {
	name, port, err := net.SplitHostPort(host)
	if err != nil {
		name, port = host, ""
	}
	if h.port != "" && port != h.port && !(port == "" && (h.port == "443" || h.port == "80")) {
		return false
	}
	return slices.Contains(h.names, canonicalHost(name))
}

// SameOrigin reports whether an Origin header names this server: a host on
// the list, and the very host that the request was sent to.
func (h Hosts) SameOrigin(origin, host string) bool {
	u, err := url.Parse(origin)
	if err != nil || u.Host == "" || u.Scheme != "https" && u.Scheme != "http" {
		return false
	}
	return h.Allowed(u.Host) && strings.EqualFold(u.Host, host)
}

func canonicalHost(name string) string {
	name = strings.ToLower(strings.Trim(name, "[]"))
	if a, err := netip.ParseAddr(name); err == nil {
		return a.WithZone("").String()
	}
	return strings.TrimSuffix(name, ".")
}
