package kerr

import (
	"bytes"
	"encoding/binary"
	"hash/crc32"
	"testing"
)

// TestModeTableFile: a damaged, foreign or shortened file is an error, not a
// panic.
func TestModeTableFile(t *testing.T) {
	if _, err := splitModeTable(modesFile); err != nil {
		t.Fatal(err)
	}
	resum := func(file []byte) []byte {
		body := file[:len(file)-4]
		return binary.LittleEndian.AppendUint32(bytes.Clone(body), crc32.ChecksumIEEE(body))
	}
	change := func(at int) []byte {
		file := bytes.Clone(modesFile)
		file[at] ^= 1
		return file
	}
	for name, file := range map[string][]byte{
		"empty":           nil,
		"cut short":       modesFile[:len(modesFile)/2],
		"one bit off":     change(5000),
		"foreign magic":   resum(change(0)),
		"another version": resum(change(8)),
		"another range":   resum(change(32)),
		"a longer record": resum(change(40)),
		"a byte too many": resum(append(bytes.Clone(modesFile), 0, 0, 0, 0, 0)),
	} {
		if _, err := splitModeTable(file); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

// TestModeRecord computes one mode again and compares with what is embedded:
// the generator still makes this file. Machines that fuse multiplications may
// differ in the last unit of a coefficient.
func TestModeRecord(t *testing.T) {
	records, err := splitModeTable(modesFile)
	if err != nil {
		t.Fatal(err)
	}
	record, err := modeRecord(3, -2, 1)
	if err != nil {
		t.Fatal(err)
	}
	_, got, err := decodeModeRecord(record)
	if err != nil {
		t.Fatal(err)
	}
	_, want, err := decodeModeRecord(records[modePlace(3, -2, 1)])
	if err != nil || len(got) != len(want) {
		t.Fatalf("%d panels (%v), want %d", len(got), err, len(want))
	}
	for i := range want {
		for f := range want[i] {
			for k := range want[i][f] {
				if d := got[i][f][k] - want[i][f][k]; d > 2e-13 || d < -2e-13 {
					t.Errorf("panel %d function %d coefficient %d: %.15g, want %.15g", i, f, k, got[i][f][k], want[i][f][k])
				}
			}
		}
	}
}

// TestModePlaces: every mode has a record of its own.
func TestModePlaces(t *testing.T) {
	next := 0
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				if got := modePlace(l, m, n); got != next {
					t.Fatalf("(%d,%d,%d) has place %d, want %d", l, m, n, got, next)
				}
				next++
			}
		}
	}
	if next != tabulatedModes {
		t.Errorf("%d modes, want %d", next, tabulatedModes)
	}
}

func FuzzModeRecord(f *testing.F) {
	records, err := splitModeTable(modesFile)
	if err != nil {
		f.Fatal(err)
	}
	f.Add(records[0])
	f.Add([]byte{1, 0, 0, 0, 0, 0})
	f.Add([]byte{2, 1, 0, 0, 0, 0})
	f.Fuzz(func(t *testing.T, record []byte) {
		panels, series, err := decodeModeRecord(record)
		if err != nil {
			return
		}
		if len(panels) == 0 || len(series) != len(panels) {
			t.Fatalf("%d panels and %d series without an error", len(panels), len(series))
		}
		at := 0.0
		for _, p := range panels {
			from, to := p.edges()
			if from != at || to <= from {
				t.Fatalf("panel from %g to %g follows one up to %g", from, to, at)
			}
			at = to
		}
		if at != panelRange {
			t.Fatalf("panels end at %g, want %g", at, panelRange)
		}
	})
}
