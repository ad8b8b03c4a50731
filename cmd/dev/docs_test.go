package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// Every module that is imported, by code or tests, stands in DEVELOPERS.md
// with a reason, and every module there is imported.
func TestDependenciesAreExplained(t *testing.T) {
	if err := toRoot(); err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile("DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	explained := make(map[string]bool)
	for _, m := range regexp.MustCompile("(?m)^\\| `([a-z]+\\.[^`]+)` \\|").FindAllStringSubmatch(string(text), -1) {
		explained[m[1]] = false
	}
	format := "{{range .Imports}}{{.}}\n{{end}}{{range .TestImports}}{{.}}\n{{end}}{{range .XTestImports}}{{.}}\n{{end}}"
	out, err := exec.Command("go", "list", "-f", format, "./...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	for imp := range strings.FieldsSeq(string(out) + " honnef.co/go/tools/cmd/staticcheck") {
		first, _, _ := strings.Cut(imp, "/")
		if !strings.Contains(first, ".") {
			continue
		}
		found := false
		for module := range explained {
			if imp == module || strings.HasPrefix(imp, module+"/") {
				explained[module], found = true, true
			}
		}
		if !found {
			t.Errorf("%s is imported, and DEVELOPERS.md does not say why", imp)
		}
	}
	for module, used := range explained {
		if !used {
			t.Errorf("DEVELOPERS.md explains %s, which nothing imports", module)
		}
	}
}

// What the documents link to is there.
func TestLinks(t *testing.T) {
	if err := toRoot(); err != nil {
		t.Fatal(err)
	}
	link := regexp.MustCompile(`\]\(([^)#]+)[^)]*\)`)
	for _, doc := range []string{"README.md", "DEVELOPERS.md", "SAFETY.md"} {
		text, err := os.ReadFile(doc)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range link.FindAllStringSubmatch(string(text), -1) {
			if strings.Contains(m[1], "://") {
				continue
			}
			if _, err := os.Stat(filepath.FromSlash(m[1])); err != nil {
				t.Errorf("%s links to %s: %v", doc, m[1], err)
			}
		}
	}
}

// Every package that the floors name is in the table of DEVELOPERS.md, as far
// as it is there.
func TestFloorsAreExplained(t *testing.T) {
	if err := toRoot(); err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile("DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	for _, floor := range floors {
		for _, pkg := range floor {
			if _, err := os.Stat(pkg); err != nil || pkg == "cmd" {
				continue
			}
			if !strings.Contains(string(text), "`"+pkg+"`") {
				t.Errorf("DEVELOPERS.md does not say what lives in %s", pkg)
			}
		}
	}
}
