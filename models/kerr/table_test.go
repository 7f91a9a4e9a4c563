package kerr

import (
	"bytes"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/random"
	"knell/models/kerr/internal/chart"
)

// TestSectionAgainstChart holds the fast path against the chart summed term by
// term.
func TestSectionAgainstChart(t *testing.T) {
	file := tableFile(t, oddReflection, 3, 2)
	c, err := chart.Decode(file)
	if err != nil {
		t.Fatal(err)
	}
	barrier := newBarrier(t, 3, 2, Odd)
	rng := random.New(3, "section test")
	for range 300 {
		spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
		omega := c.Low + (c.High-c.Low)*rng.Float64()
		if err := barrier.SetSpin(spin); err != nil {
			t.Fatal(err)
		}
		want, err := c.At(math.Atanh(spin), omega)
		if err != nil {
			t.Fatal(err)
		}
		if got := one(t, barrier.Reflection, omega); cmplx.Abs(got/want-1) > walkTolerance {
			t.Errorf("a=%g ω=%g: R = %v, want %v", spin, omega, got, want)
		}
	}
}

// TestNewTable: a file that is not the wanted one is an error.
func TestNewTable(t *testing.T) {
	good := tableFile(t, oddReflection, 2, 2)
	sealed := func(change func(file []byte)) []byte {
		file := bytes.Clone(good)
		change(file)
		body := file[:len(file)-4]
		binary.LittleEndian.PutUint32(file[len(file)-4:], crc32.ChecksumIEEE(body))
		return file
	}
	for name, file := range map[string][]byte{
		"empty":        nil,
		"truncated":    good[:len(good)-1],
		"corrupt":      append(append(bytes.Clone(good[:5000]), good[5000]^1), good[5001:]...),
		"foreign":      sealed(func(f []byte) { f[0]++ }),
		"version":      sealed(func(f []byte) { f[8]++ }),
		"kind":         sealed(func(f []byte) { f[12]++ }),
		"l":            sealed(func(f []byte) { f[16]++ }),
		"cut short":    binary.LittleEndian.AppendUint32(bytes.Clone(good[:9000]), crc32.ChecksumIEEE(good[:9000])),
		"transmission": tableFile(t, transmission, 2, 2),
		"another m":    tableFile(t, oddReflection, 2, 1),
	} {
		if _, err := newTable(file, oddReflection, 2, 2); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if _, err := newTable(good[:len(good)-1], oddReflection, 2, 2); !errors.Is(err, chart.ErrNotChart) {
		t.Errorf("truncated: %v, want ErrNotChart", err)
	}
	if _, err := newTable(sealed(func([]byte) {}), oddReflection, 2, 2); err != nil {
		t.Error(err)
	}
}

// TestSeparations: the series in aω against the angular equation itself.
func TestSeparations(t *testing.T) {
	for l := 2; l <= tableMaxL; l++ {
		for m := 0; m <= l; m++ {
			s, err := newSeparations(l, m)
			if err != nil {
				t.Fatal(err)
			}
			for c := -MaxFrequency; c <= MaxFrequency; c += 0.0937 {
				h, err := newHarmonic(l, m, complex(c, 0))
				if err != nil {
					t.Fatal(err)
				}
				// Rounding of 32 terms of up to l(l+1).
				if off := math.Abs(s.at(c) - real(h.separation)); off > 2e-13 {
					t.Errorf("(%d,%d) aω=%g: A = %.16g, want %.16g", l, m, c, s.at(c), real(h.separation))
				}
			}
		}
	}
}
