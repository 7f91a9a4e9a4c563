package hdf5

import (
	"fmt"
	"math/bits"
)

const (
	layoutCompact    = 0
	layoutContiguous = 1
	layoutChunked    = 2
	// maxRatio is how many times larger than the file a dataset may be, and
	// maxSmall how large it may be in any case, in bytes. Deflate could reach
	// 1032, but only on data that are all the same; strain reaches 10 or so.
	maxRatio = 256
	maxSmall = 1 << 20
)

// Dataset is an array of the file. Elements are counted from 0 in storage
// order (row-major).
type Dataset struct {
	f        *File
	path     string
	header   *header
	kind     datatype
	dims     []uint64
	elements int

	compact []byte // stored in the header
	at      int64  // offset of contiguous or compact data; -1 when never written
	chunks  *chunks
	fill    []byte // one element, or nil for zeros
}

// Dataset opens the dataset at path, such as "strain/Strain".
func (f *File) Dataset(path string) (*Dataset, error) {
	at, err := f.find(path)
	if err != nil {
		return nil, err
	}
	d := &Dataset{f: f, path: path}
	if d.header, err = f.messages(at); err != nil {
		return nil, err
	}
	c, err := d.header.need(f, messageDatatype, "datatype")
	if err != nil {
		return nil, err
	}
	if d.kind, err = c.datatype(); err != nil {
		return nil, err
	}
	if c, err = d.header.need(f, messageDataspace, "dataspace"); err != nil {
		return nil, err
	}
	var n uint64
	if d.dims, n, err = c.dataspace(); err != nil {
		return nil, err
	}
	high, size := bits.Mul64(n, uint64(d.kind.size))
	if high != 0 || size > f.largest() {
		return nil, f.fail(c.base, "dataset "+path, fmt.Sprintf("%d elements of %d bytes", n, d.kind.size),
			fmt.Sprintf("at most %d bytes in a file of %d", f.largest(), f.size))
	}
	d.elements = int(n)
	if d.fill, err = d.header.fill(d.kind); err != nil {
		return nil, err
	}
	if c, err = d.header.need(f, messageLayout, "layout"); err != nil {
		return nil, err
	}
	return d, d.layout(c)
}

// largest is the most bytes a dataset or chunk may have.
func (f *File) largest() uint64 { return max(maxSmall, maxRatio*uint64(f.size)) }

// layout reads a layout message of version 3 and finds the data.
func (d *Dataset) layout(c *cursor) error {
	c.version(3, 3)
	kind := c.u8()
	if c.err != nil {
		return c.err
	}
	size := uint64(d.elements) * uint64(d.kind.size)
	short := func(at int64, got uint64) error {
		return d.f.fail(at, "data of "+d.path, fmt.Sprintf("%d bytes", got),
			fmt.Sprintf("%d for %d elements", size, d.elements))
	}
	switch kind {
	case layoutCompact:
		n := int(c.u16())
		d.at = c.at()
		d.compact = c.take(n)
		if c.err == nil && uint64(n) < size {
			return short(d.at, uint64(n))
		}
	case layoutContiguous:
		address, n := c.u64(), c.u64()
		if c.err != nil {
			return c.err
		}
		if address == undefined || size == 0 {
			d.at = -1
			break
		}
		at, err := d.f.address(address, c.at()-2*width, "data of "+d.path)
		if err != nil {
			return err
		}
		if n < size {
			return short(c.at()-width, n)
		}
		if size > uint64(d.f.size-at) {
			return short(at, uint64(d.f.size-at))
		}
		d.at = at
	case layoutChunked:
		return d.readChunks(c)
	default:
		return d.f.fail(c.at()-1, "layout class", fmt.Sprint(kind), "0 (compact), 1 (contiguous) or 2 (chunked)")
	}
	return c.err
}

// Len is the number of elements.
func (d *Dataset) Len() int { return d.elements }

// Dims returns the sizes of the dimensions, none for a scalar.
func (d *Dataset) Dims() []uint64 { return append([]uint64(nil), d.dims...) }

// value reads count elements from first as stored, filters undone.
func (d *Dataset) value(first, count int) (*value, error) {
	if first < 0 || count < 0 || first > d.elements || count > d.elements-first {
		return nil, d.f.fail(d.header.at, "elements of "+d.path, fmt.Sprintf("%d from %d", count, first),
			fmt.Sprintf("a range within its %d elements", d.elements))
	}
	v := &value{f: d.f, what: d.path, kind: d.kind, n: count, offset: d.header.at}
	start, size := first*d.kind.size, count*d.kind.size
	var err error
	switch {
	case d.chunks != nil:
		v.raw, err = d.chunked(first, count)
	case d.compact != nil:
		v.raw, v.offset = d.compact[start:start+size], d.at+int64(start)
	case d.at >= 0:
		v.offset = d.at + int64(start)
		v.raw, err = d.f.read(v.offset, size, "data of "+d.path)
	default:
		v.raw = make([]byte, size)
		d.fillIn(v.raw)
	}
	return v, err
}

// fillIn repeats the fill value over b.
func (d *Dataset) fillIn(b []byte) {
	if d.fill == nil {
		return
	}
	for i := 0; i < len(b); i += len(d.fill) {
		copy(b[i:], d.fill)
	}
}

// Float64s returns count elements from first as float64. The elements must be
// floating-point numbers, or integers that a float64 holds exactly.
func (d *Dataset) Float64s(first, count int) ([]float64, error) {
	v, err := d.value(first, count)
	if err != nil {
		return nil, err
	}
	return v.float64s()
}

// Int64s returns count elements from first; they must be integers.
func (d *Dataset) Int64s(first, count int) ([]int64, error) {
	v, err := d.value(first, count)
	if err != nil {
		return nil, err
	}
	return v.int64s()
}

// Strings returns count elements from first; they must be strings.
func (d *Dataset) Strings(first, count int) ([]string, error) {
	v, err := d.value(first, count)
	if err != nil {
		return nil, err
	}
	return v.strings()
}

// Float64 returns the value of a dataset of one number.
func (d *Dataset) Float64() (float64, error) { return scalar(d, d.Float64s) }

// Int64 returns the value of a dataset of one integer.
func (d *Dataset) Int64() (int64, error) { return scalar(d, d.Int64s) }

// Text returns the value of a dataset of one string.
func (d *Dataset) Text() (string, error) { return scalar(d, d.Strings) }

func scalar[T any](d *Dataset, get func(int, int) ([]T, error)) (T, error) {
	var zero T
	if d.elements != 1 {
		return zero, d.f.fail(d.header.at, "dataset "+d.path, fmt.Sprintf("%d elements", d.elements), "one")
	}
	v, err := get(0, 1)
	if err != nil {
		return zero, err
	}
	return v[0], nil
}
