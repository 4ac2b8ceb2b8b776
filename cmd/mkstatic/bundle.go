package main

import (
	"encoding/json"
	"fmt"
	"os"
	"path"
	"path/filepath"
	"sort"
	"strings"

	"github.com/evanw/esbuild/pkg/api"
)

// scripts is what bundling gave.
type scripts struct {
	names   map[string]string   // "phone.js" to "/gen/phone-….js", for the templates
	files   map[string][]string // by page, every file in gen that it reaches, with what those reach
	preload map[string][]string // by page, those that it needs at once
}

// browsers states whom the bundle is written for: nothing older has IndexedDB with durability, Web Locks and wasm
// under a content security policy (PRODUCT: the phone must keep readings).
var browsers = []api.Engine{
	{Name: api.EngineChrome, Version: "97"},
	{Name: api.EngineFirefox, Version: "126"},
	{Name: api.EngineSafari, Version: "16.4"},
}

// bundle builds the Worker first, because the pages carry its name, then both pages together, so that they share chunks.
func bundle(static string, chain toolchain, gen *folder, wasmURL string) (*scripts, error) {
	worker, err := build(gen, api.BuildOptions{
		AbsWorkingDir:       static,
		EntryPointsAdvanced: []api.EntryPoint{{InputPath: "src/calc/worker.ts", OutputPath: "worker"}},
		Format:              api.FormatIIFE,
		Plugins:             []api.Plugin{gluePlugin(chain)},
		Define:              map[string]string{"CALC_WASM": quoted(wasmURL)},
	})
	if err != nil {
		return nil, err
	}
	workerName := worker.entries["src/calc/worker.ts"]

	pages, err := build(gen, api.BuildOptions{
		AbsWorkingDir: static,
		EntryPointsAdvanced: []api.EntryPoint{
			{InputPath: "src/phone/main.tsx", OutputPath: "phone"},
			{InputPath: "src/desk/main.tsx", OutputPath: "desk"},
		},
		Format:          api.FormatESModule,
		Splitting:       true,
		JSX:             api.JSXAutomatic,
		JSXImportSource: "preact",
		Define:          map[string]string{"CALC_WORKER": quoted("/gen/" + workerName)},
	})
	if err != nil {
		return nil, err
	}

	s := &scripts{names: map[string]string{}, files: map[string][]string{}, preload: map[string][]string{}}
	for _, page := range []string{"phone", "desk"} {
		entry := pages.entries["src/"+page+"/main.tsx"]
		style := pages.outputs[entry].css
		if style == "" {
			return nil, fmt.Errorf("the %s page imports no style", page)
		}
		s.names[page+".js"] = "/gen/" + entry
		s.names[page+".css"] = "/gen/" + style
		reached := pages.reach(entry)
		for _, name := range reached {
			// Without this the browser learns of a shared chunk or a font only after it has read what names it.
			if name != entry && name != style && pages.outputs[name].early {
				s.preload[page] = append(s.preload[page], name)
			}
		}
		s.files[page] = append(reached, workerName, strings.TrimPrefix(wasmURL, "/gen/"))
	}
	return s, nil
}

// gluePlugin answers the import of "go/wasm_exec" with the glue of the toolchain. By a name of its own rather than by its
// path: a path relative to the project would get into the hashes, and another folder would build other names.
func gluePlugin(chain toolchain) api.Plugin {
	const namespace = "go"
	return api.Plugin{Name: "glue between Go and JavaScript", Setup: func(build api.PluginBuild) {
		build.OnResolve(api.OnResolveOptions{Filter: `^go/wasm_exec$`}, func(api.OnResolveArgs) (api.OnResolveResult, error) {
			return api.OnResolveResult{Path: "wasm_exec.js", Namespace: namespace}, nil
		})
		build.OnLoad(api.OnLoadOptions{Filter: `.*`, Namespace: namespace}, func(api.OnLoadArgs) (api.OnLoadResult, error) {
			text, err := os.ReadFile(chain.glue())
			if err != nil {
				return api.OnLoadResult{}, err
			}
			contents := string(text)
			return api.OnLoadResult{Contents: &contents, Loader: api.LoaderJS}, nil
		})
	}}
}

