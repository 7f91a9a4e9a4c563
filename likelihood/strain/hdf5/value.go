package hdf5

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"strings"
)

// value is a run of n elements of one type, as stored, filters undone.
type value struct {
	f      *File
	what   string
	kind   datatype
	n      int
	raw    []byte
	offset int64 // where it stands, or its object header if it was filtered
}

func (v *value) refuse(want string) error {
	return v.f.fail(v.offset, "type of "+v.what, v.kind.String(), want)
}

func (v *value) order() binary.ByteOrder {
	if v.kind.bigEndian {
		return binary.BigEndian
	}
	return binary.LittleEndian
}

func (v *value) float64s() ([]float64, error) {
	switch {
	case v.kind.class == classInteger:
		list, err := v.int64s()
		if err != nil {
			return nil, err
		}
		out := make([]float64, len(list))
		for i, x := range list {
			if x > 1<<53 || x < -1<<53 {
				return nil, v.f.fail(v.offset, fmt.Sprintf("element %d of %s", i, v.what), fmt.Sprint(x),
					"at most 2^53, which a float64 holds exactly")
			}
			out[i] = float64(x)
		}
		return out, nil
	case v.kind.class != classFloat:
		return nil, v.refuse("numbers")
	}
	out := make([]float64, v.n)
	switch {
	case v.kind.size == 4:
		order := v.order()
		for i := range out {
			out[i] = float64(math.Float32frombits(order.Uint32(v.raw[4*i:])))
		}
	case v.kind.bigEndian:
		for i := range out {
			out[i] = math.Float64frombits(binary.BigEndian.Uint64(v.raw[8*i:]))
		}
	default:
		for i := range out {
			out[i] = math.Float64frombits(binary.LittleEndian.Uint64(v.raw[8*i:]))
		}
	}
	return out, nil
}

func (v *value) int64s() ([]int64, error) {
	if v.kind.class != classInteger {
		return nil, v.refuse("integers")
	}
	order, size := v.order(), v.kind.size
	unused := 64 - 8*size
	out := make([]int64, v.n)
	for i := range out {
		b := v.raw[i*size:]
		var u uint64
		switch size {
		case 1:
			u = uint64(b[0])
		case 2:
			u = uint64(order.Uint16(b))
		case 4:
			u = uint64(order.Uint32(b))
		default:
			u = order.Uint64(b)
		}
		if v.kind.signed {
			u = uint64(int64(u<<unused) >> unused)
		} else if u > math.MaxInt64 {
			return nil, v.f.fail(v.offset, fmt.Sprintf("element %d of %s", i, v.what), fmt.Sprint(u), "less than 2^63")
		}
		out[i] = int64(u)
	}
	return out, nil
}

func (v *value) strings() ([]string, error) {
	out := make([]string, v.n)
	switch v.kind.class {
	case classString:
		for i := range out {
			b := v.raw[i*v.kind.size : (i+1)*v.kind.size]
			// Whatever the padding, a zero ends the text for every program that
			// prints it; spaces count as padding only where declared so.
			if end := bytes.IndexByte(b, 0); end >= 0 && v.kind.padding == 0 {
				b = b[:end]
			}
			out[i] = strings.TrimRight(string(b), "\x00")
			if v.kind.padding == 2 {
				out[i] = strings.TrimRight(out[i], " ")
			}
		}
	case classVector:
		heap := v.f.globalHeap()
		for i := range out {
			c := &cursor{f: v.f, what: v.what, base: v.offset, b: v.raw[i*v.kind.size : (i+1)*v.kind.size]}
			length, address, index := c.u32(), c.u64(), c.u32()
			if length == 0 {
				continue
			}
			b, err := heap.object(address, v.offset, index)
			if err != nil {
				return nil, err
			}
			if uint64(length) > uint64(len(b)) {
				return nil, v.f.fail(v.offset, fmt.Sprintf("element %d of %s", i, v.what),
					fmt.Sprintf("a string of %d bytes in a heap object of %d", length, len(b)), "a string inside its object")
			}
			out[i] = strings.TrimRight(string(b[:length]), "\x00")
		}
	default:
		return nil, v.refuse("strings")
	}
	return out, nil
}
