package main

import (
	"bytes"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
)

// addLicences gathers the licences of everything that the pages hand on: libraries, fonts, gonum and Go itself.
func addLicences(root, static string, chain toolchain, gen *folder) error {
	list := exec.Command("go", "list", "-m", "-f", "{{.Dir}}", "gonum.org/v1/gonum")
	list.Dir = root
	out, err := list.Output()
	if err != nil {
		return fmt.Errorf("go list gonum: %w", err)
	}
	packages := filepath.Join(static, "node_modules")
	var text bytes.Buffer
	for _, from := range []struct{ what, path string }{
		{"Atkinson Hyperlegible Next (fonts)", filepath.Join(packages, "@fontsource", "atkinson-hyperlegible-next", "LICENSE")},
		{"preact", filepath.Join(packages, "preact", "LICENSE")},
		{"idb", filepath.Join(packages, "idb", "LICENSE")},
		{"uuidv7", filepath.Join(packages, "uuidv7", "LICENSE")},
		{"gonum", filepath.Join(strings.TrimSpace(string(out)), "LICENSE")},
		{"Go", filepath.Join(chain.root, "LICENSE")},
	} {
		licence, err := os.ReadFile(from.path)
		if err != nil {
			return err
		}
		fmt.Fprintf(&text, "==== %s ====\n\n%s\n\n", from.what, bytes.TrimSpace(licence))
	}
	gen.put("licences.txt", text.Bytes(), partRest)
	return nil
}
