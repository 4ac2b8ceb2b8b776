package main

import (
	"crypto/sha256"
	"encoding/base32"
	"fmt"
	"os"
	"path"
	"path/filepath"
	"strings"
)

// addPages fills the shells of the two pages and the manifest with the hashed names, and adds the service worker as it
// stands. The release is a hash of all that a page loads: an entry carries it, so a reading can be traced to the very
// code that took it.
func addPages(static string, gen *folder, names map[string]string, s *scripts) error {
	for _, page := range []struct {
		name  string
		of    string
		part  part
		phone bool
	}{
		{"index.html", "phone", partPage, true},
		{"desk.html", "desk", partPage, false},
		{"manifest.json", "", partPage, true},
		{"sw.js", "", partScript, false}, // the browser keeps it by its own rules
	} {
		text, err := os.ReadFile(filepath.Join(static, page.name))
		if err != nil {
			return err
		}
		filled := strings.ReplaceAll(string(text), "{{preload}}", preloads(s.preload[page.of]))
		filled = strings.ReplaceAll(filled, "{{release}}", release(s.files[page.of]))
		for name, value := range names {
			filled = strings.ReplaceAll(filled, "{{"+name+"}}", value)
		}
		if at := strings.Index(filled, "{{"); at >= 0 {
			return fmt.Errorf("%s asks for %.30s…, which nothing fills", page.name, filled[at:])
		}
		gen.put(page.name, []byte(filled), page.part).phone = page.phone
	}
	return nil
}

// release names what a page is made of; the file names hold the hashes of the contents.
func release(files []string) string {
	sum := sha256.Sum256([]byte(strings.Join(files, "\n")))
	return base32.StdEncoding.EncodeToString(sum[:])[:12]
}

func preloads(files []string) string {
	var lines []string
	for _, name := range files {
		switch path.Ext(name) {
		case ".js":
			lines = append(lines, fmt.Sprintf(`<link rel="modulepreload" href="/gen/%s">`, name))
		case ".woff2":
			lines = append(lines, fmt.Sprintf(`<link rel="preload" as="font" type="font/woff2" crossorigin href="/gen/%s">`, name))
		}
	}
	return strings.Join(lines, "\n")
}
