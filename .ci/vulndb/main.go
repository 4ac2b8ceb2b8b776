// Command vulndb lays out the reports of the module golang.org/x/vulndb the way govulncheck reads a database
// from a folder, so that the check runs without any service: only the module proxy is asked.
//
//	vulndb SRC DST      SRC is data/osv of the module, DST the folder for govulncheck -db file://DST
package main

import (
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"sort"
)

// report is the part of an OSV entry (https://ossf.github.io/osv-schema) that the index needs.
type report struct {
	ID       string   `json:"id"`
	Modified string   `json:"modified"`
	Aliases  []string `json:"aliases"`
	Affected []struct {
		Package struct {
			Name string `json:"name"`
		} `json:"package"`
		Ranges []struct {
			Events []struct {
				Fixed string `json:"fixed"`
			} `json:"events"`
		} `json:"ranges"`
	} `json:"affected"`
}

type indexed struct {
	ID       string   `json:"id"`
	Modified string   `json:"modified"`
	Fixed    string   `json:"fixed,omitempty"`
	Aliases  []string `json:"aliases,omitempty"`
}

type module struct {
	Path  string    `json:"path"`
	Vulns []indexed `json:"vulns"`
}

func main() {
	if len(os.Args) != 3 {
		fmt.Fprintln(os.Stderr, "usage: vulndb SRC DST")
		os.Exit(2)
	}
	n, err := build(os.Args[1], os.Args[2])
	if err != nil {
		fmt.Fprintln(os.Stderr, "vulndb:", err)
		os.Exit(1)
	}
	fmt.Println(n, "reports")
}

func build(src, dst string) (int, error) {
	for _, dir := range []string{"ID", "index"} {
		if err := os.MkdirAll(filepath.Join(dst, dir), 0o755); err != nil {
			return 0, err
		}
	}
	files, err := filepath.Glob(filepath.Join(src, "*.json"))
	if err != nil {
		return 0, err
	}
	if len(files) == 0 {
		return 0, fmt.Errorf("no reports in %s", src)
	}
	var latest string
	var vulns []indexed
	byModule := map[string][]indexed{}
	for _, file := range files {
		raw, err := os.ReadFile(file)
		if err != nil {
			return 0, err
		}
		var r report
		if err := json.Unmarshal(raw, &r); err != nil {
			return 0, fmt.Errorf("%s: %w", file, err)
		}
		if err := os.WriteFile(filepath.Join(dst, "ID", r.ID+".json"), raw, 0o644); err != nil {
			return 0, err
		}
		latest = max(latest, r.Modified)
		vulns = append(vulns, indexed{ID: r.ID, Modified: r.Modified, Aliases: r.Aliases})
		seen := map[string]bool{}
		for _, a := range r.Affected {
			if seen[a.Package.Name] {
				continue
			}
			seen[a.Package.Name] = true
			entry := indexed{ID: r.ID, Modified: r.Modified}
			for _, rng := range a.Ranges {
				for _, e := range rng.Events {
					if e.Fixed != "" {
						entry.Fixed = e.Fixed
					}
				}
			}
			byModule[a.Package.Name] = append(byModule[a.Package.Name], entry)
		}
	}
	modules := make([]module, 0, len(byModule))
	for path, v := range byModule {
		modules = append(modules, module{path, v})
	}
	sort.Slice(modules, func(i, j int) bool { return modules[i].Path < modules[j].Path })
	for name, v := range map[string]any{
		"db.json":      map[string]string{"modified": latest},
		"modules.json": modules,
		"vulns.json":   vulns,
	} {
		raw, err := json.Marshal(v)
		if err != nil {
			return 0, err
		}
		if err := os.WriteFile(filepath.Join(dst, "index", name), raw, 0o644); err != nil {
			return 0, err
		}
	}
	return len(vulns), nil
}
