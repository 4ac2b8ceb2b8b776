package main

import (
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
)

// toolchain is the Go release that compiles the wasm; its wasm_exec.js and no other fits.
type toolchain struct {
	root string
}

func (t toolchain) glue() string { return filepath.Join(t.root, "lib", "wasm", "wasm_exec.js") }

// findToolchain takes the go command on the PATH and refuses when it is not the release that built this program:
// a wasm and the glue of different releases fail in ways that no build shows.
func findToolchain() (toolchain, error) {
	out, err := exec.Command("go", "env", "GOROOT", "GOVERSION").Output()
	if err != nil {
		return toolchain{}, fmt.Errorf("go env: %w", err)
	}
	lines := strings.Split(strings.TrimSpace(string(out)), "\n")
	if len(lines) != 2 || lines[1] != runtime.Version() {
		return toolchain{}, fmt.Errorf("the go command says %q, this program was built by %s", lines, runtime.Version())
	}
	chain := toolchain{root: lines[0]}
	if _, err := os.Stat(chain.glue()); err != nil {
		return toolchain{}, err
	}
	return chain, nil
}

// buildWasm compiles cmd/phonecalc without symbols, paths or version-control stamps, so that the same source gives the
// same bytes wherever it is built.
func buildWasm(root string) ([]byte, error) {
	dir, err := os.MkdirTemp("", "mkstatic")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(dir)
	target := filepath.Join(dir, "calc.wasm")
	build := exec.Command("go", "build", "-trimpath", "-buildvcs=false", "-ldflags=-s -w", "-o", target, "./cmd/phonecalc")
	build.Dir = root
	build.Env = append(os.Environ(), "GOOS=js", "GOARCH=wasm", "GOFLAGS=")
	if out, err := build.CombinedOutput(); err != nil {
		return nil, fmt.Errorf("compiling cmd/phonecalc to wasm: %w\n%s", err, out)
	}
	return os.ReadFile(target)
}
