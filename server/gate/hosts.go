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

// SameOrigin reports whether an Origin header names the very host that the
// request was sent to, which must have been found to be [Hosts.Allowed].
func SameOrigin(origin, host string) bool {
	u, err := url.Parse(origin)
	if err != nil || u.Host == "" || u.Scheme != "https" && u.Scheme != "http" {
		return false
	}
	return strings.EqualFold(u.Host, host)
}

// IsAddress reports whether a Host header is an address and port of this
// machine on which the request came in. No name that points here by deceit
// can be one.
func IsAddress(host string, local net.Addr) bool {
	h, errH := netip.ParseAddrPort(host)
	tcp, ok := local.(*net.TCPAddr)
	if errH != nil || !ok {
		return false
	}
	l := tcp.AddrPort()
	return h.Port() == l.Port() && h.Addr().Unmap().WithZone("") == l.Addr().Unmap().WithZone("")
}

func canonicalHost(name string) string {
	name = strings.ToLower(strings.Trim(name, "[]"))
	if a, err := netip.ParseAddr(name); err == nil {
		return a.WithZone("").String()
	}
	return strings.TrimSuffix(name, ".")
}
