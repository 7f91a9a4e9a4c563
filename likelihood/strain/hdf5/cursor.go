package hdf5

import (
	"encoding/binary"
	"fmt"
)

// cursor decodes little-endian fields of one block of the file. Reading past
// the end gives zeros and sets err, so a caller may check once per structure.
type cursor struct {
	f    *File
	what string
	base int64 // file offset of b[0]
	b    []byte
	pos  int
	err  error
}

func (f *File) cursor(offset int64, n int, what string) (*cursor, error) {
	b, err := f.read(offset, n, what)
	if err != nil {
		return nil, err
	}
	return &cursor{f: f, what: what, base: offset, b: b}, nil
}

// at is the file offset of the next byte.
func (c *cursor) at() int64 { return c.base + int64(c.pos) }

// take returns the next n bytes, sharing memory with the block, or nil.
func (c *cursor) take(n int) []byte {
	if c.err == nil && (n < 0 || n > len(c.b)-c.pos) {
		c.err = c.f.fail(c.at(), c.what, fmt.Sprintf("%d bytes left", len(c.b)-c.pos), fmt.Sprintf("%d more", n))
	}
	if c.err != nil {
		return nil
	}
	c.pos += n
	return c.b[c.pos-n : c.pos : c.pos]
}

// part is a cursor over the next n bytes.
func (c *cursor) part(n int, what string) *cursor {
	base := c.at()
	b := c.take(n)
	return &cursor{f: c.f, what: what, base: base, b: b, err: c.err}
}

func (c *cursor) skip(n int) { c.take(n) }

// align skips to the next multiple of 8 from the start of the block.
func (c *cursor) align() { c.skip(-c.pos & 7) }

func (c *cursor) u8() byte {
	if b := c.take(1); b != nil {
		return b[0]
	}
	return 0
}

func (c *cursor) u16() uint16 {
	if b := c.take(2); b != nil {
		return binary.LittleEndian.Uint16(b)
	}
	return 0
}

func (c *cursor) u32() uint32 {
	if b := c.take(4); b != nil {
		return binary.LittleEndian.Uint32(b)
	}
	return 0
}

func (c *cursor) u64() uint64 {
	if b := c.take(8); b != nil {
		return binary.LittleEndian.Uint64(b)
	}
	return 0
}

// expect reads len(want) bytes that mark a structure.
func (c *cursor) expect(want string) error {
	at := c.at()
	got := c.take(len(want))
	if c.err == nil && string(got) != want {
		c.err = c.f.fail(at, c.what+" signature", fmt.Sprintf("%q", got), fmt.Sprintf("%q", want))
	}
	return c.err
}

// version reads one byte and checks that it lies in [low, high].
func (c *cursor) version(low, high byte) byte {
	at := c.at()
	v := c.u8()
	if c.err == nil && (v < low || v > high) {
		want := fmt.Sprint(low)
		if high != low {
			want = fmt.Sprintf("%d to %d", low, high)
		}
		c.err = c.f.fail(at, c.what+" version", fmt.Sprint(v), want)
	}
	return v
}
