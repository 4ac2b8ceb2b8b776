package main

import (
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"encoding/base32"
	"errors"
	"fmt"
	"os"
	"path"
	"path/filepath"
	"runtime"
	"sort"
	"sync"

	"github.com/andybalholm/brotli"
)

// part is the line of the weight report that a file belongs to.
type part string

const (
	partPage   part = "page"
	partScript part = "script"
	partStyle  part = "style"
	partWasm   part = "wasm"
	partFont   part = "fonts"
	partIcon   part = "icons" // fetched by the system at installation
	partRest   part = ""      // not fetched by a page
)

type file struct {
	name    string // in gen
	content []byte
	part    part
	phone   bool // the phone page needs it out of coverage: it goes into the list of the service worker
	brotli  []byte
	gzip    []byte
}

// wire is what the file costs on the way, in the form that a browser of today asks for.
func (f *file) wire() int {
	if f.brotli != nil {
		return len(f.brotli)
	}
	return len(f.content)
}

// folder is static/gen while it is made: all in memory, written at the end.
type folder struct {
	dir   string
	files map[string]*file
}

// keptName is committed: it lets the Go packages embed the folder before anything is built.
const keptName = "README.md"

func newFolder(dir string) (*folder, error) {
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, err
	}
	return &folder{dir: dir, files: map[string]*file{}}, nil
}

// add puts content under a name that holds its hash and returns the URL path.
func (g *folder) add(stem, ext string, content []byte, p part) string {
	name := stem + "-" + contentHash(content) + ext
	g.put(name, content, p)
	return "/gen/" + name
}

func (g *folder) put(name string, content []byte, p part) *file {
	f := &file{name: name, content: content, part: p}
	g.files[name] = f
	return f
}

// contentHash is written as esbuild writes its own: eight characters of base32. Package static tells by its form that
// such a file never changes.
func contentHash(content []byte) string {
	sum := sha256.Sum256(content)
	return base32.StdEncoding.EncodeToString(sum[:])[:8]
}

func (g *folder) sorted() []*file {
	list := make([]*file, 0, len(g.files))
	for _, f := range g.files {
		list = append(list, f)
	}
	sort.Slice(list, func(i, j int) bool { return list[i].name < list[j].name })
	return list
}

// addPrecache writes the list of what makes the phone page whole, and a version that changes with any byte of it.
func (g *folder) addPrecache(s *scripts) {
	for _, name := range s.files["phone"] {
		g.files[name].phone = true
	}
	version := sha256.New()
	var list bytes.Buffer
	for _, f := range g.sorted() {
		if !f.phone {
			continue
		}
		url := "/gen/" + f.name
		switch f.name {
		case "index.html":
			url = "/"
		case "manifest.json":
			url = "/manifest.json"
		}
		fmt.Fprintf(version, "%s %x\n", url, sha256.Sum256(f.content))
		fmt.Fprintf(&list, "    %q,\n", url)
	}
	text := fmt.Sprintf("self.precache = {\n  version: %q,\n  files: [\n%s  ],\n};\n",
		base32.StdEncoding.EncodeToString(version.Sum(nil))[:16], list.String())
	g.put("precache.js", []byte(text), partScript)
}

// write empties the folder but for its README and writes every file with its compressed forms.
func (g *folder) write(quick bool) error {
	if err := g.compress(quick); err != nil {
		return err
	}
	old, err := os.ReadDir(g.dir)
	if err != nil {
		return err
	}
	for _, entry := range old {
		if entry.Name() != keptName {
			if err := os.RemoveAll(filepath.Join(g.dir, entry.Name())); err != nil {
				return err
			}
		}
	}
	for _, f := range g.sorted() {
		for ext, content := range map[string][]byte{"": f.content, ".br": f.brotli, ".gz": f.gzip} {
			if content == nil {
				continue
			}
			if err := os.WriteFile(filepath.Join(g.dir, f.name+ext), content, 0o644); err != nil {
				return err
			}
		}
	}
	return nil
}

// compressible lists what is text or code; PNG and WOFF2 are compressed in themselves.
var compressible = map[string]bool{".html": true, ".js": true, ".css": true, ".json": true, ".svg": true, ".wasm": true, ".txt": true}

// compress makes the smallest forms once, here, rather than on each request: brotli at its highest quality with a 16 MiB
// window (2^24, the largest that RFC 7932 lets a browser expect), gzip at its best.
func (g *folder) compress(quick bool) error {
	brotliOptions := brotli.WriterOptions{Quality: 11, LGWin: 24}
	gzipLevel := gzip.BestCompression
	if quick {
		brotliOptions.Quality, gzipLevel = 4, gzip.BestSpeed
	}
	var all sync.WaitGroup
	free := make(chan struct{}, runtime.NumCPU())
	var lock sync.Mutex
	var failed error
	for _, f := range g.sorted() {
		if !compressible[path.Ext(f.name)] {
			continue
		}
		all.Go(func() {
			free <- struct{}{}
			defer func() { <-free }()
			var br, gz bytes.Buffer
			b := brotli.NewWriterOptions(&br, brotliOptions)
			_, err1 := b.Write(f.content)
			err2 := b.Close()
			z, err3 := gzip.NewWriterLevel(&gz, gzipLevel)
			if err3 != nil {
				lock.Lock()
				failed = err3
				lock.Unlock()
				return
			}
			_, err4 := z.Write(f.content)
			err5 := z.Close()
			if err := errors.Join(err1, err2, err4, err5); err != nil {
				lock.Lock()
				failed = err
				lock.Unlock()
				return
			}
			if br.Len() < len(f.content) {
				f.brotli = br.Bytes()
			}
			if gz.Len() < len(f.content) {
				f.gzip = gz.Bytes()
			}
		})
	}
	all.Wait()
	return failed
}
