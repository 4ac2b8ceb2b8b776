package main

import (
	"bytes"
	"image"
	"image/png"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/andybalholm/brotli"
)

func testFolder(t *testing.T) *folder {
	t.Helper()
	gen, err := newFolder(t.TempDir())
	if err != nil {
		t.Fatal(err)
	}
	return gen
}

func TestOverBudgetFails(t *testing.T) {
	gen := testFolder(t)
	gen.put("a.wasm", make([]byte, budget), partWasm)
	if err := report(&bytes.Buffer{}, gen, false); err != nil {
		t.Errorf("exactly the budget: %v", err)
	}
	gen.put("b.js", []byte("x"), partScript)
	if err := report(&bytes.Buffer{}, gen, false); err == nil {
		t.Error("one byte over the budget passed")
	}
	gen.put("licences.txt", make([]byte, budget), partRest)
	gen.put("b.js", nil, partScript)
	if err := report(&bytes.Buffer{}, gen, false); err != nil {
		t.Errorf("what no page fetches was weighed: %v", err)
	}
}

func TestPrecacheHoldsThePhoneAndChangesWithEveryByteOfIt(t *testing.T) {
	list := func(page, desk string) string {
		gen := testFolder(t)
		gen.put("index.html", []byte(page), partPage).phone = true
		gen.put("desk.html", []byte(desk), partPage)
		gen.put("phone-AAAAAAAA.js", []byte("p"), partScript)
		gen.put("desk-BBBBBBBB.js", []byte("d"), partScript)
		gen.addPrecache(&scripts{files: map[string][]string{"phone": {"phone-AAAAAAAA.js"}, "desk": {"desk-BBBBBBBB.js"}}})
		return string(gen.files["precache.js"].content)
	}
	one := list("one", "desk")
	for _, want := range []string{`"/"`, `"/gen/phone-AAAAAAAA.js"`} {
		if !strings.Contains(one, want) {
			t.Errorf("%s is not in %s", want, one)
		}
	}
	if strings.Contains(one, "desk") {
		t.Errorf("a phone would fetch the desk: %s", one)
	}
	if one == list("two", "desk") {
		t.Error("another page, the same version: no phone would ever see it")
	}
	if one != list("one", "another desk") {
		t.Error("a change of the desk alone asks every phone to update")
	}
}

