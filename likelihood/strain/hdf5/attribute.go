package hdf5

import (
	"fmt"
	"math/bits"
	"strings"
)

// Attribute is a small value attached to a dataset or group.
type Attribute struct{ v *value }

// Attribute returns the dataset's attribute of that name.
func (d *Dataset) Attribute(name string) (*Attribute, error) {
	return d.f.attribute(d.header, d.path, name)
}

// Attribute returns an attribute of the group at path ("" is the root).
func (f *File) Attribute(path, name string) (*Attribute, error) {
	at, err := f.find(path)
	if err != nil {
		return nil, err
	}
	h, err := f.messages(at)
	if err != nil {
		return nil, err
	}
	return f.attribute(h, path, name)
}

func (f *File) attribute(h *header, path, name string) (*Attribute, error) {
	var names []string
	for i := range h.list {
		if h.list[i].kind != messageAttribute {
			continue
		}
		c := h.list[i].cursor("attribute message")
		version := c.version(1, 3)
		flags := c.u8()
		nameSize, typeSize, spaceSize := int(c.u16()), int(c.u16()), int(c.u16())
		if version == 3 {
			c.skip(1) // character set of the name
		}
		got := strings.TrimRight(string(c.take(nameSize)), "\x00")
		if c.err != nil {
			return nil, c.err
		}
		if got != name {
			names = append(names, got)
			continue
		}
		if version > 1 && flags&3 != 0 {
			return nil, f.fail(h.list[i].offset+1, "attribute "+name, "a reference to a shared type", "a type of its own")
		}
		return c.attributeValue(path+"@"+name, version, typeSize, spaceSize)
	}
	e := f.fail(h.at, "attribute "+name+" of "+path, "no such attribute", "one of "+listed(names))
	e.Err = ErrNotFound
	return nil, e
}

// attributeValue reads what follows an attribute's name.
func (c *cursor) attributeValue(what string, version byte, typeSize, spaceSize int) (*Attribute, error) {
	// Version 1 pads each part to a multiple of 8.
	align := func() {
		if version == 1 {
			c.align()
		}
	}
	align()
	kind, err := c.part(typeSize, "datatype of "+what).datatype()
	if err != nil {
		return nil, err
	}
	align()
	_, n, err := c.part(spaceSize, "dataspace of "+what).dataspace()
	if err != nil {
		return nil, err
	}
	align()
	v := &value{f: c.f, what: what, kind: kind, offset: c.at()}
	high, size := bits.Mul64(n, uint64(kind.size))
	if left := uint64(len(c.b) - c.pos); c.err == nil && (high != 0 || size > left) {
		return nil, c.f.fail(c.at(), what, fmt.Sprintf("%d bytes", left), fmt.Sprintf("%d elements of %d bytes", n, kind.size))
	}
	v.n, v.raw = int(n), c.take(int(size))
	return &Attribute{v}, c.err
}

// Float64s returns all elements as numbers.
func (a *Attribute) Float64s() ([]float64, error) { return a.v.float64s() }

// Float64 returns the value of an attribute of one number.
func (a *Attribute) Float64() (float64, error) { return only(a.v, a.v.float64s) }

// Int64 returns the value of an attribute of one integer.
func (a *Attribute) Int64() (int64, error) { return only(a.v, a.v.int64s) }

// Text returns the value of an attribute of one string.
func (a *Attribute) Text() (string, error) { return only(a.v, a.v.strings) }

func only[T any](v *value, get func() ([]T, error)) (T, error) {
	var zero T
	list, err := get()
	if err != nil {
		return zero, err
	}
	if len(list) != 1 {
		return zero, v.f.fail(v.offset, v.what, fmt.Sprintf("%d elements", len(list)), "one")
	}
	return list[0], nil
}
