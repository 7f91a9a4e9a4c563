package report

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"github.com/parquet-go/parquet-go"
)

// Posterior holds equal-weight posterior samples of one hypothesis.
type Posterior struct {
	Name    string   // of the hypothesis
	Columns []string // parameters and derived columns, each once
	Units   []string // one per column, empty for a pure number; nil if none is known
	// Values holds one slice per column, all of one length: Values[column][sample].
	// A value may be NaN where a derived column means nothing.
	Values [][]float64
}

// check returns an error for a posterior that no file could hold.
func (p *Posterior) check() error {
	if len(p.Columns) == 0 {
		return fmt.Errorf("report: posterior %q has no columns", p.Name)
	}
	if len(p.Values) != len(p.Columns) {
		return fmt.Errorf("report: posterior %q has %d columns of values and %d names", p.Name, len(p.Values), len(p.Columns))
	}
	if p.Units != nil && len(p.Units) != len(p.Columns) {
		return fmt.Errorf("report: posterior %q has %d units for %d columns", p.Name, len(p.Units), len(p.Columns))
	}
	for i, name := range p.Columns {
		if name == "" || slices.Index(p.Columns, name) != i {
			return fmt.Errorf("report: posterior %q: column %d is named %q, want a name of its own", p.Name, i, name)
		}
		if got, want := len(p.Values[i]), len(p.Values[0]); got != want {
			return fmt.Errorf("report: posterior %q: column %s has %d samples, want %d like %s", p.Name, name, got, want, p.Columns[0])
		}
	}
	return nil
}

// PosteriorFile returns the name of a hypothesis's posterior file, such as
// posterior-horizon.csv for the extension .csv. Letters, digits, '-', '_' and '.'
// stay; every other run of characters becomes one '-'.
func PosteriorFile(hypothesis, extension string) string {
	var name strings.Builder
	name.WriteString("posterior-")
	skipped := false
	for _, r := range hypothesis {
		switch {
		case r >= 'a' && r <= 'z', r >= 'A' && r <= 'Z', r >= '0' && r <= '9', r == '-', r == '_', r == '.':
			if skipped {
				name.WriteByte('-')
				skipped = false
			}
			name.WriteRune(r)
		default:
			skipped = true
		}
	}
	if skipped {
		name.WriteByte('-')
	}
	return name.String() + extension
}

// WriteCSV writes a header of column names and one row per sample. Every number is
// the shortest text that reads back as the same float64; NaN and ±Inf are written
// so. The columns are those of WriteParquet.
func (p *Posterior) WriteCSV(out io.Writer) error {
	if err := p.check(); err != nil {
		return err
	}
	var text bytes.Buffer
	header := csv.NewWriter(&text) // a name with a comma needs its quotes; numbers never do
	if err := header.Write(p.Columns); err != nil {
		return err
	}
	header.Flush()
	row := make([]byte, 0, 32*len(p.Columns))
	for i := range p.Values[0] {
		row = row[:0]
		for c, column := range p.Values {
			if c > 0 {
				row = append(row, ',')
			}
			row = strconv.AppendFloat(row, column[i], 'g', -1, 64)
		}
		text.Write(append(row, '\n'))
	}
	_, err := out.Write(text.Bytes())
	return err
}

// columnGroup is a group of Parquet columns that keeps its own order; the library's
// Group sorts by name.
type columnGroup struct {
	parquet.Group
	order []string
}

// Fields implements parquet.Node.
func (g columnGroup) Fields() []parquet.Field {
	fields := g.Group.Fields()
	slices.SortFunc(fields, func(a, b parquet.Field) int {
		return slices.Index(g.order, a.Name()) - slices.Index(g.order, b.Name())
	})
	return fields
}

// WriteParquet writes one required column of doubles per posterior column, in order,
// compressed, with the units as metadata under "unit.NAME".
func (p *Posterior) WriteParquet(out io.Writer) error {
	if err := p.check(); err != nil {
		return err
	}
	group := columnGroup{parquet.Group{}, p.Columns}
	for _, name := range p.Columns {
		group.Group[name] = parquet.Leaf(parquet.DoubleType)
	}
	options := []parquet.WriterOption{
		parquet.NewSchema("posterior", group),
		parquet.Compression(&parquet.Zstd),
		parquet.CreatedBy("knell", "", ""),
	}
	for i, unit := range p.Units {
		options = append(options, parquet.KeyValueMetadata("unit."+p.Columns[i], unit))
	}
	writer := parquet.NewWriter(out, options...)
	row := make(parquet.Row, len(p.Columns))
	for i := range p.Values[0] {
		for c, column := range p.Values {
			row[c] = parquet.DoubleValue(column[i]).Level(0, 0, c)
		}
		if _, err := writer.WriteRows([]parquet.Row{row}); err != nil {
			return fmt.Errorf("report: posterior %q: %w", p.Name, err)
		}
	}
	return writer.Close()
}
