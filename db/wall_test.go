package db

import (
	"os/exec"
	"strings"
	"testing"
)

// The database is to be of use without HTTP and without physics, and neither may creep in.
func TestWall(t *testing.T) {
	out, err := exec.Command("go", "list", "-tags", "sqlite_omit_load_extension", "-deps", ".").Output()
	if err != nil {
		t.Fatal(err)
	}
	deps := strings.Fields(string(out))
	if len(deps) < 20 {
		t.Fatalf("only %d packages: the list is not what it should be", len(deps))
	}
	for _, dep := range deps {
		for _, barred := range []string{"github.com/gofiber/", "github.com/valyala/fasthttp", "crossplumb/calc", "crossplumb/server", "crossplumb/static", "crossplumb/cmd"} {
			if strings.HasPrefix(dep, barred) {
				t.Errorf("db depends on %s", dep)
			}
		}
		if dep == "net/http" {
			t.Errorf("db depends on %s", dep)
		}
	}
}
