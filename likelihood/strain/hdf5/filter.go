package hdf5

import (
	"bytes"
	"compress/zlib"
	"encoding/binary"
	"fmt"
	"io"
)

// Identifiers of the filters that are undone.
const (
	filterDeflate  = 1
	filterShuffle  = 2
	filterFletcher = 3
)

type filter struct {
	id     uint16
	offset int64
	width  int // shuffle: bytes of an element
}

// filters reads a filter pipeline message of version 1 or 2.
func (c *cursor) filters() ([]filter, error) {
	version := c.version(1, 2)
	n := int(c.u8())
	if version == 1 {
		c.skip(6)
	}
	var list []filter
	for range n {
		f := filter{offset: c.at(), id: c.u16()}
		nameLength := 0
		if version == 1 || f.id >= 256 {
			nameLength = int(c.u16())
		}
		c.skip(2) // flags: whether a failure while writing was allowed
		values := int(c.u16())
		if version == 1 {
			nameLength = (nameLength + 7) &^ 7
		}
		c.skip(nameLength)
		for i := range values {
			if v := c.u32(); i == 0 && f.id == filterShuffle {
				f.width = int(v)
			}
		}
		if version == 1 && values%2 == 1 {
			c.skip(4)
		}
		if c.err != nil {
			return nil, c.err
		}
		if f.id < filterDeflate || f.id > filterFletcher {
			return nil, c.f.fail(f.offset, "filter", fmt.Sprintf("number %d", f.id), "1 (deflate), 2 (shuffle) or 3 (fletcher32)")
		}
		if f.id == filterShuffle && f.width < 1 {
			return nil, c.f.fail(f.offset, "shuffle filter", fmt.Sprintf("elements of %d bytes", f.width), "at least 1")
		}
		list = append(list, f)
	}
	return list, c.err
}

// unfilter reads a chunk and undoes its filters, last one first. The result
// has exactly the bytes of a full chunk.
func (d *Dataset) unfilter(k chunk) ([]byte, error) {
	full := d.chunks.size * d.kind.size
	limit := full // with the checksums that may still follow the data
	for _, f := range d.chunks.filters {
		if f.id == filterFletcher {
			limit += 4
		}
	}
	what := fmt.Sprintf("chunk of %s from element %d", d.path, k.first)
	b, err := d.f.read(k.at, k.stored, what)
	if err != nil {
		return nil, err
	}
	for i := len(d.chunks.filters) - 1; i >= 0; i-- {
		if i < 32 && k.skip>>i&1 != 0 {
			continue
		}
		switch f := d.chunks.filters[i]; f.id {
		case filterDeflate:
			if b, err = inflate(b, limit); err != nil {
				e := d.f.fail(k.at, what, err.Error(), fmt.Sprintf("a zlib stream of %d bytes", limit))
				e.Err = err
				return nil, e
			}
		case filterShuffle:
			b = unshuffle(b, f.width)
		case filterFletcher:
			if len(b) < 4 {
				return nil, d.f.fail(k.at, what, fmt.Sprintf("%d bytes", len(b)), "data and a checksum of 4 bytes")
			}
			sum := binary.LittleEndian.Uint32(b[len(b)-4:])
			b = b[:len(b)-4]
			if got := fletcher32(b); got != sum {
				return nil, d.f.fail(k.at, what, fmt.Sprintf("data with checksum %#x", got), fmt.Sprintf("the stored %#x", sum))
			}
		}
	}
	if len(b) != full {
		return nil, d.f.fail(k.at, what, fmt.Sprintf("%d bytes", len(b)), fmt.Sprintf("%d", full))
	}
	return b, nil
}

// inflate returns the whole of a zlib stream, at most limit bytes. The buffer
// grows with what the stream gives, so a lie about the size costs nothing.
func inflate(b []byte, limit int) ([]byte, error) {
	z, err := zlib.NewReader(bytes.NewReader(b))
	if err != nil {
		return nil, err
	}
	var out bytes.Buffer
	out.Grow(min(limit, 8*len(b)) + bytes.MinRead)
	n, err := io.Copy(&out, io.LimitReader(z, int64(limit)+1))
	if err != nil {
		return nil, err
	}
	if n > int64(limit) {
		return nil, fmt.Errorf("more than %d bytes", limit)
	}
	return out.Bytes(), nil
}

// unshuffle puts the bytes of each element together again: stored are all first
// bytes, then all second bytes, and so on. Left-over bytes stay at the end.
func unshuffle(b []byte, width int) []byte {
	n := len(b) / width
	if width == 1 || n < 2 {
		return b
	}
	out := make([]byte, len(b))
	for j := range width {
		plane := b[j*n : (j+1)*n]
		for i, v := range plane {
			out[i*width+j] = v
		}
	}
	copy(out[n*width:], b[n*width:])
	return out
}

// fletcher32 is the checksum over big-endian 16-bit words, an odd last byte
// padded with a zero.
func fletcher32(b []byte) uint32 {
	var s1, s2 uint32
	for i := 0; i < len(b); i += 2 {
		w := uint32(b[i]) << 8
		if i+1 < len(b) {
			w |= uint32(b[i+1])
		}
		// Folding the carry keeps the sum modulo 65535 without turning 65535 to 0.
		s1 += w
		s1 = s1&0xffff + s1>>16
		s2 += s1
		s2 = s2&0xffff + s2>>16
	}
	return s2<<16 | s1
}
