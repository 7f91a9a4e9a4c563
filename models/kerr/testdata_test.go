package kerr

import (
	"bufio"
	"os"
	"strconv"
	"strings"
	"testing"
)

// readTable reads a file of testdata: comments, a header, then numbers. Each row
// comes back by column name.
func readTable(t *testing.T, name string) []map[string]float64 {
	t.Helper()
	f, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var names []string
	var rows []map[string]float64
	for sc := bufio.NewScanner(f); sc.Scan(); {
		if strings.HasPrefix(sc.Text(), "#") {
			continue
		}
		fields := strings.Split(sc.Text(), ",")
		if names == nil {
			names = fields
			continue
		}
		row := map[string]float64{}
		for i, field := range fields {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatalf("%s: %q: %v", name, sc.Text(), err)
			}
			row[names[i]] = v
		}
		rows = append(rows, row)
	}
	if len(rows) == 0 {
		t.Fatalf("%s: no rows", name)
	}
	return rows
}
