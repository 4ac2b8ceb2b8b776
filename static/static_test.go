package static

import (
	"os"
	"regexp"
	"strings"
	"testing"
)

func TestOnlyNamesWithAHashAreKeptForEver(t *testing.T) {
	for name, want := range map[string]bool{
		"gen/phone-HVYE2LQZ.css": true,
		"gen/atkinson-hyperlegible-next-latin-400-normal-XD2DM5SQ.woff2": true,
		"gen/calc-RP7NCYHZ.wasm":  true,
		"gen/sw.js":               false,
		"gen/precache.js":         false,
		"gen/index.html":          false,
		"gen/icon-512.png":        false,
		"gen/some-normal.woff2":   false,
		"gen/phone-hvye2lqz.css":  false,
		"gen/phone-HVYE2LQ1.css":  false,
		"gen/phone-HVYE.css":      false,
		"gen/licences.txt":        false,
		"gen/manifest.json":       false,
		"gen/ABCDEFGH.js":         false,
		"gen/old-HVYE2LQZ.min.js": false,
	} {
		if got := hashed(name); got != want {
			t.Errorf("%s: %v", name, got)
		}
	}
}

func TestEverythingThatThePhoneKeepsIsHere(t *testing.T) {
	files, err := Load()
	if err != nil {
		t.Fatal(err)
	}
	if !files.Built() {
		if os.Getenv("CI") == "true" {
			t.Fatal("the pages are not built: make static comes before the tests")
		}
		t.Skip("the pages are not built: run `make static` first")
	}
	for path, kind := range map[string]string{
		"/":                "text/html; charset=utf-8",
		"/desk":            "text/html; charset=utf-8",
		"/sw.js":           "text/javascript; charset=utf-8",
		"/gen/precache.js": "text/javascript; charset=utf-8",
		"/manifest.json":   "application/json; charset=utf-8",
	} {
		file, found := files.Get(path)
		if !found {
			t.Errorf("no %s", path)
			continue
		}
		if file.Type != kind || file.Immutable {
			t.Errorf("%s: %s, immutable %v", path, file.Type, file.Immutable)
		}
	}
	list, _ := files.Get("/gen/precache.js")
	paths := regexp.MustCompile(`"(/[^"]*)"`).FindAllStringSubmatch(string(list.Plain), -1)
	kinds := map[string]bool{}
	for _, p := range paths {
		file, found := files.Get(p[1])
		if !found {
			t.Errorf("%s is in the list and not here: no phone could install", p[1])
			continue
		}
		kinds[file.Type] = true
		if strings.HasPrefix(p[1], "/gen/") && !file.Immutable {
			t.Errorf("%s has no hash in its name", p[1])
		}
	}
	for _, kind := range []string{"text/html; charset=utf-8", "text/javascript; charset=utf-8", "text/css; charset=utf-8", "application/wasm", "font/woff2"} {
		if !kinds[kind] {
			t.Errorf("nothing of %s among the %d files that a phone keeps", kind, len(paths))
		}
	}
	page, _ := files.Get("/")
	for _, p := range regexp.MustCompile(`(?:src|href)="(/[^"]*)"`).FindAllStringSubmatch(string(page.Plain), -1) {
		if !strings.Contains(string(list.Plain), `"`+p[1]+`"`) {
			t.Errorf("the page names %s, which the phone does not keep", p[1])
		}
	}
}
