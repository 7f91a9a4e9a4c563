package kerr

import (
	"fmt"
	"testing"
)

// The benchmarks walk spins in steps that have nothing to do with the panels.
func nextSpin(spin float64) float64 {
	if spin += 0.0137; spin > MaxSpin {
		spin -= MaxSpin
	}
	return spin
}

// BenchmarkSetSpin is a new spin with all cells of both signs of the frequency.
func BenchmarkSetSpin(b *testing.B) {
	barrier := newBarrier(b, 2, 2, Odd)
	low, high := barrier.Range()
	var re, im [2]float64
	spin := 0.0
	b.ReportAllocs()
	for b.Loop() {
		spin = nextSpin(spin)
		if err := barrier.SetSpin(spin); err != nil {
			b.Fatal(err)
		}
		if err := barrier.Reflection(low, high-low, re[:], im[:]); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkReflection walks a band like that of a likelihood, at a spin already
// prepared.
func BenchmarkReflection(b *testing.B) {
	barrier := newBarrier(b, 2, 2, Odd)
	if err := barrier.SetSpin(0.69); err != nil {
		b.Fatal(err)
	}
	const n = 3500
	re, im := make([]float64, n), make([]float64, n)
	b.ReportAllocs()
	for b.Loop() {
		if err := barrier.Reflection(0.05, 1.5/n, re, im); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/point")
}

// BenchmarkNewSpin8000 is what a sampler pays: a new spin and R at 8,000 evenly
// spaced frequencies from 0.001 to 2.
func BenchmarkNewSpin8000(b *testing.B) {
	for _, lm := range [][2]int{{2, 2}, {3, 1}, {4, 4}, {4, -4}} {
		b.Run(fmt.Sprintf("l=%d,m=%d", lm[0], lm[1]), func(b *testing.B) {
			barrier := newBarrier(b, lm[0], lm[1], Odd)
			newSpins(b, barrier, barrier.Reflection)
		})
	}
}

// BenchmarkTransmission is BenchmarkNewSpin8000 for T.
func BenchmarkTransmission(b *testing.B) {
	barrier := newBarrier(b, 2, 2, Odd)
	newSpins(b, barrier, barrier.Transmission)
}

// newSpins asks a barrier's R or T at 8,000 frequencies of one spin after another.
func newSpins(b *testing.B, barrier *Barrier, ask func(omega0, domega float64, re, im []float64) error) {
	const n = 8000
	re, im := make([]float64, n), make([]float64, n)
	spin := 0.0
	b.ReportAllocs()
	for b.Loop() {
		spin = nextSpin(spin)
		if err := barrier.SetSpin(spin); err != nil {
			b.Fatal(err)
		}
		if err := ask(0.001, 1.999/(n-1), re, im); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Microseconds())/float64(b.N), "µs/spin")
}

// BenchmarkLoad decodes one table.
func BenchmarkLoad(b *testing.B) {
	for kind, name := range map[tableKind]string{oddReflection: "odd", evenReflection: "even", transmission: "transmission"} {
		b.Run(name, func(b *testing.B) {
			file := tableFile(b, kind, 2, 2)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := newTable(file, kind, 2, 2); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
