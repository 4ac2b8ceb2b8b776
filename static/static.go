// Package static holds the pages as cmd/mkstatic built them, ready to be sent: bytes, compressed forms, content type,
// tag. It knows no HTTP; the server decides by the request which form goes out.
package static

import (
	"crypto/sha256"
	"embed"
	"encoding/hex"
	"fmt"
	"io/fs"
	"path"
	"strings"
)

// gen holds nothing but its README until `make static` has run: the tree must compile before that.
//
//go:embed gen
var built embed.FS

// contentTypes is the project's own table: the tables of machines differ, and a wasm or a script under the wrong type
// is refused by the browser.
var contentTypes = map[string]string{
	".html":  "text/html; charset=utf-8",
	".js":    "text/javascript; charset=utf-8",
	".css":   "text/css; charset=utf-8",
	".json":  "application/json; charset=utf-8",
	".svg":   "image/svg+xml",
	".png":   "image/png",
	".wasm":  "application/wasm",
	".woff2": "font/woff2",
	".txt":   "text/plain; charset=utf-8",
}

// File is one thing that can be sent.
type File struct {
	Type   string // Content-Type
	ETag   string // strong, with its quotes; of the plain bytes
	Plain  []byte
	Gzip   []byte // nil where compressing gains nothing
	Brotli []byte // nil where compressing gains nothing
	// Immutable is true where the name holds a hash of the content: such a file may be kept for ever. Everything else
	// (the pages, sw.js, its list, the manifest) must be asked for anew each time, or updates are never seen.
	Immutable bool
}

// Files answers URL paths.
type Files struct {
	byPath map[string]*File
}

// Load reads what was embedded. Before `make static` there is nothing; Built tells.
func Load() (*Files, error) {
	files := &Files{byPath: map[string]*File{}}
	err := fs.WalkDir(built, ".", func(name string, entry fs.DirEntry, err error) error {
		if err != nil || entry.IsDir() {
			return err
		}
		ext := path.Ext(name)
		if ext == ".br" || ext == ".gz" || ext == ".md" {
			return nil
		}
		kind, known := contentTypes[ext]
		if !known {
			return fmt.Errorf("static: no content type for %s", name)
		}
		plain, err := built.ReadFile(name)
		if err != nil {
			return err
		}
		sum := sha256.Sum256(plain)
		file := &File{Type: kind, Plain: plain, ETag: `"` + hex.EncodeToString(sum[:12]) + `"`, Immutable: hashed(name)}
		if compressed, err := built.ReadFile(name + ".br"); err == nil {
			file.Brotli = compressed
		}
		if compressed, err := built.ReadFile(name + ".gz"); err == nil {
			file.Gzip = compressed
		}
		files.byPath[urlPath(name)] = file
		return nil
	})
	if err != nil {
		return nil, err
	}
	return files, nil
}

// Get returns the file that answers the URL path: "/", "/desk", "/sw.js", "/manifest.json" or "/gen/…".
func (f *Files) Get(urlPath string) (*File, bool) {
	file, found := f.byPath[urlPath]
	return file, found
}

// Built tells whether the pages are inside, or only the note that they are to be built.
func (f *Files) Built() bool {
	_, phone := f.byPath["/"]
	_, desk := f.byPath["/desk"]
	return phone && desk
}

// Paths lists every URL path that Get answers, in no order.
func (f *Files) Paths() []string {
	paths := make([]string, 0, len(f.byPath))
	for p := range f.byPath {
		paths = append(paths, p)
	}
	return paths
}

func urlPath(name string) string {
	switch name {
	case "gen/index.html":
		return "/"
	case "gen/desk.html":
		return "/desk"
	case "gen/manifest.json", "gen/sw.js":
		return "/" + path.Base(name)
	}
	return "/" + name
}

// hashed tells names as mkstatic gives them to content: stem, a dash, at least eight of A–Z and 2–7 (base32, as
// esbuild writes it), extension.
func hashed(name string) bool {
	base := path.Base(name)
	stem := strings.TrimSuffix(base, path.Ext(base))
	dash := strings.LastIndexByte(stem, '-')
	if dash < 0 || len(stem)-dash-1 < 8 {
		return false
	}
	for _, r := range stem[dash+1:] {
		if (r < 'A' || r > 'Z') && (r < '2' || r > '7') {
			return false
		}
	}
	return true
}
