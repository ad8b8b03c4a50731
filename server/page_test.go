package server

import (
	"net/http"
	"strings"
	"testing"
	"testing/fstest"
)

func TestPage(t *testing.T) {
	page := fstest.MapFS{
		"index.html":          {Data: []byte("<!doctype html>plain")},
		"index.html.gz":       {Data: []byte("gz of index")},
		"sw.js":               {Data: []byte("sw")},
		"engine.wasm":         {Data: []byte("\x00asm")},
		"engine.wasm.br":      {Data: []byte("br of engine")},
		"engine.wasm.gz":      {Data: []byte("gz of engine")},
		"assets/start-abc.js": {Data: []byte("start")},
		".keep":               {Data: []byte("x")},
	}
	r := rigOn(t, realStore(t), func(c *Config) { c.Page = page })
	for _, c := range []struct {
		path, accept             string
		mime, encoding, body, cc string
	}{
		{"/", "", "text/html; charset=utf-8", "", "<!doctype html>plain", "no-cache"},
		{"/", "br, gzip", "text/html; charset=utf-8", "gzip", "gz of index", "no-cache"},
		{"/index.html", "gzip;q=0", "text/html; charset=utf-8", "", "<!doctype html>plain", "no-cache"},
		{"/sw.js", "", "text/javascript; charset=utf-8", "", "sw", "no-cache"},
		{"/engine.wasm", "gzip, br", "application/wasm", "br", "br of engine", "no-cache"},
		{"/engine.wasm", "gzip", "application/wasm", "gzip", "gz of engine", "no-cache"},
		{"/assets/start-abc.js", "gzip", "text/javascript; charset=utf-8", "", "start", "public, max-age=31536000, immutable"},
	} {
		resp, body := r.raw("GET", c.path, nil, http.Header{"Accept-Encoding": {c.accept}})
		h := resp.Header
		if resp.StatusCode != 200 || string(body) != c.body || h.Get("Content-Type") != c.mime || h.Get("Content-Encoding") != c.encoding || h.Get("Cache-Control") != c.cc {
			t.Errorf("GET %s (%s) = %d %q %v", c.path, c.accept, resp.StatusCode, body, h)
		}
		if csp := h.Get("Content-Security-Policy"); !strings.Contains(csp, "default-src 'none'") || strings.Contains(csp, "unsafe-inline") {
			t.Errorf("GET %s: policy %q", c.path, csp)
		}
		again, _ := r.raw("GET", c.path, nil, http.Header{"Accept-Encoding": {c.accept}, "If-None-Match": {h.Get("ETag")}})
		if again.StatusCode != 304 {
			t.Errorf("GET %s with its tag = %d, want 304", c.path, again.StatusCode)
		}
	}
	for _, path := range []string{"/.keep", "/engine.wasm.gz", "/nothing", "/assets/", "/../server.go", "/%2e%2e/server.go", "/assets/../index.html", "/api/v1/nothing"} {
		if resp, _ := r.raw("GET", path, nil, nil); resp.StatusCode != 404 {
			t.Errorf("GET %s = %d, want 404", path, resp.StatusCode)
		}
	}
	if resp, body := r.raw("HEAD", "/", nil, nil); resp.StatusCode != 200 || len(body) != 0 {
		t.Errorf("HEAD / = %d with %d bytes", resp.StatusCode, len(body))
	}
}
