package server

import (
	"crypto/sha256"
	"encoding/hex"
	"io/fs"
	"mime"
	"net/http"
	"path"
	"strings"

	"github.com/labstack/echo/v4"
)

// pageServer serves the built page: a few files, all known at the start.
type pageServer struct {
	root  fs.FS
	files map[string]*pageFile // by path without a leading slash
}

// pageFile is a file in the forms in which it can be sent.
type pageFile struct {
	mime  string
	etag  string
	cache string
	forms []pageForm // best first, the plain one last
}

type pageForm struct {
	encoding string // "br", "gzip", or ""
	name     string
}

// encodings are the forms that a build may put beside a file.
var encodings = []struct{ suffix, name string }{{".br", "br"}, {".gz", "gzip"}}

// mimes are those of the page's files; the machine's own table may lack or
// change them.
var mimes = map[string]string{
	".html": "text/html; charset=utf-8", ".js": "text/javascript; charset=utf-8", ".css": "text/css; charset=utf-8",
	".wasm": "application/wasm", ".json": "application/json", ".webmanifest": "application/manifest+json",
	".svg": "image/svg+xml", ".png": "image/png", ".txt": "text/plain; charset=utf-8",
}

func newPageServer(root fs.FS) *pageServer {
	p := &pageServer{root: root, files: make(map[string]*pageFile)}
	_ = fs.WalkDir(root, ".", func(name string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || strings.HasPrefix(path.Base(name), ".") || compressed(name) {
			return nil
		}
		if f := newPageFile(root, name); f != nil {
			p.files[name] = f
		}
		return nil
	})
	p.files[""] = p.files["index.html"]
	return p
}

func compressed(name string) bool {
	return strings.HasSuffix(name, ".br") || strings.HasSuffix(name, ".gz")
}

func newPageFile(root fs.FS, name string) *pageFile {
	data, err := fs.ReadFile(root, name)
	if err != nil {
		return nil
	}
	sum := sha256.Sum256(data)
	f := &pageFile{mime: mimeOf(name), etag: hex.EncodeToString(sum[:12]), cache: cacheOf(name)}
	for _, e := range encodings {
		if _, err := fs.Stat(root, name+e.suffix); err == nil {
			f.forms = append(f.forms, pageForm{e.name, name + e.suffix})
		}
	}
	f.forms = append(f.forms, pageForm{"", name})
	return f
}

func mimeOf(name string) string {
	if m, ok := mimes[path.Ext(name)]; ok {
		return m
	}
	if m := mime.TypeByExtension(path.Ext(name)); m != "" {
		return m
	}
	return "application/octet-stream"
}

// cacheOf: files in assets have a hash of their content in the name and never
// change. All others are asked for anew each time, and answered with 304.
func cacheOf(name string) string {
	if strings.HasPrefix(name, "assets/") {
		return "public, max-age=31536000, immutable"
	}
	return "no-cache"
}

func (p *pageServer) serve(c echo.Context) error {
	r := c.Request()
	f := p.files[strings.TrimPrefix(r.URL.Path, "/")]
	if f == nil {
		return echo.ErrNotFound
	}
	form := f.form(r.Header.Get("Accept-Encoding"))
	etag := `"` + f.etag + form.encoding + `"`
	h := c.Response().Header()
	h.Set("Cache-Control", f.cache)
	h.Set("ETag", etag)
	h.Set("Vary", "Accept-Encoding")
	if strings.Contains(r.Header.Get("If-None-Match"), etag) {
		return c.NoContent(http.StatusNotModified)
	}
	data, err := fs.ReadFile(p.root, form.name)
	if err != nil {
		return err
	}
	if form.encoding != "" {
		h.Set("Content-Encoding", form.encoding)
	}
	return c.Blob(http.StatusOK, f.mime, data)
}

// form is the best form that the client takes.
func (f *pageFile) form(accept string) pageForm {
	for _, form := range f.forms {
		if form.encoding == "" || accepts(accept, form.encoding) {
			return form
		}
	}
	return f.forms[len(f.forms)-1]
}

// accepts reports whether an Accept-Encoding header takes an encoding (RFC
// 9110, section 12.5.3).
func accepts(header, encoding string) bool {
	for part := range strings.SplitSeq(header, ",") {
		name, params, _ := strings.Cut(strings.TrimSpace(part), ";")
		if !strings.EqualFold(strings.TrimSpace(name), encoding) {
			continue
		}
		q := strings.ReplaceAll(params, " ", "")
		return q != "q=0" && q != "q=0.0" && q != "q=0.00" && q != "q=0.000"
	}
	return false
}
