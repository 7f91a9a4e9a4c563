package hdf5

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"math/bits"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"slices"
	"strings"
	"testing"
)

// everything opens and reads all there is in a file, and returns what it got
// by path. It is what truncation, flipped bytes and fuzzing are tried on.
func everything(b []byte) (map[string]any, error) {
	f, err := New(bytes.NewReader(b), int64(len(b)), "memory")
	if err != nil {
		return nil, err
	}
	got := map[string]any{}
	var firstError error
	note := func(err error) {
		if err != nil && firstError == nil {
			firstError = err
		}
	}
	var walk func(path string, depth int)
	walk = func(path string, depth int) {
		names, err := f.Members(path)
		note(err)
		for _, name := range names {
			at := path + "/" + name
			d, err := f.Dataset(at)
			if err != nil {
				// A group has no datatype; a broken dataset fails again as a group.
				if depth < 4 {
					walk(at, depth+1)
				}
				continue
			}
			v, err := d.value(0, d.Len())
			note(err)
			if err == nil {
				decode(got, at, v, note)
			}
			for i := range d.header.list {
				if m := &d.header.list[i]; m.kind == messageAttribute && len(m.body) > 8 {
					c := m.cursor("")
					c.skip(2)
					n := int(c.u16())
					c.skip(4)
					name := string(bytes.TrimRight(c.take(n), "\x00"))
					a, err := d.Attribute(name)
					note(err)
					if err == nil {
						decode(got, at+"@"+name, a.v, note)
					}
				}
			}
		}
	}
	walk("", 0)
	return got, firstError
}

func decode(got map[string]any, at string, v *value, note func(error)) {
	switch v.kind.class {
	case classFloat:
		x, err := v.float64s()
		note(err)
		if err == nil {
			bits := make([]uint64, len(x))
			for i := range x {
				bits[i] = math.Float64bits(x[i])
			}
			got[at] = bits
		}
	case classInteger:
		x, err := v.int64s()
		note(err)
		got[at] = x
	default:
		x, err := v.strings()
		note(err)
		got[at] = x
	}
}

// stride tries every byte where superblock, root group and the first headers
// are, and every 13th behind.
func stride(at int) int {
	if at < 2200 {
		return 1
	}
	return 13
}

// Cut off anywhere, a file gives an error: the superblock says how long it is.
func TestTruncation(t *testing.T) {
	for _, name := range []string{"contiguous.hdf5", "shuffle.hdf5", "chunked.hdf5"} {
		b, err := os.ReadFile(filepath.Join("testdata", name))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := everything(b); err != nil {
			t.Fatal(err)
		}
		for n := range b {
			if _, err := everything(b[:n]); err == nil {
				t.Fatalf("%s cut to %d of %d bytes gave no error", name, n, len(b))
			}
		}
		// The same with a superblock that agrees with the cut, so that the
		// structures behind it are what must be caught.
		for n := 96; n < len(b); n += stride(n) {
			cut := bytes.Clone(b[:n])
			for i := range 8 {
				cut[40+i] = byte(n >> (8 * i))
			}
			everything(cut)
		}
	}
}

// A flipped bit in data protected by a checksum is an error or changes
// nothing; elsewhere it may change values, never panic, and never make the
// reader return other lengths of strain without an error.
func TestFlippedBits(t *testing.T) {
	for _, name := range []string{"contiguous.hdf5", "shuffle.hdf5", "chunked.hdf5"} {
		b, err := os.ReadFile(filepath.Join("testdata", name))
		if err != nil {
			t.Fatal(err)
		}
		want, err := everything(b)
		if err != nil {
			t.Fatal(err)
		}
		for i := 0; i < len(b); i += stride(i) {
			for _, mask := range []byte{1, 0x80, 0xff} {
				c := bytes.Clone(b)
				c[i] ^= mask
				got, err := everything(c)
				if i < 8 && err == nil {
					t.Fatalf("%s: a flipped signature byte %d gave no error", name, i)
				}
				if err != nil || name != "chunked.hdf5" {
					continue
				}
				// The dataset with all filters carries two checksums.
				if x, ok := got["/chunked/all"]; ok && !reflect.DeepEqual(x, want["/chunked/all"]) {
					if a, b := x.([]uint64), want["/chunked/all"].([]uint64); len(a) == len(b) && differsByData(a, b) {
						t.Fatalf("%s: byte %d ^ %#x changed checked data without an error", name, i, mask)
					}
				}
			}
		}
	}
}

