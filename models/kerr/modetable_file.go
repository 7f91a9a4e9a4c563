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

// The file of the mode table, little endian: modeTableHeader; the length of each
// mode's record (uint32), in order of l, m, n; the records; the CRC-32 (IEEE) of
// all before. A record has the number of its panels, then by panel its depth and
// for each of Re ω, Im ω, Re A and Im A the number of Chebyshev coefficients and
// the coefficients in units of 2^-Bits: all variable-length integers, so that
// a coefficient costs the bytes that its size deserves.
type modeTableHeader struct {
	Magic      [8]byte
	Version    uint32
	Modes      uint32
	Nodes      uint32
	Bits       uint32
	MaxSpin    float64
	PanelRange float64
}

const (
	modeTableVersion   = 1
	modeTableBits      = 46 // 2⁻⁴⁶ = 1.4e-14
	modeTableFunctions = 4
	// modeTableTolerance bounds the last two coefficients, relative to |ω| and
	// to 1+|A|.
	modeTableTolerance = 5e-13
)

// modeTableHeaderNow is the only header that decodeModeTable takes.
var modeTableHeaderNow = modeTableHeader{
	Magic:   [8]byte{'k', 'n', 'e', 'l', 'l', 'Q', 'M', 0},
	Version: modeTableVersion, Modes: uint32(tabulatedModes), Nodes: panelNodes, Bits: modeTableBits,
	MaxSpin: MaxSpin, PanelRange: panelRange,
}

// tabulatedModes counts the modes of the table.
const tabulatedModes = ((maxMultipole+1)*(maxMultipole+1) - minMultipole*minMultipole) * (maxOvertone + 1)

// modePlace is the place of a mode in the table.
func modePlace(l, m, n int) int {
	return (l*l-minMultipole*minMultipole+l+m)*(maxOvertone+1) + n
}

