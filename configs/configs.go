// Package configs embeds the ready event files. Everything in them is invented:
// places, times and signals.
package configs

import (
	"embed"
	"fmt"
	"io/fs"
	"path"
	"sort"
	"strings"
)

//go:embed demos/*.toml
var demos embed.FS

// DefaultDemo is the demo event that is weighed when none is named.
const DefaultDemo = "surface"

// DemoNames lists the demo events.
func DemoNames() []string {
	entries, err := fs.ReadDir(demos, "demos")
	if err != nil {
		panic("configs: " + err.Error())
	}
	var names []string
	for _, e := range entries {
		names = append(names, strings.TrimSuffix(e.Name(), ".toml"))
	}
	sort.Strings(names)
	return names
}

// Demo returns the text of the demo event's file and the name that stands for
// it in messages.
func Demo(name string) (file string, text []byte, err error) {
	file = path.Join("demos", name+".toml")
	text, err = demos.ReadFile(file)
	if err != nil {
		return "", nil, fmt.Errorf("demo %q, want one of %s", name, strings.Join(DemoNames(), ", "))
	}
	return file, text, nil
}