// output is one file of a build and what it leads to.
type output struct {
	css     string
	imports []string
	early   bool // imported outright, not on demand
}

type built struct {
	entries map[string]string // source path to file name in gen
	outputs map[string]*output
}

func (b built) reach(name string) []string {
	seen := map[string]bool{}
	var visit func(string)
	visit = func(n string) {
		if n == "" || seen[n] || b.outputs[n] == nil {
			return
		}
		seen[n] = true
		visit(b.outputs[n].css)
		for _, next := range b.outputs[n].imports {
			visit(next)
		}
	}
	visit(name)
	list := make([]string, 0, len(seen))
	for n := range seen {
		list = append(list, n)
	}
	sort.Strings(list)
	return list
}

func build(gen *folder, options api.BuildOptions) (built, error) {
	options.Bundle = true
	options.Write = false
	options.Metafile = true
	options.Outdir = gen.dir
	options.PublicPath = "/gen/"
	options.EntryNames = "[name]-[hash]"
	options.ChunkNames = "chunk-[hash]"
	options.AssetNames = "[name]-[hash]"
	options.MinifyWhitespace, options.MinifyIdentifiers, options.MinifySyntax = true, true, true
	options.LegalComments = api.LegalCommentsNone // gathered in licences.txt instead
	options.Loader = map[string]api.Loader{".woff2": api.LoaderFile}
	options.Engines = browsers
	options.PreserveSymlinks = true // where node_modules really lies must not show in the hashes
	options.LogLevel = api.LogLevelSilent
	options.Charset = api.CharsetUTF8

	result := api.Build(options)
	messages := append(api.FormatMessages(result.Errors, api.FormatMessagesOptions{Kind: api.ErrorMessage}),
		api.FormatMessages(result.Warnings, api.FormatMessagesOptions{Kind: api.WarningMessage})...)
	if len(messages) > 0 { // a warning is a defect too
		return built{}, fmt.Errorf("bundling:\n%s", strings.Join(messages, "\n"))
	}

	var meta struct {
		Outputs map[string]struct {
			EntryPoint string `json:"entryPoint"`
			CSSBundle  string `json:"cssBundle"`
			Imports    []struct {
				Path     string `json:"path"`
				Kind     string `json:"kind"`
				External bool   `json:"external"`
			} `json:"imports"`
		} `json:"outputs"`
	}
	if err := json.Unmarshal([]byte(result.Metafile), &meta); err != nil {
		return built{}, fmt.Errorf("metafile: %w", err)
	}
	b := built{entries: map[string]string{}, outputs: map[string]*output{}}
	at := func(name string) *output {
		if b.outputs[name] == nil {
			b.outputs[name] = &output{}
		}
		return b.outputs[name]
	}
	for outPath, o := range meta.Outputs {
		name := path.Base(outPath)
		if o.EntryPoint != "" && path.Ext(name) == ".js" {
			b.entries[o.EntryPoint] = name
		}
		this := at(name)
		if o.CSSBundle != "" {
			this.css = path.Base(o.CSSBundle)
		}
		for _, i := range o.Imports {
			next := path.Base(i.Path)
			this.imports = append(this.imports, next)
			if i.Kind != "dynamic-import" {
				at(next).early = true
			}
		}
	}
	for _, f := range result.OutputFiles {
		name := filepath.Base(f.Path)
		gen.put(name, f.Contents, partOf(name))
		at(name)
	}
	return b, nil
}

func partOf(name string) part {
	switch path.Ext(name) {
	case ".css":
		return partStyle
	case ".woff2":
		return partFont
	case ".wasm":
		return partWasm
	}
	return partScript
}

func quoted(s string) string {
	text, err := json.Marshal(s)
	if err != nil {
		panic("mkstatic: a string that is no JSON")
	}
	return string(text)
}
