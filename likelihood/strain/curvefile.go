package strain

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"os"
	"sort"
	"strconv"
	"strings"
)

// Column says what the second column of a curve file holds.
type Column int

const (
	// Density is the one-sided spectral density in 1/Hz.
	Density Column = iota
	// AmplitudeDensity is its square root, in 1/sqrt(Hz).
	AmplitudeDensity
)

// ReadCurveFile opens a file for ReadCurve.
func ReadCurveFile(path string, column Column) (func(f float64) float64, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	return ReadCurve(file, path, column)
}

// ReadCurve reads a noise curve as text: per line a frequency in Hz and a
// density, separated by blanks or a comma, with rising frequencies and positive
// densities. Lines that begin with # are skipped. Between its points the curve
// is a power law (linear in both logarithms); outside of them the function
// gives NaN.
func ReadCurve(r io.Reader, name string, column Column) (func(f float64) float64, error) {
	if column != Density && column != AmplitudeDensity {
		panic(fmt.Sprintf("strain: column %d of a curve file", int(column)))
	}
	var x, y []float64 // logarithms
	scanner := bufio.NewScanner(r)
	line := 0
	for scanner.Scan() {
		line++
		text := strings.TrimSpace(scanner.Text())
		if strings.HasPrefix(text, "#") {
			continue
		}
		fields := strings.FieldsFunc(text, func(r rune) bool { return r == ' ' || r == '\t' || r == ',' })
		if len(fields) != 2 {
			return nil, fmt.Errorf("%s:%d: got %d columns, want 2: frequency in Hz and density", name, line, len(fields))
		}
		var v [2]float64
		for i, field := range fields {
			var err error
			if v[i], err = strconv.ParseFloat(field, 64); err != nil || !(v[i] > 0) || math.IsInf(v[i], 0) {
				return nil, fmt.Errorf("%s:%d: got %.40q in column %d, want a positive number", name, line, field, i+1)
			}
			v[i] = math.Log(v[i])
		}
		if len(x) > 0 && v[0] <= x[len(x)-1] {
			return nil, fmt.Errorf("%s:%d: got frequency %s, want one above that of the line before", name, line, fields[0])
		}
		if column == AmplitudeDensity {
			v[1] *= 2
		}
		x, y = append(x, v[0]), append(y, v[1])
	}
	if err := scanner.Err(); err != nil {
		return nil, fmt.Errorf("%s:%d: got %v, want lines of text", name, line+1, err)
	}
	if len(x) < 2 {
		return nil, fmt.Errorf("%s:%d: got %d points, want at least 2", name, line, len(x))
	}
	return func(f float64) float64 {
		u := math.Log(f)
		// The ends are included, up to rounding of the logarithm.
		if !(u >= x[0]-1e-12 && u <= x[len(x)-1]+1e-12) {
			return math.NaN()
		}
		i := min(max(sort.SearchFloat64s(x, u), 1), len(x)-1)
		t := (u - x[i-1]) / (x[i] - x[i-1])
		return math.Exp((1-t)*y[i-1] + t*y[i])
	}, nil
}
