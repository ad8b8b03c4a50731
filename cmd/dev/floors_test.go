package main

import (
	"encoding/json"
	"go/ast"
	"go/parser"
	"go/token"
	"io/fs"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// floors are the packages from the ground up. A package may import those on
// lower floors, and on its own floor none but its own parts.
var floors = [][]string{
	{"drift/nav"},
	{"drift/sky", "drift/weather"},
	{"drift"},
	{"search/detect", "search/turn", "search/pattern", "search/incident"},
	{"search/effort"},
	{"search/plan"},
	{"search/advice"},
	{"search/drill"},
	{"server/store", "server/hub", "server/feed", "server/gate", "server/report"},
	{"server/demo"},
	{"server"},
	{"pwa"},
	{"cmd"},
}

// floorOf is the floor of a package and the name under which it stands there.
func floorOf(pkg string) (floor int, name string) {
	floor = -1
	for i, f := range floors {
		for _, n := range f {
			if (pkg == n || strings.HasPrefix(pkg, n+"/")) && len(n) > len(name) {
				floor, name = i, n
			}
		}
	}
	return floor, name
}

type listed struct {
	ImportPath string
	Imports    []string
	GoFiles    []string
	Dir        string
}

func packagesOf(t *testing.T) []listed {
	t.Helper()
	out, err := exec.Command("go", "list", "-json=ImportPath,Imports,GoFiles,Dir", "wakeback/...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	dec := json.NewDecoder(strings.NewReader(string(out)))
	var pkgs []listed
	for dec.More() {
		var p listed
		if err := dec.Decode(&p); err != nil {
			t.Fatal(err)
		}
		pkgs = append(pkgs, p)
	}
	return pkgs
}

// No import runs up the floors, and the libraries that do storing, routing
// and streaming stay where they belong.
func TestFloors(t *testing.T) {
	only := map[string][]string{
		"go.etcd.io/bbolt":             {"server/store"},
		"github.com/labstack/echo/v4":  {"server"},
		"github.com/gorilla/websocket": {"server", "server/hub"},
	}
	for _, p := range packagesOf(t) {
		pkg := strings.TrimPrefix(p.ImportPath, "wakeback/")
		floor, name := floorOf(pkg)
		if floor < 0 {
			t.Errorf("%s is on no floor", pkg)
			continue
		}
		for _, imp := range p.Imports {
			if in, ok := strings.CutPrefix(imp, "wakeback/"); ok {
				if below, other := floorOf(in); below > floor || below == floor && other != name {
					t.Errorf("%s imports %s, which is not below it", pkg, in)
				}
			}
			for lib, where := range only {
				if (imp == lib || strings.HasPrefix(imp, lib+"/")) && !slices.Contains(where, pkg) {
					t.Errorf("%s imports %s, which only %v may", pkg, imp, where)
				}
			}
			if floor <= 7 && !engineImport(imp) {
				t.Errorf("%s imports %s: the engine imports the standard library, golang/geo and lower floors", pkg, imp)
			}
		}
	}
}

// engineImport: what the engine may import. It has no network, no disk, no
// processes of its own.
func engineImport(imp string) bool {
	first, _, _ := strings.Cut(imp, "/")
	switch {
	case first == "wakeback", strings.HasPrefix(imp, "github.com/golang/geo/"):
		return true
	case strings.Contains(first, "."):
		return false
	}
	return !slices.Contains([]string{"os", "net", "syscall", "os/exec", "net/http", "io/ioutil", "log", "log/slog", "unsafe"}, imp)
}

// forbidden are uses of the clock, of chance and of goroutines in the engine.
var forbidden = map[string][]string{
	"time": {"Now", "Since", "Until", "Sleep", "After", "NewTimer", "NewTicker", "Tick", "AfterFunc"},
	"rand": {"Int", "IntN", "Float64", "NormFloat64", "Perm", "Shuffle", "Uint64", "N"},
}

// The engine takes the time and the seed as arguments and starts no goroutine.
func TestEngineIsPure(t *testing.T) {
	for _, p := range packagesOf(t) {
		if floor, _ := floorOf(strings.TrimPrefix(p.ImportPath, "wakeback/")); floor < 0 || floor > 7 {
			continue
		}
		for _, file := range p.GoFiles {
			set := token.NewFileSet()
			tree, err := parser.ParseFile(set, filepath.Join(p.Dir, file), nil, 0)
			if err != nil {
				t.Fatal(err)
			}
			ast.Inspect(tree, func(n ast.Node) bool {
				switch n := n.(type) {
				case *ast.GoStmt:
					t.Errorf("%s starts a goroutine", set.Position(n.Pos()))
				case *ast.SelectorExpr:
					if id, ok := n.X.(*ast.Ident); ok && id.Obj == nil && slices.Contains(forbidden[id.Name], n.Sel.Name) {
						t.Errorf("%s uses %s.%s", set.Position(n.Pos()), id.Name, n.Sel.Name)
					}
				}
				return true
			})
		}
	}
}

// Every package says what it is for, once.
func TestPackageDocs(t *testing.T) {
	for _, p := range packagesOf(t) {
		docs := 0
		for _, file := range p.GoFiles {
			tree, err := parser.ParseFile(token.NewFileSet(), filepath.Join(p.Dir, file), nil, parser.PackageClauseOnly|parser.ParseComments)
			if err != nil {
				t.Fatal(err)
			}
			if tree.Doc != nil && len(tree.Doc.Text()) > 0 {
				docs++
			}
		}
		if docs != 1 {
			t.Errorf("%s has %d package docs, want 1", p.ImportPath, docs)
		}
	}
}

// topLevel is what stands at the top of the tree.
var topLevel = []string{"server", "search", "drift", "pwa", "cmd", "testdata", "go.mod", "go.sum", "README.md", "DEVELOPERS.md", "SAFETY.md", "LICENSE"}

// unwanted are words that have no place in the project: paths of one machine,
// hosts of registries, and other people's names for places of work.
var unwanted = regexp.MustCompile(`(/roo` + `t/|/wor` + `k/|registry\.npm` + `js|proxy\.gol` + `ang|deb\.deb` + `ian)`)

func TestTree(t *testing.T) {
	if err := toRoot(); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command("git", "ls-files", "-z").Output()
	if err != nil {
		t.Skip("not a git checkout")
	}
	for _, path := range strings.Split(strings.TrimRight(string(out), "\x00"), "\x00") {
		top, _, _ := strings.Cut(path, "/")
		if !strings.HasPrefix(top, ".") && !slices.Contains(topLevel, top) {
			t.Errorf("%s: no such entry belongs at the top of the tree", top)
		}
		checkWords(t, path)
	}
}

func checkWords(t *testing.T, path string) {
	t.Helper()
	info, err := fs.Stat(rootFS{}, path)
	if err != nil || info.IsDir() || info.Size() > 1<<20 || path == "go.sum" {
		return
	}
	text, err := fs.ReadFile(rootFS{}, path)
	if err != nil {
		t.Fatal(err)
	}
	if m := unwanted.Find(text); m != nil {
		t.Errorf("%s has %q in it", path, m)
	}
}
