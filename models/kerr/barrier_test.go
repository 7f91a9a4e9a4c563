package kerr

import (
	"bytes"
	"encoding/binary"
	"hash/crc32"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"knell/internal/random"
)

// tableTolerance bounds the error of R from the table. The largest that
// internal/tabulate -measure finds in 640,000 points is 1.7e-7.
const tableTolerance = 5e-7

// TestBarrierAgainstDirect compares the table with the integration it was made
// from, at random spins and frequencies and where R turns.
func TestBarrierAgainstDirect(t *testing.T) {
	rng := random.New(7, "barrier test")
	for _, parity := range []Parity{Odd, Even} {
		barrier := newBarrier(t, parity)
		worst := 0.0
		for i := range 60 {
			spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
			switch i {
			case 0:
				spin = 0
			case 1:
				spin = MaxSpin
			}
			if err := barrier.SetSpin(spin); err != nil {
				t.Fatal(err)
			}
			turn := tableM * HorizonFrequency(spin)
			for _, omega := range []float64{1.7 * (2*rng.Float64() - 1), 0.5 * (2*rng.Float64() - 1), turn, 0, -0.3,
				turn + 3*SurfaceGravity(spin)*(2*rng.Float64()-1)} {
				var re, im [1]float64
				barrier.Reflection(omega, 0, re[:], im[:])
				want, err := BarrierResponse(2, 2, spin, omega, parity)
				if err != nil {
					t.Fatal(err)
				}
				off := cmplx.Abs(complex(re[0], im[0]) - want.Reflection)
				worst = max(worst, off)
				if off > tableTolerance {
					t.Errorf("%v a=%.6f ω=%.5f: R = %.8f%+.8fi, want %.8f (off %.1e)", parity, spin, omega, re[0], im[0], want.Reflection, off)
				}
			}
		}
		t.Logf("%v: largest difference %.1e", parity, worst)
	}
}

// TestBarrierTable compares the table with amplitudes computed at 60 digits; see
// testdata/response.csv. Rows of m = -2 are the negative frequencies of m = 2.
func TestBarrierTable(t *testing.T) {
	barriers := map[Parity]*Barrier{Odd: newBarrier(t, Odd), Even: newBarrier(t, Even)}
	rows := 0
	for _, row := range readTable(t, "response.csv") {
		if row["l"] != 2 || math.Abs(row["m"]) != 2 {
			continue
		}
		rows++
		for parity, want := range map[Parity]complex128{
			Odd:  complex(row["re_R_BH_odd"], row["im_R_BH_odd"]),
			Even: complex(row["re_R_BH_even"], row["im_R_BH_even"]),
		} {
			barrier, omega := barriers[parity], row["omega"]
			if omega > tableLimit {
				continue
			}
			if row["m"] < 0 {
				omega, want = -omega, cmplx.Conj(want)
			}
			if err := barrier.SetSpin(row["a"]); err != nil {
				t.Fatal(err)
			}
			var re, im [1]float64
			barrier.Reflection(omega, 0, re[:], im[:])
			if off := cmplx.Abs(complex(re[0], im[0]) - want); off > tableTolerance {
				t.Errorf("%v a=%g ω=%g: off by %.1e", parity, row["a"], omega, off)
			}
		}
	}
	if rows < 60 {
		t.Errorf("%d rows of l = |m| = 2, want at least 60", rows)
	}
}

// TestReflectionWalks holds every way of asking for one frequency against one
// another: up, down, from outside the reach, one by one.
func TestReflectionWalks(t *testing.T) {
	barrier := newBarrier(t, Odd)
	for _, spin := range []float64{0.3, 0.97} {
		if err := barrier.SetSpin(spin); err != nil {
			t.Fatal(err)
		}
		low, high := barrier.Reach()
		if !(low < -1.5 && high > 1.2) {
			t.Errorf("a=%g: reach %g to %g", spin, low, high)
		}
		const n = 2501
		const step = 3.4 / (n - 1)
		up, down := make([]complex128, n), make([]complex128, n)
		re, im := make([]float64, n), make([]float64, n)
		barrier.Reflection(-1.7, step, re, im)
		for j := range up {
			up[j] = complex(re[j], im[j])
		}
		barrier.Reflection(1.7, -step, re, im)
		for j := range down {
			down[n-1-j] = complex(re[j], im[j])
		}
		for j := range up {
			omega := -1.7 + float64(j)*step
			barrier.Reflection(omega, 0, re[:1], im[:1])
			single := complex(re[0], im[0])
			// Rounding of ω and of the rotor over 2,500 steps.
			if cmplx.Abs(up[j]-single) > 1e-11 || cmplx.Abs(down[j]-single) > 1e-11 {
				t.Errorf("a=%g ω=%.4f: %v going up, %v going down, %v alone", spin, omega, up[j], down[j], single)
			}
			if outside := omega < low || omega > high; outside != (single == 0) {
				t.Errorf("a=%g ω=%.4f: R = %v with reach %.4f to %.4f", spin, omega, single, low, high)
			}
		}
		barrier.Reflection(0.3, 0, re, im)
		if re[0] != re[1] && math.Abs(re[0]-re[n-1]) > 1e-14 {
			t.Errorf("a=%g: a step of 0 gives different values %g and %g", spin, re[0], re[n-1])
		}
		if err := barrier.Reflection(math.NaN(), 1, re, im); err == nil {
			t.Errorf("a=%g: no error for NaN", spin)
		}
		barrier.Reflection(0, 1, nil, nil)
	}
}

