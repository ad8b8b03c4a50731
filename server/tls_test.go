package server

import (
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"math/big"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/gorilla/websocket"
)

// certificate is one for boat.local that signs itself.
func certificate(t *testing.T) tls.Certificate {
	t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	template := &x509.Certificate{
		SerialNumber: big.NewInt(1), DNSNames: []string{"boat.local"},
		NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour),
	}
	der, err := x509.CreateCertificate(rand.Reader, template, template, key.Public(), key)
	if err != nil {
		t.Fatal(err)
	}
	leaf, err := x509.ParseCertificate(der)
	if err != nil {
		t.Fatal(err)
	}
	return tls.Certificate{Certificate: [][]byte{der}, PrivateKey: key, Leaf: leaf}
}

// TestOverTLS: on all addresses, known by the names of its certificate and by
// the address a request came in on; the cookie is bound to the host, and there
// is no Strict-Transport-Security.
func TestOverTLS(t *testing.T) {
	cert := certificate(t)
	r := runServer(t, t.TempDir(), func(c *Config) {
		c.Listen, c.TLS = "0.0.0.0:0", &tls.Config{Certificates: []tls.Certificate{cert}, MinVersion: tls.VersionTLS12}
	})
	port := portOf(r.Addr)
	if r.URL != "https://boat.local:"+port {
		t.Errorf("URL = %s", r.URL)
	}
	trust := x509.NewCertPool()
	trust.AddCert(cert.Leaf)
	client := &tls.Config{RootCAs: trust, ServerName: "boat.local"}
	transport := &http.Transport{TLSClientConfig: client}
	defer transport.CloseIdleConnections()
	for host, want := range map[string]int{
		"boat.local:" + port: 401, "127.0.0.1:" + port: 401, "192.168.77.77:" + port: 421, "evil.example:" + port: 421,
	} {
		req, err := http.NewRequest("GET", "https://127.0.0.1:"+port+api+"/status", nil)
		if err != nil {
			t.Fatal(err)
		}
		req.Host = host
		resp, err := transport.RoundTrip(req)
		if err != nil {
			t.Fatal(err)
		}
		resp.Body.Close()
		if resp.StatusCode != want {
			t.Errorf("Host %s = %d, want %d", host, resp.StatusCode, want)
		}
		if resp.Header.Get("Strict-Transport-Security") != "" {
			t.Error("Strict-Transport-Security would lock a crew out whose clock has slipped")
		}
	}
	s := &Server{cfg: Config{TLS: client}}
	if c := s.cookie("x"); c.Name != "__Host-wakeback" || !c.Secure || c.Domain != "" || c.Path != "/" {
		t.Errorf("cookie = %+v, want one bound to the host", c)
	}
	dialer := websocket.Dialer{TLSClientConfig: client}
	_, resp, err := dialer.Dial("wss://127.0.0.1:"+port+api+"/stream", nil)
	if err == nil || resp == nil || resp.StatusCode != 401 {
		t.Errorf("stream without pairing: %v, want 401", err)
	}
	plain, err := http.Get("http://127.0.0.1:" + port + "/healthz")
	if err == nil {
		plain.Body.Close()
		if plain.StatusCode == 200 {
			t.Error("plain HTTP was served")
		}
	}
	if strings.Contains(r.URL, "0.0.0.0") {
		t.Errorf("URL = %s", r.URL)
	}
}
