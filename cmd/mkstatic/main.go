// Command mkstatic builds static/gen: the phone and desk pages bundled from TypeScript (esbuild, as a Go library), calc
// compiled to WebAssembly, icons, the list that the service worker keeps, compressed forms of all of it. It ends with
// the weight of what a phone fetches and fails when that is over the budget. The same tree gives the same bytes.
package main

import (
	"flag"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

func main() {
	root := flag.String("root", ".", "root of the project")
	quick := flag.Bool("quick", false, "compress fast instead of small, for working on the pages; the weights are then too high and not judged")
	flag.Parse()
	if err := run(*root, *quick, os.Stdout); err != nil {
		fmt.Fprintln(os.Stderr, "mkstatic:", err)
		os.Exit(1)
	}
}

func run(root string, quick bool, out io.Writer) error {
	root, err := filepath.Abs(root)
	if err != nil {
		return err
	}
	static := filepath.Join(root, "static")
	if _, err := os.Stat(filepath.Join(static, "node_modules", "preact")); err != nil {
		return fmt.Errorf("the libraries are not there yet: npm ci --prefix static")
	}
	gen, err := newFolder(filepath.Join(static, "gen"))
	if err != nil {
		return err
	}
	chain, err := findToolchain()
	if err != nil {
		return err
	}

	wasm, err := buildWasm(root)
	if err != nil {
		return err
	}
	wasmURL := gen.add("calc", ".wasm", wasm, partWasm)
	scripts, err := bundle(static, chain, gen, wasmURL)
	if err != nil {
		return err
	}
	names := addIcons(gen)
	for k, v := range scripts.names {
		names[k] = v
	}
	if err := addPages(static, gen, names, scripts); err != nil {
		return err
	}
	if err := addLicences(root, static, chain, gen); err != nil {
		return err
	}
	gen.addPrecache(scripts)

	if err := gen.write(quick); err != nil {
		return err
	}
	return report(out, gen, quick)
}
