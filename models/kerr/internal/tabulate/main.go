// Command tabulate makes the barrier tables that package kerr embeds. Run it
// through go generate in that package, then run it again with -measure: it
// compares the embedded tables with the direct calculation at random points and
// prints the largest differences.
package main

import (
	"bytes"
	"flag"
	"fmt"
	"math/cmplx"
	"os"
	"time"

	"knell/internal/random"
	"knell/models/kerr"
)

func main() {
	measure := flag.Bool("measure", false, "compare the embedded tables with the direct calculation")
	flag.Parse()
	for _, parity := range []kerr.Parity{kerr.Odd, kerr.Even} {
		do := tabulate
		if *measure {
			do = compare
		}
		if err := do(parity); err != nil {
			fmt.Fprintln(os.Stderr, "tabulate:", err)
			os.Exit(1)
		}
	}
}

func tabulate(parity kerr.Parity) error {
	start := time.Now()
	var file bytes.Buffer
	if err := kerr.WriteBarrierTable(&file, parity, nil); err != nil {
		return err
	}
	name := fmt.Sprintf("barrier-%v.bin", parity)
	if err := os.WriteFile(name, file.Bytes(), 0o644); err != nil {
		return err
	}
	fmt.Printf("%s: %d bytes in %.1f s\n", name, file.Len(), time.Since(start).Seconds())
	return nil
}

// compare prints the largest error of the table by range of spin.
func compare(parity kerr.Parity) error {
	barrier, err := kerr.NewBarrier(2, 2, parity)
	if err != nil {
		return err
	}
	rng := random.New(1, "tabulate")
	edges := []float64{0, 0.5, 0.8, 0.9, 0.95, 0.98, 0.99, 0.995, kerr.MaxSpin}
	for i, low := range edges[:len(edges)-1] {
		high := edges[i+1]
		var worst, outside, atSpin, atOmega float64
		for range 400 {
			spin := low + (high-low)*rng.Float64()
			if err := barrier.SetSpin(spin); err != nil {
				return err
			}
			from, to := barrier.Reach()
			for range 100 {
				omega := -1.7 + 3.4*rng.Float64()
				if rng.Float64() < 0.5 { // where R turns
					omega = 2*kerr.HorizonFrequency(spin) + 0.2*(rng.Float64()-0.5)
				}
				var re, im [1]float64
				barrier.Reflection(omega, 0, re[:], im[:])
				want, err := kerr.BarrierResponse(2, 2, spin, omega, parity)
				if err != nil {
					return err
				}
				off := cmplx.Abs(complex(re[0], im[0]) - want.Reflection)
				if off > worst {
					worst, atSpin, atOmega = off, spin, omega
				}
				if omega < from || omega > to {
					outside = max(outside, cmplx.Abs(want.Reflection))
				}
			}
		}
		fmt.Printf("%-4v spin %.3f to %.3f: largest error of R %.1e (spin %.4f, ω %.4f); largest |R| outside the reach %.1e\n",
			parity, low, high, worst, atSpin, atOmega, outside)
	}
	return nil
}
