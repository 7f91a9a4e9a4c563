// Package layout holds no code: its test reads the import lines of the whole project
// and checks that they run only downward.
package layout

import (
	"fmt"
	"go/ast"
	"go/build/constraint"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

const module = "knell"

// rule says what the packages of a folder, and of the folders below it that have no
// rule of their own, may import. They may always import one another.
type rule struct {
	folder string
	// allow lists project folders, each with all below it.
	allow []string
	// exact lists single packages.
	exact []string
	// forbid lists packages from outside the project, each with all below it.
	forbid []string
}

// Packages from outside that the lower folders must not know.
var (
	files = []string{"os"}
	toml  = []string{"github.com/BurntSushi/toml"}
	flags = []string{"flag", "github.com/urfave/cli"}
)

// below are the folders that internal/event joins.
var below = []string{"models", "priors", "likelihood", "sampler", "internal/constants", "internal/random"}

// rules draw the project's layout. Nothing may import cmd, because no rule allows it.
var rules = []rule{
	{folder: "models/kerr", allow: []string{"internal/constants"}, forbid: join(files, toml, flags)},
	{folder: "models", allow: []string{"internal/constants"}, forbid: join(files, toml, flags)},
	{folder: "priors", allow: []string{"internal/constants"}, forbid: join(files, toml, flags)},
	{folder: "likelihood/site", allow: []string{"internal/constants"}, forbid: join(files, toml, flags)},
	{folder: "likelihood/strain", allow: []string{"internal/constants", "internal/random"}, forbid: join(toml, flags)},
	{folder: "likelihood/strain/hdf5", forbid: join(toml, flags)},
	// The likelihood shares the models' grid and buffers, and knows no remnant.
	{folder: "likelihood", allow: []string{"internal/constants", "internal/random"}, exact: []string{"models"},
		forbid: join(files, toml, flags)},
	{folder: "sampler", allow: []string{"internal/constants", "internal/random"}, forbid: join(files, toml, flags)},
	{folder: "configs"},
	{folder: "internal/constants"},
	{folder: "internal/random"},
	{folder: "internal/report", allow: []string{"internal/constants"}, forbid: join(toml, flags)},
	// The sampler declares what a keeper of states is.
	{folder: "internal/checkpoint", allow: []string{"sampler"}, forbid: join(toml, flags)},
	{folder: "internal/event", allow: append([]string{"configs", "internal/report"}, below...), forbid: flags},
	{folder: "internal", allow: append([]string{"configs", "internal"}, below...), forbid: flags},
	{folder: "validation", allow: append([]string{"configs", "internal/event", "internal/report"}, below...)},
	{folder: "cmd", allow: append([]string{"configs", "internal", "validation"}, below...)},
}

func join(lists ...[]string) []string { return slices.Concat(lists...) }

// within reports whether a slash path is a folder or lies below it.
func within(name, folder string) bool {
	return name == folder || strings.HasPrefix(name, folder+"/")
}

// ruleFor returns the rule of the longest folder that holds a package.
func ruleFor(pkg string) (found rule, ok bool) {
	for _, r := range rules {
		if within(pkg, r.folder) && len(r.folder) > len(found.folder) {
			found, ok = r, true
		}
	}
	return found, ok
}

// judge returns what is wrong with one import, or "".
func judge(pkg, imported string) string {
	r, ok := ruleFor(pkg)
	if !ok {
		return "the folder has no rule: add one where the project's layout has room for it"
	}
	target, inProject := strings.CutPrefix(imported, module+"/")
	if !inProject {
		for _, f := range r.forbid {
			if within(imported, f) {
				return fmt.Sprintf("%s must not know %s", r.folder, f)
			}
		}
		return ""
	}
	if own, ok := ruleFor(target); ok && own.folder == r.folder {
		return ""
	}
	for _, a := range r.allow {
		if within(target, a) {
			return ""
		}
	}
	if slices.Contains(r.exact, target) {
		return ""
	}
	// A folder may use the parts below it, such as models its models/kerr.
	if within(target, r.folder) {
		return ""
	}
	return fmt.Sprintf("%s may import only %s", r.folder, strings.Join(join([]string{"itself"}, r.allow, r.exact), ", "))
}

// check returns one line per import that runs against the rules, for every Go file
// below root, whatever system it is for. Tests, and generators of tables (files that no
// build includes, and main packages outside cmd, which nothing can import), may look
// wherever they need to: they are not part of the program.
func check(root string) (violations []string, packages int, err error) {
	seen := map[string]bool{}
	err = filepath.WalkDir(root, func(name string, entry fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		base := entry.Name()
		if entry.IsDir() {
			if name != root && (base == "testdata" || strings.HasPrefix(base, ".") || strings.HasPrefix(base, "_")) {
				return filepath.SkipDir
			}
			return nil
		}
		if !strings.HasSuffix(base, ".go") || strings.HasSuffix(base, "_test.go") {
			return nil
		}
		relative, err := filepath.Rel(root, name)
		if err != nil {
			return err
		}
		relative = filepath.ToSlash(relative)
		parsed, err := parser.ParseFile(token.NewFileSet(), name, nil, parser.ImportsOnly|parser.ParseComments)
		if err != nil {
			return err
		}
		if ignored(parsed) || (parsed.Name.Name == "main" && !within(relative, "cmd")) {
			return nil
		}
		seen[path.Dir(relative)] = true
		for _, i := range parsed.Imports {
			imported, err := strconv.Unquote(i.Path.Value)
			if err != nil {
				return err
			}
			if wrong := judge(path.Dir(relative), imported); wrong != "" {
				violations = append(violations, fmt.Sprintf("%s imports %s: %s", relative, imported, wrong))
			}
		}
		return nil
	})
	return violations, len(seen), err
}

// ignored reports whether no build includes a file.
func ignored(f *ast.File) bool {
	for _, group := range f.Comments {
		for _, c := range group.List {
			if c.Pos() < f.Package && constraint.IsGoBuild(c.Text) && strings.TrimSpace(strings.TrimPrefix(c.Text, "//go:build")) == "ignore" {
				return true
			}
		}
	}
	return false
}

func TestImportsRunDownward(t *testing.T) {
	violations, packages, err := check(filepath.Join("..", ".."))
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range violations {
		t.Error(v)
	}
	if packages < 5 {
		t.Errorf("%d packages read, want at least 5: is this the project?", packages)
	}
}

func TestMainPackagesOutsideCmdAreFree(t *testing.T) {
	for folder, wrong := range map[string]bool{"models/kerr/internal/tabulate": false, "cmd/knell": true} {
		root := t.TempDir()
		if err := os.MkdirAll(filepath.Join(root, folder), 0o755); err != nil {
			t.Fatal(err)
		}
		text := "package main\n\nimport _ \"knell/helpers\"\n"
		if err := os.WriteFile(filepath.Join(root, folder, "main.go"), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
		if violations, _, err := check(root); err != nil || (len(violations) > 0) != wrong {
			t.Errorf("%s: %q, %v; want any: %t", folder, violations, err, wrong)
		}
	}
}

func TestCheckSeesPlantedImports(t *testing.T) {
	for _, tc := range []struct {
		file    string
		imports string
		wrong   bool
	}{
		{"models/a.go", "knell/priors", true},
		{"models/a.go", "knell/sampler", true},
		{"models/a.go", "knell/likelihood", true},
		{"models/a.go", "knell/models/kerr", false},
		{"models/a.go", "knell/internal/constants", false},
		{"models/a.go", "os", true},
		{"models/table_windows.go", "os", true}, // whatever the system
		{"models/kerr/a.go", "knell/models", true},
		{"models/kerr/a.go", "knell/models/kerr/angular", false},
		{"priors/a.go", "knell/models", true},
		{"priors/a.go", "knell/sampler", true},
		{"priors/a.go", "gonum.org/v1/gonum/mathext", false},
		{"sampler/a.go", "knell/priors", true},
		{"sampler/a.go", "knell/likelihood", true},
		{"sampler/a.go", "knell/internal/random", false},
		{"sampler/a.go", "knell/internal/event", true},
		{"likelihood/a.go", "knell/models", false},
		{"likelihood/a.go", "knell/models/kerr", true},
		{"likelihood/a.go", "knell/priors", true},
		{"likelihood/a.go", "knell/likelihood/strain", false},
		{"likelihood/a.go", "github.com/BurntSushi/toml", true},
		{"likelihood/strain/a.go", "knell/models/kerr", true},
		{"likelihood/strain/a.go", "knell/likelihood", true},
		{"likelihood/strain/a.go", "os", false},
		{"likelihood/strain/hdf5/a.go", "knell/models", true},
		{"likelihood/strain/hdf5/a.go", "knell/likelihood/strain", true},
		{"likelihood/site/a.go", "knell/models", true},
		{"likelihood/site/a.go", "knell/likelihood/strain", true},
		{"internal/report/a.go", "knell/sampler", true},
		{"internal/report/a.go", "knell/likelihood/site", true},
		{"internal/report/a.go", "knell/models", true},
		{"internal/checkpoint/a.go", "knell/sampler", false},
		{"internal/checkpoint/a.go", "knell/internal/event", true},
		{"internal/event/a.go", "knell/internal/checkpoint", true},
		{"internal/event/a.go", "knell/sampler", false},
		{"internal/event/a.go", "knell/cmd/knell", true},
		{"internal/event/a.go", "knell/validation", true},
		{"internal/event/a.go", "github.com/urfave/cli/v2", true},
		{"internal/constants/a.go", "knell/internal/random", true},
		{"internal/cluster/a.go", "knell/internal/event", false},
		{"validation/a.go", "knell/internal/event", false},
		{"validation/a.go", "knell/cmd/knell", true},
		{"configs/a.go", "knell/models", true},
		{"configs/a.go", "embed", false},
		{"cmd/knell/a.go", "knell/internal/report", false},
		{"cmd/other/a.go", "knell/validation", false},
		{"helpers/a.go", "fmt", true}, // a folder that the layout does not know
		{"sampler/a_test.go", "knell/priors", false},
		{"models/testdata/a.go", "knell/priors", false},
	} {
		t.Run(tc.file+" imports "+tc.imports, func(t *testing.T) {
			root := t.TempDir()
			name := filepath.Join(root, filepath.FromSlash(tc.file))
			if err := os.MkdirAll(filepath.Dir(name), 0o755); err != nil {
				t.Fatal(err)
			}
			text := fmt.Sprintf("// A comment.\n\npackage a\n\nimport _ %q\n", tc.imports)
			if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
				t.Fatal(err)
			}
			violations, _, err := check(root)
			if err != nil {
				t.Fatal(err)
			}
			if got := len(violations) > 0; got != tc.wrong {
				t.Errorf("violations %q, want any: %t", violations, tc.wrong)
			}
			if tc.wrong {
				return
			}
			// In a generator even an import that no rule allows is nobody's business.
			if err := os.WriteFile(name, []byte("//go:build ignore\n\n"+strings.Replace(text, tc.imports, "knell/cmd/knell", 1)), 0o644); err != nil {
				t.Fatal(err)
			}
			if violations, _, err := check(root); err != nil || len(violations) > 0 {
				t.Errorf("generator: %q, %v", violations, err)
			}
		})
	}
}
