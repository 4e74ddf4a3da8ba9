package main_test

import (
	"bufio"
	"encoding/json"
	"errors"
	"go/ast"
	"go/parser"
	"go/token"
	"io"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

const root = "../.."

// layers lists the packages from the bottom up; a package may import only what stands below its own layer, or what its row allows.
var layers = []struct {
	prefix  string
	imports []string // packages of this module that it may import, by prefix
}{
	{"cedewright/portfolio/fault", nil},
	{"cedewright/portfolio/csvfile", []string{"cedewright/portfolio/fault"}},
	{"cedewright/portfolio/sample", []string{"cedewright/portfolio/fault"}},
	{"cedewright/portfolio/loss", []string{"cedewright/portfolio/fault", "cedewright/portfolio/csvfile", "cedewright/portfolio/sample"}},
	{"cedewright/portfolio/treaty", []string{"cedewright/portfolio/fault", "cedewright/portfolio/sample", "cedewright/portfolio/loss"}},
	{"cedewright/portfolio/capital", []string{"cedewright/portfolio/fault", "cedewright/portfolio/sample"}},
	{"cedewright/portfolio/security", []string{"cedewright/portfolio/fault", "cedewright/portfolio/sample"}},
	{"cedewright/portfolio/portfoliotest", []string{"cedewright/portfolio"}},
	{"cedewright/market", []string{"cedewright/portfolio"}},
	{"cedewright/optimize/internal/ga", nil},
	{"cedewright/optimize", []string{"cedewright/portfolio", "cedewright/market", "cedewright/optimize/internal/ga"}},
	{"cedewright/configs", nil},
	{"cedewright/cmd/internal/settings", []string{"cedewright/portfolio", "cedewright/market", "cedewright/optimize", "cedewright/configs"}},
	{"cedewright/cmd/internal/study", []string{"cedewright/portfolio", "cedewright/market", "cedewright/optimize", "cedewright/cmd/internal/settings"}},
	{"cedewright/cmd/internal/report", []string{"cedewright/portfolio", "cedewright/market", "cedewright/optimize", "cedewright/cmd/internal/study"}},
	{"cedewright/cmd/internal/cli", []string{"cedewright/portfolio", "cedewright/optimize", "cedewright/market", "cedewright/cmd/internal"}},
	{"cedewright/cmd/cedewright", []string{"cedewright/cmd/internal/cli"}},
}

// onlyUsers names, for a library that has traps, the one package that may import it.
var onlyUsers = map[string]string{
	"github.com/MaxHalford/eaopt": "cedewright/optimize/internal/ga",
	"github.com/spf13/viper":      "cedewright/cmd/internal/settings",
}

type listed struct {
	ImportPath string
	Imports    []string
}

func listPackages(t *testing.T) []listed {
	t.Helper()
	command := exec.Command("go", "list", "-json=ImportPath,Imports", "./...")
	command.Dir = root
	out, err := command.Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	var all []listed
	for decoder := json.NewDecoder(strings.NewReader(string(out))); ; {
		var p listed
		if err := decoder.Decode(&p); errors.Is(err, io.EOF) {
			return all
		} else if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

func TestImportsFlowOneWay(t *testing.T) {
	packages := listPackages(t)
	if len(packages) < 10 {
		t.Fatalf("go list found only %d packages", len(packages))
	}
	for _, p := range packages {
		row := -1
		for i, l := range layers {
			if p.ImportPath == l.prefix {
				row = i
			}
		}
		if row < 0 {
			t.Errorf("%s has no row in layers: say what it may import", p.ImportPath)
			continue
		}
		for _, imported := range p.Imports {
			for library, user := range onlyUsers {
				if strings.HasPrefix(imported, library) && p.ImportPath != user {
					t.Errorf("%s imports %s; only %s may", p.ImportPath, imported, user)
				}
			}
			if !strings.HasPrefix(imported, "cedewright/") {
				continue
			}
			allowed := false
			for _, prefix := range layers[row].imports {
				allowed = allowed || imported == prefix || strings.HasPrefix(imported, prefix+"/")
			}
			if !allowed {
				t.Errorf("%s imports %s, against the direction portfolio ← market ← optimize ← cmd", p.ImportPath, imported)
			}
		}
	}
}

func goFiles(t *testing.T) []string {
	t.Helper()
	var files []string
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() && strings.HasPrefix(d.Name(), ".") && path != root {
			return filepath.SkipDir
		}
		if strings.HasSuffix(path, ".go") {
			files = append(files, path)
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

// TestFilesAreShort holds every Go file to 500 lines: one that grows beyond tells more than one idea.
func TestFilesAreShort(t *testing.T) {
	for _, path := range goFiles(t) {
		f, err := os.Open(path)
		if err != nil {
			t.Fatal(err)
		}
		lines := 0
		for s := bufio.NewScanner(f); s.Scan(); {
			lines++
		}
		f.Close()
		if lines > 500 {
			t.Errorf("%s has %d lines", path, lines)
		}
	}
}

// TestExportedNamesAreDocumented wants a comment on every exported type, function, method, and group of constants or variables.
func TestExportedNamesAreDocumented(t *testing.T) {
	for _, path := range goFiles(t) {
		if strings.HasSuffix(path, "_test.go") {
			continue
		}
		set := token.NewFileSet()
		file, err := parser.ParseFile(set, path, nil, parser.ParseComments)
		if err != nil {
			t.Fatal(err)
		}
		for _, declaration := range file.Decls {
			for _, name := range undocumented(declaration) {
				t.Errorf("%s: %s has no comment", set.Position(declaration.Pos()), name)
			}
		}
	}
}

func undocumented(declaration ast.Decl) []string {
	var names []string
	switch d := declaration.(type) {
	case *ast.FuncDecl:
		if d.Doc == nil && d.Name.IsExported() && exportedReceiver(d) {
			names = append(names, d.Name.Name)
		}
	case *ast.GenDecl:
		for _, spec := range d.Specs {
			switch s := spec.(type) {
			case *ast.TypeSpec:
				if s.Name.IsExported() && d.Doc == nil && s.Doc == nil {
					names = append(names, s.Name.Name)
				}
			case *ast.ValueSpec:
				for _, n := range s.Names {
					if n.IsExported() && d.Doc == nil && s.Doc == nil && s.Comment == nil {
						names = append(names, n.Name)
					}
				}
			}
		}
	}
	return names
}

func exportedReceiver(d *ast.FuncDecl) bool {
	if d.Recv == nil {
		return true
	}
	kind := d.Recv.List[0].Type
	if star, ok := kind.(*ast.StarExpr); ok {
		kind = star.X
	}
	name, ok := kind.(*ast.Ident)
	return ok && name.IsExported()
}
