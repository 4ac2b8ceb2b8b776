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

// addPages fills the shells of the two pages and the manifest with the hashed names. The release is a hash of all that
// the pages load: an entry carries it, so a reading can be traced to the very code that took it.
func addPages(static string, gen *folder, names map[string]string, s *scripts) error {
	release := sha256.New()
	for _, f := range gen.sorted() {
		fmt.Fprintf(release, "%s %x\n", f.name, sha256.Sum256(f.content))
	}
	names["release"] = base32.StdEncoding.EncodeToString(release.Sum(nil))[:12]

	for _, page := range []struct {
		name    string
		preload string
		part    part
		phone   bool
	}{
		{"index.html", "phone", partPage, true},
		{"desk.html", "desk", partPage, false},
		{"manifest.json", "", partPage, true},
	} {
		text, err := os.ReadFile(filepath.Join(static, page.name))
		if err != nil {
			return err
		}
		filled := strings.ReplaceAll(string(text), "{{preload}}", preloads(s.preload[page.preload]))
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
