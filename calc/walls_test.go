//go:build !js

package calc_test

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// listed is what go list tells of a package.
type listed struct {
	ImportPath string
	Imports    []string
	Deps       []string
	Standard   bool
}

// list asks the go command. Under WebAssembly there is none: the native run holds
// the walls there.
func list(t *testing.T, args ...string) []listed {
	t.Helper()
	cmd := exec.Command("go", append([]string{"list", "-json=ImportPath,Imports,Deps,Standard"}, args...)...)
	cmd.Dir = ".."
	out, err := cmd.Output()
	if err != nil {
		var exit *exec.ExitError
		if errors.As(err, &exit) {
			t.Fatalf("go list %v: %v\n%s", args, err, exit.Stderr)
		}
		t.Fatalf("go list %v: %v", args, err)
	}
	var all []listed
	for d := json.NewDecoder(strings.NewReader(string(out))); ; {
		var p listed
		if err := d.Decode(&p); err == io.EOF {
			return all
		} else if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

const module = "crossplumb"

// schema is read by the server alone and may reflect and marshal.
const schema = module + "/calc/wire/schema"

// notInCalc are the parts of the standard library that calc does without: a clock,
// files and the network would make an answer depend on more than its input; the
// last two cost more weight on the phone than the physics.
var notInCalc = []string{"os", "net", "time", "database/sql", "syscall/js", "encoding/json", "fmt"}

func TestCalcImportsGonumAndTheStandardLibraryOnly(t *testing.T) {
	packages := list(t, "./calc/...")
	if len(packages) < 8 {
		t.Fatalf("only %d packages listed", len(packages))
	}
	for _, p := range packages {
		if p.ImportPath == schema {
			continue
		}
		for _, i := range p.Imports {
			switch first, _, _ := strings.Cut(i, "/"); {
			case strings.HasPrefix(i, module+"/calc/"), strings.HasPrefix(i, "gonum.org/v1/gonum/"):
			case first == module:
				t.Errorf("%s imports %s: calc knows nothing of ours outside calc", p.ImportPath, i)
			case strings.Contains(first, "."):
				t.Errorf("%s imports %s: calc uses gonum and no other library", p.ImportPath, i)
			case slices.Contains(notInCalc, i) || strings.HasPrefix(i, "os/") || strings.HasPrefix(i, "net/"):
				t.Errorf("%s imports %s", p.ImportPath, i)
			}
		}
	}
}

// TestCalcImportsDownward: general below, the verdict above it, the door on top.
func TestCalcImportsDownward(t *testing.T) {
	order := []string{"codec", "polar", "doubt", "antenna", "scatter", "sheet", "stream", "aim", "peak", "fault", "verdict", "wire"}
	rank := func(path string) int {
		name, _, _ := strings.Cut(strings.TrimPrefix(path, module+"/calc/"), "/")
		return slices.Index(order, name)
	}
	for _, p := range list(t, "./calc/...") {
		if p.ImportPath == module+"/calc" || p.ImportPath == schema {
			continue
		}
		if rank(p.ImportPath) < 0 {
			t.Errorf("%s has no place in the order %v", p.ImportPath, order)
		}
		for _, i := range p.Imports {
			if strings.HasPrefix(i, module+"/") && rank(i) >= rank(p.ImportPath) {
				t.Errorf("%s imports %s, which stands above it", p.ImportPath, i)
			}
		}
	}
}

func TestThePhoneCarriesNeitherServerNorDatabase(t *testing.T) {
	for _, p := range list(t, "-deps", "./calc/wire") {
		for _, heavy := range []string{"gofiber", "fasthttp", "sqlite", "encoding/json", "net/http"} {
			if strings.Contains(p.ImportPath, heavy) {
				t.Errorf("calc/wire brings %s to the phone", p.ImportPath)
			}
		}
		if p.ImportPath == schema {
			t.Error("calc/wire brings its own schema package to the phone")
		}
	}
}
