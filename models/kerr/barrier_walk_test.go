package kerr

import (
	"math"
	"math/cmplx"
	"strings"
	"sync"
	"testing"
)

// walkTolerance bounds how far two ways to one frequency may differ, relative:
// each rounds ω and so x by some 1e-16 of 2 over a cell's half-width, 1e-3 at
// least, on which R changes by little more than itself.
const walkTolerance = 3e-12

// TestReflectionWalks holds every way of asking for one frequency against one
// another: up, down, few at a time, one by one.
func TestReflectionWalks(t *testing.T) {
	for _, m := range []int{2, -2} {
		barrier := newBarrier(t, 2, m, Odd)
		for _, spin := range []float64{0, 0.3, 0.97, MaxSpin} {
			if err := barrier.SetSpin(spin); err != nil {
				t.Fatal(err)
			}
			for name, f := range map[string]func(omega0, domega float64, re, im []float64) error{
				"R": barrier.Reflection, "T": barrier.Transmission} {
				const n = 1999 // an odd number of half steps: 0 is not met
				start, step := -1.999, 2*1.999/float64(n)
				ways := map[string][]complex128{}
				add := func(name string, re, im []float64) {
					for j := range re {
						ways[name] = append(ways[name], complex(re[j], im[j]))
					}
				}
				re, im := make([]float64, n+1), make([]float64, n+1)
				if err := f(start, step, re, im); err != nil {
					t.Fatal(err)
				}
				add("up", re, im)
				if err := f(-start, -step, re, im); err != nil {
					t.Fatal(err)
				}
				for j := range re {
					ways["down"] = append(ways["down"], complex(re[n-j], im[n-j]))
				}
				for j := 0; j <= n; j += 5 {
					if err := f(start+float64(j)*step, step, re[:5], im[:5]); err != nil {
						t.Fatal(err)
					}
					add("by fives", re[:5], im[:5])
				}
				for j := range n + 1 {
					single := one(t, f, start+float64(j)*step)
					for way, values := range ways {
						if off := cmplx.Abs(values[j]/single - 1); !(off < walkTolerance) {
							t.Errorf("m=%d a=%g %s ω=%.4f: %s %v, alone %v, off by %.1e", m, spin, name, start+float64(j)*step, way, values[j], single, off)
						}
					}
				}
			}
			// A step of 0, of a rounding, and one over many cells.
			re, im := make([]float64, 9), make([]float64, 9)
			for _, step := range []float64{0, 5e-324, 1e-18, 0.2} {
				if err := barrier.Reflection(0.3, step, re, im); err != nil {
					t.Fatal(err)
				}
				for j := range re {
					if want := one(t, barrier.Reflection, 0.3+float64(j)*step); cmplx.Abs(complex(re[j], im[j])/want-1) > walkTolerance {
						t.Errorf("a=%g step %g: R differs at the %d-th", spin, step, j)
					}
				}
			}
		}
	}
}

// TestWalkPastTheEnds: steps far below the rounding of ω, from an end of the range
// or from within its slack, give R there over and over.
func TestWalkPastTheEnds(t *testing.T) {
	for _, m := range []int{2, -2} {
		barrier := newBarrier(t, 2, m, Odd)
		low, high := barrier.Range()
		for _, end := range []float64{low, low * (1 + slack/2), high, high * (1 + slack/2)} {
			for _, f := range []func(omega0, domega float64, re, im []float64) error{barrier.Reflection, barrier.Transmission} {
				want := one(t, f, end)
				for _, step := range []float64{5e-324, 1e-16, 1e-15} {
					re, im := make([]float64, 20), make([]float64, 20)
					if err := f(end, math.Copysign(step, end), re, im); err != nil {
						t.Fatal(err)
					}
					for j := range re {
						if cmplx.Abs(complex(re[j], im[j])/want-1) > walkTolerance {
							t.Errorf("m=%d from %v by %g: the %d-th is %v, want %v", m, end, step, j, complex(re[j], im[j]), want)
						}
					}
				}
			}
		}
	}
}

// TestReach: |R| stays below 1e-8 outside the reach, and inside it is not left
// out needlessly.
func TestReach(t *testing.T) {
	for l := 2; l <= tableMaxL; l++ {
		for m := -l; m <= l; m++ {
			barrier := newBarrier(t, l, m, Odd)
			for _, spin := range []float64{0, 0.2, 0.69, 0.95, MaxSpin} {
				if err := barrier.SetSpin(spin); err != nil {
					t.Fatal(err)
				}
				low, high := barrier.Reach()
				from, to := barrier.Range()
				if !(from <= low && low < -0.5 && 0.5 < high && high <= to && from <= -2 && to >= 2) {
					t.Errorf("(%d,%d) a=%g: reach %g to %g, range %g to %g", l, m, spin, low, high, from, to)
				}
				for i := range 200 {
					omega := from + (to-from)*float64(i)/199
					if (omega < low || omega > high) && cmplx.Abs(one(t, barrier.Reflection, omega)) >= 1e-8 {
						t.Errorf("(%d,%d) a=%g: |R| at %g is not below 1e-8, reach %g to %g", l, m, spin, omega, low, high)
					}
				}
				for _, end := range []float64{low, high} {
					if size := cmplx.Abs(one(t, barrier.Reflection, end)); end != from && end != to && size < 1e-11 {
						t.Errorf("(%d,%d) a=%g: |R| is %.1e already where the reach ends, at %g", l, m, spin, size, end)
					}
				}
			}
		}
	}
}

