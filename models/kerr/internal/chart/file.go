package chart

import (
	"bytes"
	"compress/flate"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"math"
)

// A file is the header, a deflated stream, and the CRC-32 (IEEE) of all before,
// little endian. The stream is signed variable-length integers (Go's varints),
// for each panel: pieces, First, Last; the numbers of Bounds, Turn and Level in
// units of their scales; then of each plane, each j, the real parts of all pieces
// and the imaginary parts of all pieces.
type header struct {
	Magic     [8]byte
	Version   uint32
	Kind      uint32
	L, M      int32
	Low, High float64
	Gap       float64
	Panels    uint32
	Degree    uint32
	Terms     [Degree + 1]uint32
	_         uint32
}

// Version changes whenever the meaning of a file does.
const Version = 2

var magic = [8]byte{'k', 'n', 'e', 'l', 'l', 'B', 'R', 0}

// Limits that no file of ours comes near: they keep a corrupt one from asking
// for the machine's memory.
const (
	maxPanels = 64
	maxPieces = 1024
)

// Encode returns the file of a chart. Numbers are rounded.
func Encode(c *Chart) ([]byte, error) {
	h := header{Magic: magic, Version: Version, Kind: uint32(c.Kind), L: int32(c.L), M: int32(c.M),
		Low: c.Low, High: c.High, Gap: c.Gap, Panels: uint32(len(c.Panels)), Degree: Degree}
	for i, n := range Terms {
		h.Terms[i] = uint32(n)
	}
	var out bytes.Buffer
	if err := binary.Write(&out, binary.LittleEndian, h); err != nil {
		return nil, err
	}
	var raw []byte
	put := func(v, scale float64) { raw = binary.AppendVarint(raw, int64(math.RoundToEven(v*scale))) }
	for i := range c.Panels {
		p := &c.Panels[i]
		raw = binary.LittleEndian.AppendUint64(raw, math.Float64bits(p.Low))
		raw = binary.LittleEndian.AppendUint64(raw, math.Float64bits(p.High))
		for _, n := range []int{p.Pieces, p.First, p.Last} {
			raw = binary.AppendVarint(raw, int64(n))
		}
		p.each(put)
	}
	w, err := flate.NewWriter(&out, flate.BestCompression)
	if err != nil {
		return nil, err
	}
	if _, err := w.Write(raw); err != nil {
		return nil, err
	}
	if err := w.Close(); err != nil {
		return nil, err
	}
	return binary.LittleEndian.AppendUint32(out.Bytes(), crc32.ChecksumIEEE(out.Bytes())), nil
}

// each visits the numbers of a panel in the order of the file.
func (p *Panel) each(visit func(v, scale float64)) {
	p.walk(func(v *float64, scale float64) error { visit(*v, scale); return nil })
}

func (p *Panel) walk(visit func(v *float64, scale float64) error) error {
	for _, part := range []struct {
		values []float64
		terms  int
		scale  float64
	}{{p.Bounds, BoundTerms, BoundScale}, {p.Turn, TurnTerms, TurnScale}, {p.Level, LevelTerms, LevelScale}} {
		for j := range part.terms {
			for k := j; k < len(part.values); k += part.terms {
				if err := visit(&part.values[k], part.scale); err != nil {
					return err
				}
			}
		}
	}
	for i, n := range Terms {
		for j := range 2 * n {
			for k := j; k < len(p.Planes[i]); k += 2 * n {
				if err := visit(&p.Planes[i][k], Scale); err != nil {
					return err
				}
			}
		}
	}
	return nil
}

// ErrNotChart is what Decode returns, wrapped, for bytes that are no whole file
// of this version.
var ErrNotChart = errors.New("not a barrier table of this version")

// Decode reads a file of Encode.
func Decode(file []byte) (*Chart, error) {
	var h header
	size := binary.Size(h)
	if len(file) < size+4 {
		return nil, fmt.Errorf("kerr: %w: %d bytes, want more than %d", ErrNotChart, len(file), size+4)
	}
	body, sum := file[:len(file)-4], binary.LittleEndian.Uint32(file[len(file)-4:])
	if got := crc32.ChecksumIEEE(body); got != sum {
		return nil, fmt.Errorf("kerr: %w: checksum %08x, want %08x", ErrNotChart, got, sum)
	}
	if err := binary.Read(bytes.NewReader(body), binary.LittleEndian, &h); err != nil {
		return nil, fmt.Errorf("kerr: %w: %w", ErrNotChart, err)
	}
	if h.Magic != magic || h.Version != Version || h.Degree != Degree || h.Panels == 0 || h.Panels > maxPanels || h.Kind > uint32(Transmission) {
		return nil, fmt.Errorf("kerr: %w: header %+v: run go generate", ErrNotChart, h)
	}
	for i, n := range Terms {
		if h.Terms[i] != uint32(n) {
			return nil, fmt.Errorf("kerr: %w: terms %v, want %v: run go generate", ErrNotChart, h.Terms, Terms)
		}
	}
	c := &Chart{Kind: Kind(h.Kind), L: int(h.L), M: int(h.M), Low: h.Low, High: h.High, Gap: h.Gap}
	// The numbers are read from memory: a varint at a time from the stream costs
	// more than all the rest.
	raw, err := io.ReadAll(io.LimitReader(flate.NewReader(bytes.NewReader(body[size:])), maxPanels<<20))
	if err != nil {
		return nil, fmt.Errorf("kerr: %w: %w", ErrNotChart, err)
	}
	in := reader{raw}
	for range h.Panels {
		p, err := in.panel()
		if err != nil {
			return nil, fmt.Errorf("kerr: %w: %w", ErrNotChart, err)
		}
		c.Panels = append(c.Panels, *p)
	}
	if len(in.rest) != 0 {
		return nil, fmt.Errorf("kerr: %w: %d bytes too many", ErrNotChart, len(in.rest))
	}
	return c, nil
}

type reader struct{ rest []byte }

var errShort = errors.New("it ends too early")

func (r *reader) float() (float64, error) {
	if len(r.rest) < 8 {
		return 0, errShort
	}
	v := math.Float64frombits(binary.LittleEndian.Uint64(r.rest))
	r.rest = r.rest[8:]
	return v, nil
}

func (r *reader) integer() (int64, error) {
	v, n := binary.Varint(r.rest)
	if n <= 0 {
		return 0, errShort
	}
	r.rest = r.rest[n:]
	return v, nil
}

func (r *reader) panel() (*Panel, error) {
	low, err := r.float()
	if err != nil {
		return nil, err
	}
	high, err := r.float()
	if err != nil {
		return nil, err
	}
	var n [3]int64
	for i := range n {
		if n[i], err = r.integer(); err != nil {
			return nil, err
		}
	}
	if pieces := n[0]; !(low < high) || pieces < 1 || pieces > maxPieces || n[1] < 0 || n[1] > n[2] || n[2] > pieces {
		return nil, fmt.Errorf("a panel from %g to %g of %d pieces", low, high, n)
	}
	// Each number takes a byte at least.
	if int64(len(r.rest)) < n[0]*int64(TurnTerms+LevelTerms) {
		return nil, errShort
	}
	p := NewPanel(low, high, int(n[0]))
	p.First, p.Last = int(n[1]), int(n[2])
	return &p, p.walk(func(v *float64, scale float64) error {
		n, err := r.integer()
		*v = float64(n) / scale
		return err
	})
}
