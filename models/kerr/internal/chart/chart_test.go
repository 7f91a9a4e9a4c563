package chart

import (
	"bytes"
	"compress/flate"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"io"
	"math/cmplx"
	"reflect"
	"testing"

	"knell/internal/random"
)

// sample is a chart of random numbers, rounded to what a file holds.
func sample(pieces ...int) *Chart {
	rng := random.New(1, "chart test")
	c := &Chart{Kind: Transmission, L: 3, M: 1, Low: -2, High: 2.25, Gap: 0.001}
	for i, n := range pieces {
		p := NewPanel(float64(i), float64(i+1), n)
		p.First, p.Last = min(1, n), n
		p.walk(func(v *float64, scale float64) error {
			*v = Round(rng.Float64()-0.5, scale)
			return nil
		})
		c.Panels = append(c.Panels, p)
	}
	return c
}

func TestFileRoundTrip(t *testing.T) {
	c := sample(3, 1, 7)
	file, err := Encode(c)
	if err != nil {
		t.Fatal(err)
	}
	back, err := Decode(file)
	if err != nil {
		t.Fatal(err)
	}
	if !reflect.DeepEqual(c, back) {
		t.Error("a chart comes back changed from its file")
	}
	for _, cut := range []int{0, 10, 100, len(file) - 1} {
		if _, err := Decode(file[:cut]); !errors.Is(err, ErrNotChart) {
			t.Errorf("%d bytes: error %v, want ErrNotChart", cut, err)
		}
	}
}

// TestAt checks the sum on a chart whose function is known: one piece from -2 to
// 2 of one panel from 0 to 1, with x t² and a phase 3t.
func TestAt(t *testing.T) {
	p := NewPanel(0, 1, 1)
	p.Bounds[0], p.Bounds[BoundTerms] = -2, 2
	p.Turn[1] = 3
	p.Level[0] = 0.5
	// x t² = T_1(x) (T_0(t) + T_2(t))/2
	p.Planes[1][0], p.Planes[1][2] = 0.5, 0.5
	c := &Chart{Low: -2, High: 2, Panels: []Panel{p}}
	for _, u := range []float64{0, 0.3, 1} {
		for _, omega := range []float64{-2, -0.7, 1.9} {
			tt, x := 2*u-1, omega/2
			want := cmplx.Exp(complex(0.5, 3*tt)) * complex(x*tt*tt, 0)
			got, err := c.At(u, omega)
			if err != nil || cmplx.Abs(got-want) > 1e-14 {
				t.Errorf("u=%g ω=%g: %v, %v, want %v", u, omega, got, err, want)
			}
		}
	}
	if _, err := c.At(0.5, 2.1); err == nil {
		t.Error("no error outside the range")
	}
}

// FuzzDecode changes what lies inside the checksum: the header and the deflated
// stream.
func FuzzDecode(f *testing.F) {
	file, err := Encode(sample(2, 1))
	if err != nil {
		f.Fatal(err)
	}
	size := binary.Size(header{})
	stream, err := io.ReadAll(flate.NewReader(bytes.NewReader(file[size : len(file)-4])))
	if err != nil {
		f.Fatal(err)
	}
	f.Add(file[:size], stream)
	f.Add(file[:size], stream[:40])
	f.Add([]byte{}, []byte{})
	f.Fuzz(func(t *testing.T, head, stream []byte) {
		var b bytes.Buffer
		b.Write(head)
		w, err := flate.NewWriter(&b, flate.BestSpeed)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write(stream); err != nil {
			t.Fatal(err)
		}
		if err := w.Close(); err != nil {
			t.Fatal(err)
		}
		c, err := Decode(binary.LittleEndian.AppendUint32(b.Bytes(), crc32.ChecksumIEEE(b.Bytes())))
		if err != nil {
			return
		}
		again, err := Encode(c)
		if err != nil {
			t.Fatal(err)
		}
		// Numbers beyond 2⁵³ may lose digits once; after that nothing may change.
		back, err := Decode(again)
		if err != nil {
			t.Fatal(err)
		}
		third, err := Encode(back)
		if err != nil || !bytes.Equal(again, third) {
			t.Error("a file changes from one reading to the next")
		}
	})
}