// TestReflectionDoesNotRemember: R of a spin is the same whatever came before,
// and whatever another goroutine does.
func TestReflectionDoesNotRemember(t *testing.T) {
	spins := []float64{0.9, 0.1, 0.55, 0, MaxSpin, 0.55}
	var wait sync.WaitGroup
	var got [2][2][100]float64
	for i := range got {
		used, err := NewBarrier(3, -2, Even)
		if err != nil {
			t.Fatal(err)
		}
		wait.Go(func() {
			for range 50 {
				for _, spin := range spins {
					if err := used.SetSpin(spin); err != nil {
						t.Error(err)
					}
					if err := used.Reflection(0.5, -0.02, got[i][0][:30], got[i][1][:30]); err != nil {
						t.Error(err)
					}
				}
			}
			if err := used.Reflection(-1.97, 0.04, got[i][0][:], got[i][1][:]); err != nil {
				t.Error(err)
			}
		})
	}
	wait.Wait()
	fresh := newBarrier(t, 3, -2, Even)
	if err := fresh.SetSpin(0.55); err != nil {
		t.Fatal(err)
	}
	var want [2][100]float64
	if err := fresh.Reflection(-1.97, 0.04, want[0][:], want[1][:]); err != nil {
		t.Fatal(err)
	}
	if got[0] != want || got[1] != want {
		t.Error("barriers at one spin differ")
	}
	re, im := make([]float64, 100), make([]float64, 100)
	spin := 0.1
	if n := testing.AllocsPerRun(20, func() {
		spin = nextSpin(spin)
		if fresh.SetSpin(spin) != nil || fresh.Reflection(-1.97, 0.04, re, im) != nil || fresh.Transmission(-1.97, 0.04, re, im) != nil {
			t.Error("a call failed")
		}
	}); n != 0 {
		t.Errorf("%g allocations per spin, want 0", n)
	}
}

func TestBarrierRange(t *testing.T) {
	for _, lm := range [][2]int{{1, 0}, {5, 0}, {2, 3}, {2, -3}, {4, 5}} {
		if _, err := NewBarrier(lm[0], lm[1], Odd); err == nil || !strings.Contains(err.Error(), " to ") {
			t.Errorf("l, m = %v: error %v, want one that names the range", lm, err)
		}
	}
	if _, err := NewBarrier(2, 2, 3); err == nil {
		t.Error("parity 3: no error")
	}
	barrier := newBarrier(t, 2, -1, Odd)
	for _, spin := range []float64{-0.1, 0.9981, 1, math.NaN()} {
		if err := barrier.SetSpin(spin); err == nil || !strings.Contains(err.Error(), "0 to 0.998") {
			t.Errorf("SetSpin(%g): error %v, want one that names the range", spin, err)
		}
	}
	re, im := []float64{7, 7, 7}, []float64{7, 7, 7}
	for _, tc := range []struct{ omega0, domega float64 }{
		{-2.01, 0.1}, {1.9, 0.1}, {-1.9, -0.1}, {math.NaN(), 0}, {0.1, math.NaN()}, {0.1, math.Inf(1)}, {math.Inf(-1), 1},
	} {
		for name, f := range map[string]func(omega0, domega float64, re, im []float64) error{"R": barrier.Reflection, "T": barrier.Transmission} {
			if err := f(tc.omega0, tc.domega, re, im); err == nil || !strings.Contains(err.Error(), "-2 to 2") {
				t.Errorf("%s%+v: error %v, want one that names the range", name, tc, err)
			}
		}
	}
	for _, tc := range []struct{ omega0, domega float64 }{{0, 0}, {-0.3, 0.3}, {0.0011, -0.0002}, {-0.0005, 0.1}, {1, -0.4999}} {
		if err := barrier.Transmission(tc.omega0, tc.domega, re, im); err == nil || !strings.Contains(err.Error(), "-2 to -0.001 or 0.001 to 2") {
			t.Errorf("T%+v: error %v, want one that names the range", tc, err)
		}
	}
	if re[0] != 7 || im[2] != 7 {
		t.Error("a refused call has changed its slices")
	}
	if err := barrier.Transmission(-0.5, 0.4, re, im); err != nil {
		t.Errorf("over 0: %v", err)
	}
	if err := barrier.Reflection(9, 0, nil, nil); err != nil {
		t.Errorf("no frequencies: %v", err)
	}
	for _, f := range []func(omega0, domega float64, re, im []float64) error{barrier.Reflection, barrier.Transmission} {
		func() {
			defer func() {
				if recover() == nil {
					t.Error("slices of different length do not panic")
				}
			}()
			_ = f(0.3, 0, re, nil)
		}()
	}
}
