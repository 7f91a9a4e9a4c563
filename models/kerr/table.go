package kerr

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"io"
	"math"
	"math/cmplx"
)

// The file of a table, little endian: tableHeader, then for every row of u >= 0
// its reach (low, high: float64), then for every row the real parts and the
// imaginary parts of its points (float32), then the CRC-32 (IEEE) of all before.
type tableHeader struct {
	Magic        [8]byte
	Version      uint32
	Parity       uint32
	Rows, Points uint32 // rows of u >= 0
	MaxSpin      float64
	Limit        float64
}

const tableVersion = 1

var tableMagic = [8]byte{'k', 'n', 'e', 'l', 'l', 'B', 'R', 0}

// storedRows counts the rows of a file; those of negative u follow by symmetry.
const storedRows = tableRows - tableMargin

// reachLevel is the |R| below which the table's users may take R as 0.
const reachLevel = 1e-8

func headerFor(parity Parity) tableHeader {
	return tableHeader{Magic: tableMagic, Version: tableVersion, Parity: uint32(parity),
		Rows: storedRows, Points: tablePoints, MaxSpin: MaxSpin, Limit: tableLimit}
}

// table is a decoded file with the rows of negative u filled in: row i belongs
// to u = (i - tableMargin) tableStep. It is shared and never changes.
type table struct {
	low, high [storedRows]float64 // reach by row of u >= 0
	re, im    [tableRows][tablePoints]float32
	node      [tableRows][tablePoints]float64 // ω of the points
	phase     [tableRows][tablePoints]float64 // what was left out, less 2 ω rotorRadius
}

// WriteBarrierTable computes the table that NewBarrier embeds and writes it to
// w: l = m = 2, spins 0 to MaxSpin, |Mω| up to 1.7. It is what go generate runs
// in this package, on one core for some seconds. progress, if not nil, is called
// after each row.
func WriteBarrierTable(w io.Writer, parity Parity, progress func(done, total int)) error {
	if err := parity.check(); err != nil {
		return err
	}
	var reach []float64
	var points []float32
	for i := range storedRows {
		r := newRow(float64(i) * tableStep)
		var res [tablePoints]complex128
		first, last := tablePoints, -1
		frequencies := r.frequencies()
		for j, omega := range frequencies {
			v, err := tabulated(r, omega, parity)
			if err != nil {
				return err
			}
			if cmplx.Abs(v) >= reachLevel {
				first, last = min(first, j), max(last, j)
			}
			res[j] = v * cmplx.Rect(1, -r.phase(omega))
		}
		if first == 0 || last == tablePoints-1 {
			return fmt.Errorf("kerr: at spin %g |R| still exceeds %g at the table's end", r.spin, reachLevel)
		}
		reach = append(reach, frequencies[first-1], frequencies[last+1])
		for _, v := range res {
			points = append(points, float32(real(v)))
		}
		for _, v := range res {
			points = append(points, float32(imag(v)))
		}
		if progress != nil {
			progress(i+1, storedRows)
		}
	}
	var file bytes.Buffer
	for _, part := range []any{headerFor(parity), reach, points} {
		if err := binary.Write(&file, binary.LittleEndian, part); err != nil {
			return err
		}
	}
	if err := binary.Write(&file, binary.LittleEndian, crc32.ChecksumIEEE(file.Bytes())); err != nil {
		return err
	}
	_, err := w.Write(file.Bytes())
	return err
}

// tabulated is R at one point. The margin rows lie beyond MaxSpin, so this goes
// around BarrierResponse's check of the spin.
func tabulated(r row, omega float64, parity Parity) (complex128, error) {
	m, w := tableM, omega
	if omega < 0 {
		m, w = -m, -w
	}
	h, err := newHarmonic(2, m, complex(r.spin*w, 0))
	if err != nil {
		return 0, err
	}
	res, err := respond(m, r.spin, w, real(h.separation), parity)
	if omega < 0 {
		return cmplx.Conj(res.Reflection), err
	}
	return res.Reflection, err
}

// decodeTable reads a file of WriteBarrierTable. A file of another version,
// grid or parity, of another length, or with a wrong checksum is an error.
func decodeTable(file []byte, parity Parity) (*table, error) {
	var header tableHeader
	size := binary.Size(header) + storedRows*(2*8+2*4*tablePoints) + 4
	if len(file) != size {
		return nil, fmt.Errorf("kerr: barrier table has %d bytes, want %d", len(file), size)
	}
	body, sum := file[:size-4], binary.LittleEndian.Uint32(file[size-4:])
	if got := crc32.ChecksumIEEE(body); got != sum {
		return nil, fmt.Errorf("kerr: barrier table has checksum %08x, want %08x", got, sum)
	}
	read := bytes.NewReader(body)
	if err := binary.Read(read, binary.LittleEndian, &header); err != nil {
		return nil, fmt.Errorf("kerr: barrier table: %w", err)
	}
	if want := headerFor(parity); header != want {
		return nil, fmt.Errorf("kerr: barrier table is %+v, want %+v: run go generate", header, want)
	}
	t := new(table)
	at := binary.Size(header)
	for i := range storedRows {
		t.low[i] = math.Float64frombits(binary.LittleEndian.Uint64(body[at:]))
		t.high[i] = math.Float64frombits(binary.LittleEndian.Uint64(body[at+8:]))
		at += 16
	}
	for i := range storedRows {
		for _, part := range []*[tablePoints]float32{&t.re[i+tableMargin], &t.im[i+tableMargin]} {
			for j := range part {
				part[j] = math.Float32frombits(binary.LittleEndian.Uint32(body[at:]))
				at += 4
			}
		}
		r := newRow(float64(i) * tableStep)
		t.node[i+tableMargin] = r.frequencies()
		for j, omega := range t.node[i+tableMargin] {
			t.phase[i+tableMargin][j] = r.phase(omega) - 2*omega*rotorRadius
		}
	}
	for i := 1; i <= tableMargin; i++ {
		from, to := tableMargin+i, tableMargin-i
		for j := range tablePoints {
			k := tablePoints - 1 - j
			t.re[to][j], t.im[to][j] = t.re[from][k], -t.im[from][k]
			t.node[to][j], t.phase[to][j] = -t.node[from][k], -t.phase[from][k]
		}
	}
	return t, nil
}