func TestWriteLeavesOnlyTheReadmeOfBefore(t *testing.T) {
	gen := testFolder(t)
	for _, name := range []string{keptName, "old-AAAAAAAA.js"} {
		if err := os.WriteFile(filepath.Join(gen.dir, name), []byte("old"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	text := bytes.Repeat([]byte("readings "), 100)
	gen.put("new-AAAAAAAA.js", text, partScript)
	gen.put("tiny-AAAAAAAA.js", []byte("x"), partScript)
	gen.put("icon-AAAAAAAA.png", text, partIcon)
	if err := gen.write(false); err != nil {
		t.Fatal(err)
	}
	entries, err := os.ReadDir(gen.dir)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	// A compressed form only where it is smaller, and never of what is compressed in itself.
	want := "README.md icon-AAAAAAAA.png new-AAAAAAAA.js new-AAAAAAAA.js.br new-AAAAAAAA.js.gz tiny-AAAAAAAA.js"
	if got := strings.Join(names, " "); got != want {
		t.Errorf("got %s, want %s", got, want)
	}
	packed, err := os.ReadFile(filepath.Join(gen.dir, "new-AAAAAAAA.js.br"))
	if err != nil {
		t.Fatal(err)
	}
	var plain bytes.Buffer
	if _, err := plain.ReadFrom(brotli.NewReader(bytes.NewReader(packed))); err != nil || !bytes.Equal(plain.Bytes(), text) {
		t.Errorf("brotli does not give the text back: %v", err)
	}
}

func TestTemplateWithAnUnknownNameFails(t *testing.T) {
	static := t.TempDir()
	for _, name := range []string{"index.html", "desk.html", "manifest.json", "sw.js"} {
		if err := os.WriteFile(filepath.Join(static, name), []byte("{{phone.js}} {{fone.css}}"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	err := addPages(static, testFolder(t), map[string]string{"phone.js": "/gen/x.js"}, &scripts{files: map[string][]string{}, preload: map[string][]string{}})
	if err == nil || !strings.Contains(err.Error(), "fone.css") {
		t.Errorf("got %v", err)
	}
}

func TestIconsAreTheSignInTheSizesThatPhonesAskFor(t *testing.T) {
	gen := testFolder(t)
	names := addIcons(gen)
	for name, size := range map[string]int{"icon-180.png": 180, "icon-192.png": 192, "icon-512.png": 512, "icon-maskable-512.png": 512} {
		f := gen.files[strings.TrimPrefix(names[name], "/gen/")]
		if f == nil {
			t.Fatalf("no %s", name)
		}
		picture, err := png.Decode(bytes.NewReader(f.content))
		if err != nil {
			t.Fatal(err)
		}
		if picture.Bounds() != image.Rect(0, 0, size, size) {
			t.Errorf("%s is %v", name, picture.Bounds())
		}
		dark := 0
		for y := range size {
			for x := range size {
				r, _, _, _ := picture.At(x, y).RGBA()
				if r > 0x8000 {
					continue
				}
				dark++
				// W3C Web Application Manifest, maskable icons: the safe zone is a circle of 40 % of the width about the middle.
				dx, dy := float64(x)+0.5-float64(size)/2, float64(y)+0.5-float64(size)/2
				if strings.Contains(name, "maskable") && dx*dx+dy*dy > 0.16*float64(size*size) {
					t.Fatalf("%s: ink at %d,%d, outside the safe zone", name, x, y)
				}
			}
		}
		if share := float64(dark) / float64(size*size); share < 0.1 || share > 0.5 {
			t.Errorf("%s: %.0f %% ink", name, 100*share)
		}
	}
}

// The phone must carry nothing of the server: its weight is a minute of a poor cell.
func TestPhonecalcHoldsNeitherServerNorDatabase(t *testing.T) {
	list := exec.Command("go", "list", "-deps", "./cmd/phonecalc")
	list.Dir = filepath.Join("..", "..")
	list.Env = append(os.Environ(), "GOOS=js", "GOARCH=wasm")
	out, err := list.Output()
	if err != nil {
		t.Fatal(err)
	}
	deps := strings.Fields(string(out))
	found := false
	for _, dep := range deps {
		found = found || dep == "crossplumb/calc/wire"
		for _, bad := range []string{"gofiber", "fasthttp", "sqlite", "database/sql", "crossplumb/server", "crossplumb/db", "crossplumb/static", "net/http", "encoding/json"} {
			if strings.Contains(dep, bad) {
				t.Errorf("cmd/phonecalc depends on %s", dep)
			}
		}
	}
	if !found {
		t.Errorf("calc/wire is not among %d dependencies: this test looks at nothing", len(deps))
	}
	source, err := os.ReadFile(filepath.Join("..", "phonecalc", "main.go"))
	if err != nil {
		t.Fatal(err)
	}
	if n := bytes.Count(source, []byte("\n")); n > 50 {
		t.Errorf("cmd/phonecalc has %d lines, 50 are allowed: what grows belongs behind calc/wire", n)
	}
}

// A build in another folder gives the same names and bytes: paths of the machine must not get into the hashes, or every
// build would make every phone fetch everything anew.
func TestTheFolderOfTheProjectDoesNotShow(t *testing.T) {
	here, err := filepath.Abs(filepath.Join("..", "..", "static"))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(here, "node_modules", "preact")); err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal("the libraries are not there: npm ci --prefix static comes before the tests")
		}
		t.Skip("the libraries are not there: npm ci --prefix static")
	}
	there := filepath.Join(t.TempDir(), "some", "where", "else", "static")
	for _, part := range []string{"src", "style", "package.json", "tsconfig.json", "node_modules/preact", "node_modules/idb",
		"node_modules/uuidv7", "node_modules/@fontsource"} {
		target := filepath.Join(there, part)
		if err := os.MkdirAll(filepath.Dir(target), 0o755); err != nil {
			t.Fatal(err)
		}
		if info, err := os.Stat(filepath.Join(here, part)); err != nil {
			t.Fatal(err)
		} else if info.IsDir() {
			err = os.CopyFS(target, os.DirFS(filepath.Join(here, part)))
			if err != nil {
				t.Fatal(err)
			}
		} else if text, err := os.ReadFile(filepath.Join(here, part)); err != nil {
			t.Fatal(err)
		} else if err := os.WriteFile(target, text, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	chain, err := findToolchain()
	if err != nil {
		t.Fatal(err)
	}
	var built [2]*folder
	for i, static := range []string{here, there} {
		built[i] = testFolder(t)
		if _, err := bundle(static, chain, built[i], "/gen/calc-AAAAAAAA.wasm"); err != nil {
			t.Fatal(err)
		}
	}
	one, two := built[0].sorted(), built[1].sorted()
	if len(one) != len(two) || len(one) < 6 {
		t.Fatalf("%d and %d files", len(one), len(two))
	}
	for i := range one {
		if one[i].name != two[i].name || !bytes.Equal(one[i].content, two[i].content) {
			t.Errorf("%s here, %s there", one[i].name, two[i].name)
		}
	}
}