// WriteModeTable computes the table behind TabulatedMode and NewModeTrack and
// writes it to w: every mode of QuasiNormalMode's range over all spins. It is
// what go generate runs in this package, on one core for half
// a minute.
// progress, if not nil, is called after each mode.
func WriteModeTable(w io.Writer, progress func(done, total int)) error {
	var lengths []uint32
	var records []byte
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				record, err := modeRecord(l, m, n)
				if err != nil {
					return err
				}
				lengths = append(lengths, uint32(len(record)))
				records = append(records, record...)
				if progress != nil {
					progress(len(lengths), tabulatedModes)
				}
			}
		}
	}
	var file bytes.Buffer
	for _, part := range []any{modeTableHeaderNow, lengths, records} {
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

// modeRecord follows one mode over the range and returns its record.
func modeRecord(l, m, n int) ([]byte, error) {
	f, err := newFollower(l, m, n)
	if err != nil {
		return nil, err
	}
	sample := func(f *follower, u []float64, values [][]float64) error {
		for j, at := range u {
			if err := f.advance(at); err != nil {
				return err
			}
			w, a, err := polishMode(l, m, n, math.Tanh(at), f.omega(), f.separation())
			if err != nil {
				return err
			}
			values[0][j], values[1][j], values[2][j], values[3][j] = real(w), imag(w), real(a), imag(a)
		}
		return nil
	}
	small := func(c chebyshev) bool {
		omega := cmplx.Abs(complex(c[0][0], c[1][0]))
		separation := 1 + cmplx.Abs(complex(c[2][0], c[3][0]))
		for _, k := range []int{panelNodes - 2, panelNodes - 1} {
			if cmplx.Abs(complex(c[0][k], c[1][k])) > modeTableTolerance*omega ||
				cmplx.Abs(complex(c[2][k], c[3][k])) > modeTableTolerance*separation {
				return false
			}
		}
		return true
	}
	panels, series, err := adapt(*f, []panel{{}}, modeTableFunctions, sample, small)
	if err != nil {
		return nil, fmt.Errorf("kerr: mode (%d,%d,%d): %w", l, m, n, err)
	}
	record := binary.AppendUvarint(nil, uint64(len(panels)))
	for i, p := range panels {
		record = binary.AppendUvarint(record, uint64(p.depth))
		for _, c := range series[i] {
			var units [panelNodes]int64
			count := 0
			for k := range c {
				units[k] = int64(math.Round(math.Ldexp(c[k], modeTableBits)))
				if units[k] != 0 {
					count = k + 1
				}
			}
			record = binary.AppendUvarint(record, uint64(count))
			for _, u := range units[:count] {
				record = binary.AppendVarint(record, u)
			}
		}
	}
	return record, nil
}

// splitModeTable checks a file of WriteModeTable and returns the modes' records.
// A file of another version, range or length, or with a wrong checksum is an
// error.
func splitModeTable(file []byte) (records [tabulatedModes][]byte, err error) {
	var header modeTableHeader
	front := binary.Size(header) + 4*tabulatedModes
	if len(file) < front+4 {
		return records, fmt.Errorf("kerr: mode table has %d bytes, want at least %d", len(file), front+4)
	}
	body, sum := file[:len(file)-4], binary.LittleEndian.Uint32(file[len(file)-4:])
	if got := crc32.ChecksumIEEE(body); got != sum {
		return records, fmt.Errorf("kerr: mode table has checksum %08x, want %08x", got, sum)
	}
	if err := binary.Read(bytes.NewReader(body), binary.LittleEndian, &header); err != nil {
		return records, fmt.Errorf("kerr: mode table: %w", err)
	}
	if header != modeTableHeaderNow {
		return records, fmt.Errorf("kerr: mode table is %+v, want %+v: run go generate", header, modeTableHeaderNow)
	}
	rest := body[front:]
	for i := range records {
		length := uint64(binary.LittleEndian.Uint32(body[binary.Size(header)+4*i:]))
		if length > uint64(len(rest)) {
			return records, fmt.Errorf("kerr: mode table ends in record %d of %d", i, tabulatedModes)
		}
		records[i], rest = rest[:length], rest[length:]
	}
	if len(rest) != 0 {
		return records, fmt.Errorf("kerr: mode table has %d bytes after its records", len(rest))
	}
	return records, nil
}

// decodeModeRecord returns the panels of a record and their Chebyshev
// coefficients.
func decodeModeRecord(record []byte) (panels []panel, series []chebyshev, err error) {
	bad := func(what string) ([]panel, []chebyshev, error) {
		return nil, nil, fmt.Errorf("kerr: record of the mode table: %s", what)
	}
	next := func() (v uint64, ok bool) {
		v, size := binary.Uvarint(record)
		if size <= 0 {
			return 0, false
		}
		record = record[size:]
		return v, true
	}
	count, ok := next()
	if !ok {
		return bad("no number of panels")
	}
	covered, whole := uint64(0), uint64(1)<<deepestPanel // in the smallest panel's width
	for range count {
		depth, ok := next()
		if !ok || depth > deepestPanel {
			return bad("panel without depth")
		}
		width := whole >> depth
		if covered%width != 0 || covered+width > whole {
			return bad("panels that do not tile the range")
		}
		panels = append(panels, panel{index: int(covered / width), depth: int(depth)})
		covered += width
		c := make(chebyshev, modeTableFunctions)
		for f := range c {
			kept, ok := next()
			if !ok || kept > panelNodes {
				return bad("function without coefficients")
			}
			for k := range kept {
				v, size := binary.Varint(record)
				if size <= 0 {
					return bad("coefficient cut short")
				}
				record = record[size:]
				c[f][k] = math.Ldexp(float64(v), -modeTableBits)
			}
		}
		series = append(series, c)
	}
	if covered != whole {
		return bad("panels that do not cover the range")
	}
	if len(record) != 0 {
		return bad("bytes after the last panel")
	}
	return panels, series, nil
}