// differsByData says whether two reads differ as flipped data would make them
// differ: by a few bits of a few values. A flipped header may legally declare
// another type or fill value.
func differsByData(a, b []uint64) bool {
	n := 0
	for i := range a {
		n += bits.OnesCount64(a[i] ^ b[i])
	}
	return n > 0 && n <= 8
}

// Structures that refer to themselves, and sizes out of proportion, must end
// in errors quickly and without large allocations.
func TestHostileFiles(t *testing.T) {
	b, err := os.ReadFile("testdata/chunked.hdf5")
	if err != nil {
		t.Fatal(err)
	}
	find := func(mark string) int { return bytes.Index(b, []byte(mark)) }
	put := func(at int, v uint64, n int) []byte {
		c := bytes.Clone(b)
		for i := range n {
			c[at+i] = byte(v >> (8 * i))
		}
		return c
	}
	tree := find("TREE")
	for _, tc := range []struct {
		why  string
		file []byte
	}{
		{"a group node that is its own child", put(tree+24+8, uint64(tree), 8)},
		{"a name heap of 2^62 bytes", put(find("HEAP")+8, 1<<62, 8)},
		{"65535 symbols", put(find("SNOD")+6, 65535, 2)},
		{"65535 children", put(tree+6, 65535, 2)},
	} {
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		_, err := everything(tc.file)
		runtime.ReadMemStats(&after)
		if err == nil {
			t.Errorf("%s gave no error", tc.why)
		}
		if got, limit := after.TotalAlloc-before.TotalAlloc, uint64(100*len(b)); got > limit {
			t.Errorf("%s allocated %d bytes, want at most %d", tc.why, got, limit)
		}
	}
}

// Trees that lead back to themselves, or many times to the same place.
func TestTreesThatRepeat(t *testing.T) {
	const children = 300
	node := func(level byte, child int) []byte {
		b := append([]byte("TREE\x00"), level, children&0xff, children>>8)
		b = append(b, make([]byte, 2*width)...)
		for range children {
			b = binary.LittleEndian.AppendUint64(b, 0)
			b = binary.LittleEndian.AppendUint64(b, uint64(child))
		}
		return b
	}
	size := len(node(0, 0))
	visits := 0
	walk := func(b []byte) error {
		f := &File{r: bytes.NewReader(b), size: int64(len(b)), name: "memory"}
		return f.walkTree(f.budget(), 0, 0, -1, 0, width, func(*cursor, uint64, int64) error { visits++; return nil })
	}
	// 27 million visits, were they all made.
	err := walk(slices.Concat(node(2, size), node(1, 2*size), node(0, 0)))
	if err == nil || !strings.Contains(err.Error(), "refer back") || visits > 3*children {
		t.Errorf("after %d visits of a repeating tree: %v", visits, err)
	}
	err = walk(slices.Concat(node(7, 0), make([]byte, 2*size)))
	if err == nil || !strings.Contains(err.Error(), "level: got 7, want 6") {
		t.Errorf("a node that is its own child: %v", err)
	}
}

// Every bit of data under a checksum matters.
func TestChecksum(t *testing.T) {
	b, err := os.ReadFile("testdata/chunked.hdf5")
	if err != nil {
		t.Fatal(err)
	}
	open := func(b []byte) *Dataset {
		f, err := New(bytes.NewReader(b), int64(len(b)), "memory")
		if err != nil {
			t.Fatal(err)
		}
		d, err := f.Dataset("chunked/fletcher")
		if err != nil {
			t.Fatal(err)
		}
		return d
	}
	for _, c := range open(b).chunks.list {
		for i := range c.stored {
			bad := bytes.Clone(b)
			bad[int(c.at)+i] ^= 1 << (i % 8)
			_, err := open(bad).Float64s(0, 100)
			if err == nil || !strings.Contains(err.Error(), "checksum") {
				t.Fatalf("byte %d of the chunk at %d flipped: %v", i, c.at, err)
			}
		}
	}
}

func FuzzReader(f *testing.F) {
	names, err := filepath.Glob("testdata/*.hdf5")
	if err != nil || len(names) == 0 {
		f.Fatal("no seeds", err)
	}
	for _, name := range names {
		b, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b)
		f.Add(b[:len(b)/2])
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		got, err := everything(b)
		again, err2 := everything(b)
		if fmt.Sprint(err) != fmt.Sprint(err2) || !reflect.DeepEqual(got, again) {
			t.Errorf("two reads of the same bytes differ: %v, %v", err, err2)
		}
	})
}
