// Command tabulatemodes makes the table of quasi-normal modes that package kerr
// embeds. Run it through go generate in that package, then run it again with
// -measure: it compares the embedded table with the direct calculation at random
// spins and prints the largest differences.
package main

import (
	"bytes"
	"flag"
	"fmt"
	"math"
	"math/cmplx"
	"os"
	"time"

	"knell/internal/random"
	"knell/models/kerr"
)

func main() {
	measure := flag.Bool("measure", false, "compare the embedded table with the direct calculation")
	draws := flag.Int("draws", 20, "random spins per mode for -measure")
	flag.Parse()
	do := tabulate
	if *measure {
		do = func() error { return compare(*draws) }
	}
	if err := do(); err != nil {
		fmt.Fprintln(os.Stderr, "tabulatemodes:", err)
		os.Exit(1)
	}
}

func tabulate() error {
	start := time.Now()
	var file bytes.Buffer
	if err := kerr.WriteModeTable(&file, nil); err != nil {
		return err
	}
	const name = "modes.bin"
	if err := os.WriteFile(name, file.Bytes(), 0o644); err != nil {
		return err
	}
	fmt.Printf("%s: %d bytes in %.1f s\n", name, file.Len(), time.Since(start).Seconds())
	return nil
}

// compare prints the table's largest errors by overtone, at spins drawn evenly in
// artanh(spin) and evenly in spin.
func compare(draws int) error {
	rng := random.New(1, "tabulatemodes")
	most := math.Atanh(kerr.MaxSpin)
	for n := 0; n <= 7; n++ {
		var worstOmega, worstA float64
		var at string
		for l := 2; l <= 4; l++ {
			for m := -l; m <= l; m++ {
				for i := range draws {
					spin := kerr.MaxSpin * rng.Float64()
					if i%2 == 0 {
						spin = math.Tanh(most * rng.Float64())
					}
					got, err := kerr.TabulatedMode(l, m, n, spin)
					if err != nil {
						return err
					}
					want, err := kerr.QuasiNormalMode(l, m, n, spin)
					if err != nil {
						return err
					}
					if off := cmplx.Abs(got.Omega/want.Omega - 1); off > worstOmega {
						worstOmega, at = off, fmt.Sprintf("(%d,%d,%d) at spin %.6f", l, m, n, spin)
					}
					worstA = max(worstA, cmplx.Abs(got.Separation-want.Separation)/(1+cmplx.Abs(want.Separation)))
				}
			}
		}
		fmt.Printf("n = %d: largest error of ω %.1e relative, %s; of A %.1e of 1+|A|\n", n, worstOmega, at, worstA)
	}
	return nil
}
