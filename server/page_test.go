package server

import (
	"strings"
	"testing"
	"time"

	"crossplumb/static"
)

func TestPages(t *testing.T) {
	pages := fakePages{
		"/":                       {Type: "text/html; charset=utf-8", ETag: `"p1"`, Plain: []byte("<!doctype html>phone"), Gzip: []byte("gz"), Brotli: []byte("br")},
		"/desk":                   {Type: "text/html; charset=utf-8", ETag: `"d1"`, Plain: []byte("<!doctype html>desk")},
		"/sw.js":                  {Type: "text/javascript; charset=utf-8", ETag: `"s1"`, Plain: []byte("worker")},
		"/manifest.json":          {Type: "application/json; charset=utf-8", ETag: `"m1"`, Plain: []byte("{}")},
		"/gen/calc-ABCDEFGH.wasm": {Type: "application/wasm", ETag: `"w1"`, Plain: []byte("\x00asm"), Gzip: []byte("wgz"), Brotli: []byte("wbr"), Immutable: true},
		"/gen/precache.js":        {Type: "text/javascript; charset=utf-8", ETag: `"c1"`, Plain: []byte("list")},
	}
	s := openSite(t, func(c *Config) { c.Pages = pages })
	for _, c := range []struct {
		path, accept  string
		body, kind    string
		encoding, tag string
		cache         string
	}{
		{"/", "identity", "<!doctype html>phone", "text/html; charset=utf-8", "", `"p1"`, "no-cache"},
		{"/", "gzip, deflate, br, zstd", "br", "text/html; charset=utf-8", "br", `"p1-br"`, "no-cache"},
		{"/", "gzip", "gz", "text/html; charset=utf-8", "gzip", `"p1-gzip"`, "no-cache"},
		{"/", "br;q=0, gzip;q=0.5", "gz", "text/html; charset=utf-8", "gzip", `"p1-gzip"`, "no-cache"},
		{"/", "gzip;q=0", "<!doctype html>phone", "text/html; charset=utf-8", "", `"p1"`, "no-cache"},
		{"/desk", "br", "<!doctype html>desk", "text/html; charset=utf-8", "", `"d1"`, "no-cache"},
		{"/sw.js", "br", "worker", "text/javascript; charset=utf-8", "", `"s1"`, "no-cache"},
		{"/manifest.json", "br", "{}", "application/json; charset=utf-8", "", `"m1"`, "no-cache"},
		{"/gen/precache.js", "br", "list", "text/javascript; charset=utf-8", "", `"c1"`, "no-cache"},
		{"/gen/calc-ABCDEFGH.wasm", "br", "wbr", "application/wasm", "br", `"w1-br"`, "public, max-age=31536000, immutable"},
		{"/gen/calc-ABCDEFGH.wasm?v=1", "identity", "\x00asm", "application/wasm", "", `"w1"`, "public, max-age=31536000, immutable"},
	} {
		t.Run(c.path+" "+c.accept, func(t *testing.T) {
			here := *s
			here.TB = t
			a := here.do(call{method: "GET", path: c.path, headers: map[string]string{"Accept-Encoding": c.accept}, status: 200})
			if a.body != c.body || a.header.Get("Content-Type") != c.kind || a.header.Get("Content-Encoding") != c.encoding ||
				a.header.Get("ETag") != c.tag || a.header.Get("Cache-Control") != c.cache {
				t.Errorf("%q as %q, encoding %q, tag %q, cache %q", a.body, a.header.Get("Content-Type"), a.header.Get("Content-Encoding"), a.header.Get("ETag"), a.header.Get("Cache-Control"))
			}
			plain := pages[strings.Split(c.path, "?")[0]]
			if vary := a.header.Get("Vary"); (vary == "Accept-Encoding") != (plain.Brotli != nil) {
				t.Errorf("Vary is %q", vary)
			}
			same := here.do(call{method: "GET", path: c.path, headers: map[string]string{"Accept-Encoding": c.accept, "If-None-Match": `"x", W/` + c.tag}, status: 304})
			if same.body != "" || same.header.Get("ETag") != c.tag {
				t.Errorf("unchanged: %q, tag %q", same.body, same.header.Get("ETag"))
			}
			here.do(call{method: "GET", path: c.path, headers: map[string]string{"Accept-Encoding": c.accept, "If-None-Match": `"old"`}, status: 200})
			head := here.do(call{method: "HEAD", path: c.path, headers: map[string]string{"Accept-Encoding": c.accept}, status: 200})
			if head.body != "" || head.header.Get("ETag") != c.tag {
				t.Errorf("HEAD: %q, tag %q", head.body, head.header.Get("ETag"))
			}
		})
	}
	s.rows(t, []call{
		{name: "a script that is not there is no page", method: "GET", path: "/gen/phone-OLDOLDOL.js", headers: map[string]string{"Accept": "text/html"}, status: 404, code: "not_found", hasNot: []string{"<"}},
		{name: "the phone's page under another name", method: "GET", path: "/index.html", status: 404, code: "not_found"},
		{name: "the compressed form by its own name", method: "GET", path: "/gen/calc-ABCDEFGH.wasm.br", status: 404, code: "not_found"},
	})
}

// What mkstatic built, where it was built, is sent with the right types.
// A phone at a cell's edge takes the whole page in one go before it is ready without coverage. 1.2 MB is the budget that
// mkstatic holds it to; 100 kbit/s is what readTimeout reckons with as well.
func TestASlowPhoneCanTakeThePage(t *testing.T) {
	const budget, rate = 1.2e6, 100e3 / 8 // bytes, bytes/s
	if needs := time.Duration(budget / rate * float64(time.Second)); writeTimeout < needs*3/2 {
		t.Errorf("an answer is cut after %v; the page takes %v at 100 kbit/s", writeTimeout, needs)
	}
}

func TestBuiltPages(t *testing.T) {
	files, err := static.Load()
	if err != nil {
		t.Fatal(err)
	}
	s := openSite(t, func(c *Config) { c.Pages = files })
	if !files.Built() {
		s.do(call{method: "GET", path: "/", status: 503, code: "not_built"})
		return
	}
	for _, path := range files.Paths() {
		a := s.do(call{method: "GET", path: path, status: 200})
		kind := a.header.Get("Content-Type")
		for suffix, want := range map[string]string{".js": "text/javascript", ".wasm": "application/wasm", ".css": "text/css", ".json": "application/json"} {
			if strings.HasSuffix(path, suffix) && !strings.HasPrefix(kind, want) {
				t.Errorf("%s is sent as %q", path, kind)
			}
		}
	}
}
