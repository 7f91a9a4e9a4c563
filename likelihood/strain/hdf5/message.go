package hdf5

import (
	"fmt"
	"math/bits"
)

type class byte

const (
	classInteger class = 0
	classFloat   class = 1
	classString  class = 3
	classVector  class = 9
)

// datatype is what one element is; size is in bytes.
type datatype struct {
	class     class
	size      int
	bigEndian bool
	signed    bool
	padding   byte // of a string: 0 ends at a zero, 1 padded by zeros, 2 by spaces
}

func (t datatype) String() string {
	switch t.class {
	case classInteger:
		return fmt.Sprintf("integers of %d bytes", t.size)
	case classFloat:
		return fmt.Sprintf("floating-point numbers of %d bytes", t.size)
	case classString:
		return fmt.Sprintf("strings of %d bytes", t.size)
	}
	return "strings of variable length"
}

// datatype reads a datatype message of version 1 to 3.
func (c *cursor) datatype() (datatype, error) {
	at := c.at()
	head := c.u8()
	flags := [3]byte{c.u8(), c.u8(), c.u8()}
	size := c.u32()
	if c.err != nil {
		return datatype{}, c.err
	}
	t := datatype{class: class(head & 15), size: int(size)}
	if v := head >> 4; v < 1 || v > 3 {
		return t, c.f.fail(at, "datatype version", fmt.Sprint(v), "1 to 3")
	}
	bad := func(got, want string) (datatype, error) { return t, c.f.fail(at, "datatype", got, want) }
	switch t.class {
	case classInteger:
		t.bigEndian, t.signed = flags[0]&1 != 0, flags[0]&8 != 0
		offset, precision := c.u16(), c.u16()
		if c.err != nil {
			return t, c.err
		}
		if size != 1 && size != 2 && size != 4 && size != 8 || offset != 0 || uint32(precision) != 8*size {
			return bad(fmt.Sprintf("an integer of %d bits at bit %d of %d bytes", precision, offset, size),
				"an integer that fills 1, 2, 4 or 8 bytes")
		}
	case classFloat:
		t.bigEndian = flags[0]&1 != 0
		layout := [8]byte(append(c.take(8), make([]byte, 8)...))
		bias := c.u32()
		if c.err != nil {
			return t, c.err
		}
		// Bit offset 0 and precision, then place and size of exponent and mantissa.
		double := size == 8 && layout == [8]byte{0, 0, 64, 0, 52, 11, 0, 52} && bias == 1023 && flags[1] == 63
		single := size == 4 && layout == [8]byte{0, 0, 32, 0, 23, 8, 0, 23} && bias == 127 && flags[1] == 31
		if !double && !single || flags[0]&0x40 != 0 || flags[0]&0x30 != 0x20 {
			return bad(fmt.Sprintf("floating point of %d bytes in an unknown layout", size), "IEEE 754 binary32 or binary64")
		}
	case classString:
		t.padding = flags[0] & 15
		if size == 0 || t.padding > 2 {
			return bad(fmt.Sprintf("a string of %d bytes with padding %d", size, t.padding), "at least 1 byte and padding 0, 1 or 2")
		}
	case classVector:
		if flags[0]&15 != 1 || size != 4+width+4 {
			return bad(fmt.Sprintf("a variable-length sequence (kind %d, %d bytes)", flags[0]&15, size), "a variable-length string")
		}
	default:
		return bad(fmt.Sprintf("class %d", t.class), "integer (0), floating point (1), string (3) or variable-length string (9)")
	}
	return t, nil
}

// dataspace reads a dataspace message and returns the sizes of its dimensions:
// none for a scalar.
func (c *cursor) dataspace() (dims []uint64, elements uint64, err error) {
	at := c.at()
	version := c.version(1, 2)
	rank := int(c.u8())
	c.u8() // flags: maximum sizes and permutation follow, which are not needed
	kind := c.u8()
	if version == 1 {
		c.skip(4)
		kind = 0
	}
	elements = 1
	for range rank {
		d := c.u64()
		dims = append(dims, d)
		high, low := bits.Mul64(elements, d)
		if high != 0 || low > 1<<56 {
			return nil, 0, c.f.fail(at, "dataspace", "more than 2^56 elements", "a dataset of a size that can exist")
		}
		elements = low
		if c.err != nil {
			break
		}
	}
	if c.err != nil {
		return nil, 0, c.err
	}
	if kind == 2 {
		elements = 0
	}
	return dims, elements, nil
}

// fill returns the bytes of the dataset's fill value, nil for zeros.
func (h *header) fill(t datatype) ([]byte, error) {
	m := h.first(messageFill)
	if m == nil {
		if m = h.first(messageOldFill); m == nil {
			return nil, nil
		}
	}
	c := m.cursor("fill value message")
	defined := true
	if m.kind == messageFill {
		switch version := c.version(1, 3); version {
		case 1, 2:
			c.skip(2)
			defined = c.u8() != 0 || version == 1
		case 3:
			defined = c.u8()&0x20 != 0
		}
	}
	if c.err != nil || !defined {
		return nil, c.err
	}
	at := c.at()
	n := c.u32()
	if n == 0 || n == 0xffffffff || c.err != nil {
		return nil, c.err
	}
	if int64(n) != int64(t.size) {
		return nil, c.f.fail(at, "fill value", fmt.Sprintf("%d bytes", n), fmt.Sprintf("%d, the size of an element", t.size))
	}
	b := c.take(int(n))
	return b, c.err
}