// TestReflectionDoesNotRemember: R of a spin is the same whatever came before.
func TestReflectionDoesNotRemember(t *testing.T) {
	fresh, used := newBarrier(t, Even), newBarrier(t, Even)
	for _, spin := range []float64{0.9, 0.1, 0.55} {
		if err := used.SetSpin(spin); err != nil {
			t.Fatal(err)
		}
	}
	if err := used.SetSpin(1); err == nil || !strings.Contains(err.Error(), "0 to 0.998") {
		t.Errorf("SetSpin(1): error %v, want one that names the range", err)
	}
	if err := fresh.SetSpin(0.55); err != nil {
		t.Fatal(err)
	}
	var a, b, c, d [100]float64
	fresh.Reflection(-1, 0.02, a[:], b[:])
	used.Reflection(-1, 0.02, c[:], d[:])
	if a != c || b != d {
		t.Error("two barriers at one spin differ")
	}
	if n := testing.AllocsPerRun(10, func() {
		if fresh.SetSpin(0.7) != nil {
			t.Error("SetSpin failed")
		}
		fresh.Reflection(-1, 0.02, a[:], b[:])
	}); n != 0 {
		t.Errorf("%g allocations per spin, want 0", n)
	}
}

func TestNewBarrierRange(t *testing.T) {
	if _, err := NewBarrier(2, 2, 3); err == nil {
		t.Error("parity 3: no error")
	}
	var re, im [1]float64
	re[0] = 1
	newBarrier(t, Odd).Reflection(0.3, 0, re[:], im[:])
	if re[0] != 0 {
		t.Error("R before SetSpin is not 0")
	}
	defer func() {
		if recover() == nil {
			t.Error("slices of different length do not panic")
		}
	}()
	newBarrier(t, Odd).Reflection(0.3, 0, re[:], nil)
}

// TestDecodeTable: a file that is not the expected one is an error.
func TestDecodeTable(t *testing.T) {
	sealed := func(change func(file []byte)) []byte {
		file := bytes.Clone(oddFile)
		change(file)
		body := file[:len(file)-4]
		binary.LittleEndian.PutUint32(file[len(file)-4:], crc32.ChecksumIEEE(body))
		return file
	}
	for name, file := range map[string][]byte{
		"empty":     nil,
		"truncated": oddFile[:len(oddFile)-1],
		"corrupt":   append(append(bytes.Clone(oddFile[:5000]), oddFile[5000]^1), oddFile[5001:]...),
		"version":   sealed(func(f []byte) { f[8]++ }),
		"parity":    evenFile,
		"grid":      sealed(func(f []byte) { f[16]++ }),
	} {
		if _, err := decodeTable(file, Odd); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if _, err := decodeTable(sealed(func([]byte) {}), Odd); err != nil {
		t.Error(err)
	}
}

func FuzzDecodeTable(f *testing.F) {
	f.Add(oddFile[:100])
	f.Add(oddFile)
	f.Fuzz(func(t *testing.T, file []byte) {
		if table, err := decodeTable(file, Odd); err == nil && table == nil {
			t.Error("neither table nor error")
		}
	})
}

func newBarrier(t testing.TB, parity Parity) *Barrier {
	t.Helper()
	b, err := NewBarrier(2, 2, parity)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func BenchmarkSetSpin(b *testing.B) {
	barrier, err := NewBarrier(2, 2, Odd)
	if err != nil {
		b.Fatal(err)
	}
	spin := 0.0
	for b.Loop() {
		if spin += 0.0137; spin > MaxSpin {
			spin = 0
		}
		if err := barrier.SetSpin(spin); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkReflection walks a band like that of a likelihood: 3,500 bins, most of
// them inside the reach.
func BenchmarkReflection(b *testing.B) {
	barrier, err := NewBarrier(2, 2, Odd)
	if err != nil {
		b.Fatal(err)
	}
	if err := barrier.SetSpin(0.69); err != nil {
		b.Fatal(err)
	}
	const n = 3500
	re, im := make([]float64, n), make([]float64, n)
	for b.Loop() {
		barrier.Reflection(0.05, 1.5/n, re, im)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/point")
}
