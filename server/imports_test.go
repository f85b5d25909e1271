package main

import (
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

const module = "fathombend"

// mayImport is the direction of the house: for each room, the rooms it may
// import. A room that is not here may not exist.
var mayImport = map[string][]string{
	"server":             {"catalogue", "catalogue/planform", "catalogue/land", "stats", "stats/earth", "stats/expectation", "views", "static", "seed"},
	"catalogue":          {"catalogue/planform", "catalogue/land"},
	"catalogue/planform": {},
	"catalogue/land":     {},
	"stats":              {"stats/earth"},
	"stats/earth":        {},
	"stats/expectation":  {"stats", "stats/earth"},
	"views":              {"catalogue", "catalogue/planform", "catalogue/land", "stats", "stats/earth", "stats/expectation"},
	"static":             {},
	"seed":               {"catalogue", "catalogue/planform", "catalogue/land", "stats/earth"},
}

// outside is what the rooms that must stay pure may import from other modules;
// rooms that are not here may import any.
var outside = map[string][]string{
	"stats":              {"gonum.org/v1/gonum"},
	"stats/earth":        {"gonum.org/v1/gonum"},
	"stats/expectation":  {"gonum.org/v1/gonum"},
	"catalogue/planform": {"gonum.org/v1/gonum", "modernc.org/sqlite"}, // a GeoPackage is an SQLite file
	"catalogue/land":     {},
	"static":             {},
}

// never is what a room may not import, from anywhere.
var never = map[string][]string{
	"catalogue":         {"net/http", "github.com/labstack/echo", "github.com/a-h/templ"},
	"views":             {"database/sql", "modernc.org/sqlite", "github.com/labstack/echo"},
	"stats":             {"net/http", "database/sql", "os/exec"},
	"stats/earth":       {"net/http", "database/sql", "os/exec"},
	"stats/expectation": {"net/http", "database/sql", "os/exec"},
}

type listedPackage struct {
	ImportPath   string
	Imports      []string
	TestImports  []string
	XTestImports []string
}

// room is the folder of a package below the module, or "" outside of it. A
// helper package below a room with an entry in mayImport counts as its own.
func room(importPath string) string {
	rest, ok := strings.CutPrefix(importPath, module+"/")
	if !ok {
		return ""
	}
	return rest
}

func listPackages(t *testing.T) []listedPackage {
	t.Helper()
	cmd := exec.Command("go", "list", "-json=ImportPath,Imports,TestImports,XTestImports", "./...")
	cmd.Dir = ".."
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	var all []listedPackage
	for dec := json.NewDecoder(strings.NewReader(string(out))); ; {
		var p listedPackage
		if err := dec.Decode(&p); errors.Is(err, io.EOF) {
			return all
		} else if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

// wrongWay returns what is wrong with one import of a room, "" if nothing is.
func wrongWay(from, path string) string {
	under := func(prefix string) bool { return path == prefix || strings.HasPrefix(path, prefix+"/") }
	if slices.ContainsFunc(never[from], under) {
		return "never belongs there"
	}
	if to := room(path); to != "" {
		if !slices.Contains(mayImport[from], to) {
			return "points the wrong way"
		}
		return ""
	}
	allowed, pure := outside[from]
	if pure && strings.Contains(strings.SplitN(path, "/", 2)[0], ".") && !slices.ContainsFunc(allowed, under) {
		return "is neither the standard library nor on the list of a pure room"
	}
	return ""
}

func TestImportsPointOneWay(t *testing.T) {
	all := listPackages(t)
	if len(all) < 8 {
		t.Fatalf("go list found %d packages; expected the whole house", len(all))
	}
	for _, p := range all {
		from := room(p.ImportPath)
		if _, known := mayImport[from]; !known {
			t.Errorf("%s: a new room; say in mayImport what it may import", p.ImportPath)
			continue
		}
		for _, imp := range p.Imports {
			if why := wrongWay(from, imp); why != "" {
				t.Errorf("%s imports %s: %s", p.ImportPath, imp, why)
			}
		}
		// Tests may use comparison helpers, but no room that knows them.
		for _, imp := range slices.Concat(p.TestImports, p.XTestImports) {
			to := room(imp)
			if to != "" && to != from && !slices.Contains(mayImport[from], to) {
				t.Errorf("a test of %s imports %s: points the wrong way", p.ImportPath, imp)
			}
		}
	}
}

// The rules themselves: each of these must be refused, the last ones allowed.
func TestWrongWayRefuses(t *testing.T) {
	for _, c := range []struct {
		from, path string
		ok         bool
	}{
		{"catalogue", "fathombend/server", false},
		{"catalogue", "fathombend/views", false},
		{"catalogue", "github.com/labstack/echo/v4", false},
		{"stats", "fathombend/catalogue", false},
		{"stats", "fathombend/stats/expectation", false},
		{"stats/earth", "fathombend/stats", false},
		{"stats", "modernc.org/sqlite", false},
		{"views", "fathombend/server", false},
		{"views", "database/sql", false},
		{"catalogue/planform", "fathombend/catalogue", false},
		{"seed", "fathombend/server", false},
		{"server", "fathombend/stats/expectation", true},
		{"stats/expectation", "fathombend/stats", true},
		{"stats", "gonum.org/v1/gonum/mat", true},
		{"stats", "math", true},
	} {
		if got := wrongWay(c.from, c.path) == ""; got != c.ok {
			t.Errorf("%s imports %s: allowed %v, want %v", c.from, c.path, got, c.ok)
		}
	}
}

// topLevel is what may stand at the top of the tree; dot files may too.
var topLevel = []string{"server", "catalogue", "stats", "views", "static", "seed", "go.mod", "go.sum", "README.md", "DEVELOPERS.md", "LICENSE"}

func TestTopLevelIsFixed(t *testing.T) {
	// Only what is kept counts: a built binary or a catalogue of one's own may
	// lie about.
	out, err := exec.Command("git", "-C", "..", "ls-files", "-z").Output()
	if err != nil {
		// An unpacked source archive has no git: read the folder.
		entries, err := os.ReadDir("..")
		if err != nil {
			t.Fatal(err)
		}
		for _, e := range entries {
			out = append(out, e.Name()+"\x00"...)
		}
	}
	seen := map[string]bool{}
	for _, path := range strings.Split(strings.TrimRight(string(out), "\x00"), "\x00") {
		top := strings.SplitN(filepath.ToSlash(path), "/", 2)[0]
		if strings.HasPrefix(top, ".") || seen[top] {
			continue
		}
		seen[top] = true
		if !slices.Contains(topLevel, top) {
			t.Errorf("%s stands at the top of the tree; it belongs in a room", top)
		}
	}
	for _, must := range topLevel {
		if !seen[must] {
			t.Errorf("%s is missing from the top of the tree", must)
		}
	}
}
