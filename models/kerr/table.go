package kerr

import (
	"embed"
	"fmt"
	"math"
	"sync"

	"knell/models/kerr/internal/chart"
)

//go:generate go run ./internal/tabulate

//go:embed barrier
var barrierFiles embed.FS

// table is a chart made ready for section: polynomials in powers of x, and for
// even parity with that parity's phase. It is shared and never changes.
type table struct {
	low, high, gap float64
	panels         []chart.Panel
}

// tableKind is what a table holds.
type tableKind int

const (
	oddReflection tableKind = iota
	evenReflection
	transmission
	tableKinds
)

// tableMaxL is the largest l with tables.
const tableMaxL = 4

// tables are decoded when first asked for, once. Those of m < 0 are those of
// -m, by R_l-m(ω) = conj R_lm(-ω).
var tables [tableKinds][tableMaxL + 1][tableMaxL + 1]struct {
	once  sync.Once
	table *table
	err   error
}

// loadTable returns the table of (l, m), m >= 0.
func loadTable(kind tableKind, l, m int) (*table, error) {
	t := &tables[kind][l][m]
	t.once.Do(func() {
		var file []byte
		if file, t.err = barrierFiles.ReadFile(tableName(kind, l, m)); t.err == nil {
			t.table, t.err = newTable(file, kind, l, m)
		}
	})
	return t.table, t.err
}

// tableName is the file that a table comes from.
func tableName(kind tableKind, l, m int) string {
	name := "reflection"
	if kind == transmission {
		name = "transmission"
	}
	return fmt.Sprintf("barrier/%s-%d%d.bin", name, l, m)
}

// newTable decodes the file of a table. A file of something else is an error.
func newTable(file []byte, kind tableKind, l, m int) (*table, error) {
	c, err := chart.Decode(file)
	if err != nil {
		return nil, err
	}
	want := chart.Reflection
	if kind == transmission {
		want = chart.Transmission
	}
	if c.Kind != want || c.L != l || c.M != m {
		return nil, fmt.Errorf("kerr: barrier table is of kind %d, (%d,%d), want kind %d, (%d,%d)", c.Kind, c.L, c.M, want, l, m)
	}
	end := 0.0
	for i := range c.Panels {
		p := &c.Panels[i]
		if p.Low != end {
			return nil, fmt.Errorf("kerr: barrier table (%d,%d) has a panel from %g on, want %g", l, m, p.Low, end)
		}
		end = p.High
	}
	if end != math.Atanh(MaxSpin) || !(c.Low < c.High) || !(c.Gap >= 0) {
		return nil, fmt.Errorf("kerr: barrier table (%d,%d) ends at spin %g, want %g", l, m, math.Tanh(end), MaxSpin)
	}
	if kind == evenReflection {
		if err := turnEven(c); err != nil {
			return nil, err
		}
	}
	for i := range c.Panels {
		toPowers(&c.Panels[i])
	}
	return &table{low: c.Low, high: c.High, gap: c.Gap, panels: c.Panels}, nil
}

// toPowers turns Chebyshev polynomials in x into powers of x. The coefficients
// of a piece fall by ten or so from one degree to the next, so no digits go.
func toPowers(p *chart.Panel) {
	var power [cellTerms][cellTerms]float64 // T_n = Σ_i power[n][i] xⁱ
	power[0][0], power[1][1] = 1, 1
	for n := 2; n < cellTerms; n++ {
		for i := range cellTerms {
			power[n][i] = -power[n-2][i]
			if i > 0 {
				power[n][i] += 2 * power[n-1][i-1]
			}
		}
	}
	// Upwards: the i-th power takes from T_n with n >= i only.
	for i := range cellTerms {
		to := p.Planes[i]
		for n := i; n < cellTerms; n++ {
			f := power[n][i]
			if n == i {
				for j := range to {
					to[j] *= f
				}
				continue
			}
			if f == 0 {
				continue
			}
			// A row is the terms of a real or an imaginary part.
			width, wide := chart.Terms[n], chart.Terms[i]
			for row := range 2 * p.Pieces {
				a, b := to[row*wide:], p.Planes[n][row*width:(row+1)*width]
				for j, v := range b {
					a[j] += f * v
				}
			}
		}
	}
}
