// Command tabulate makes the barrier tables that package kerr embeds, by fitting
// charts (internal/chart) to the direct calculation. Run it through go generate
// in that package; it uses all cores and prints, for each file, its size, how
// long it took and the largest relative difference from the direct calculation
// at random points between the fitted ones. With -measure it only measures the
// embedded tables.
package main

import (
	"errors"
	"flag"
	"fmt"
	"math"
	"math/cmplx"
	"os"
	"path/filepath"
	"runtime"
	"time"

	"golang.org/x/sync/errgroup"

	"knell/models/kerr"
	"knell/models/kerr/internal/chart"
)

// The charts: panels of artanh(spin) that shrink from the first to the last, where
// faint sums of two waves cancel at frequencies that move fast. T goes to 0 like
// a power of ω and is left out below gap.
const (
	panels = 11
	shrink = 0.1
	gap    = 0.001
)

// panelEnd returns where the i-th panel begins and the one before it ends.
func panelEnd(i int) float64 {
	s := float64(i) / panels
	return math.Atanh(kerr.MaxSpin) * s * (1 + shrink*(1-s))
}

// limit returns the |Mω| up to which (l, m) is charted: 2, or as far beyond it as
// R takes to become faint at every spin.
func limit(l, m int) (float64, error) {
	for end := 2.0; ; end += 0.25 {
		largest := 0.0
		for _, spin := range []float64{0, 0.5, 0.9, 0.99, kerr.MaxSpin} {
			for _, omega := range []float64{-end, end} {
				r, err := kerr.BarrierResponse(l, m, spin, omega, kerr.Odd)
				if err != nil {
					return 0, err
				}
				largest = max(largest, cmplx.Abs(r.Reflection))
			}
		}
		if largest < faint || end >= kerr.MaxFrequency {
			return end, nil
		}
	}
}

// job is one file.
type job struct {
	kind chart.Kind
	l, m int
}

func (j job) name() string {
	return map[chart.Kind]string{chart.Reflection: "reflection", chart.Transmission: "transmission"}[j.kind] + fmt.Sprintf("-%d%d.bin", j.l, j.m)
}

func main() {
	measureOnly := flag.Bool("measure", false, "measure the files instead of making them")
	only := flag.String("only", "*", "`pattern` of the file names to make or measure")
	dir := flag.String("dir", "barrier", "`directory` of the files")
	flag.Parse()
	if err := run(*only, *dir, *measureOnly); err != nil {
		fmt.Fprintln(os.Stderr, "tabulate:", err)
		os.Exit(1)
	}
}

func run(only, dir string, measureOnly bool) error {
	start := time.Now()
	total, failed := 0, error(nil)
	for _, kind := range []chart.Kind{chart.Reflection, chart.Transmission} {
		for l := 2; l <= 4; l++ {
			for m := 0; m <= l; m++ {
				j := job{kind, l, m}
				match, err := filepath.Match(only, j.name())
				if err != nil {
					return err
				}
				if !match {
					continue
				}
				path := filepath.Join(dir, j.name())
				if !measureOnly {
					if err := j.make(path); err != nil {
						failed = errors.Join(failed, err)
						continue
					}
				}
				file, err := os.ReadFile(path)
				if err != nil {
					return err
				}
				c, err := chart.Decode(file)
				if err != nil {
					return err
				}
				worst, spin, omega, err := measure(j, c)
				if err != nil {
					return err
				}
				fmt.Printf("%-20s %7d bytes, largest relative difference %.1e, at spin %.5f, Mω = %.5f\n", j.name(), len(file), worst, spin, omega)
				total += len(file)
			}
		}
	}
	fmt.Printf("%d bytes in %.0f s\n", total, time.Since(start).Seconds())
	return failed
}

// make fits and writes one file.
func (j job) make(path string) error {
	start := time.Now()
	limit, err := limit(j.l, j.m)
	if err != nil {
		return err
	}
	c := &chart.Chart{Kind: j.kind, L: j.l, M: j.m, Low: -limit, High: limit, Panels: make([]chart.Panel, panels)}
	ends := []float64{-limit, limit}
	if j.kind == chart.Transmission {
		c.Gap = gap
		ends = []float64{-limit, -gap, gap, limit}
	}
	var fitters [panels]*fitter
	var group errgroup.Group
	group.SetLimit(runtime.GOMAXPROCS(0))
	for i := range panels {
		// The dearest, at high spin, go first.
		i := panels - 1 - i
		group.Go(func() error {
			f, err := newFitter(j.kind, j.l, j.m, panelEnd(i), panelEnd(i+1), ends)
			if err != nil {
				return err
			}
			p, err := f.panel(ends, c.Gap)
			if err != nil {
				return err
			}
			c.Panels[i], fitters[i] = *p, f
			return nil
		})
	}
	if err := group.Wait(); err != nil {
		return err
	}
	file, err := chart.Encode(c)
	if err != nil {
		return err
	}
	if err := os.WriteFile(path, file, 0o644); err != nil {
		return err
	}
	pieces, calls, zeros, size := 0, 0, 0, 0.0
	for i, p := range c.Panels {
		pieces += p.Pieces
		calls += fitters[i].evaluations
		zeros += fitters[i].zeros
		size = max(size, fitters[i].zeroSize)
	}
	fmt.Printf("%-20s made in %5.1f s: %d pieces, %d evaluations\n", j.name(), time.Since(start).Seconds(), pieces, calls)
	if zeros > 0 {
		fmt.Printf("%-20s %d pieces have a zero in or near them; values there are below %.1e\n", j.name(), zeros, size)
	}
	return nil
}
