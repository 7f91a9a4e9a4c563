package hdf5

import "fmt"

// globalHeap finds strings of variable length. It reads the heads of each
// collection once. Heads and strings count against one budget, so that many
// references to one big string end in an error and not in its many copies.
type globalHeap struct {
	budget *budget
	seen   map[int64]map[uint32]extent
}

type extent struct {
	at   int64
	size int
}

func (f *File) globalHeap() *globalHeap {
	return &globalHeap{f.budget(), map[int64]map[uint32]extent{}}
}

// object returns the bytes of one object of the collection at address, which
// was read at offset from.
func (h *globalHeap) object(address uint64, from int64, index uint32) ([]byte, error) {
	f := h.budget.f
	at, err := f.address(address, from, "global heap collection")
	if err != nil {
		return nil, err
	}
	if h.seen[at] == nil {
		if h.seen[at], err = h.collection(at); err != nil {
			return nil, err
		}
	}
	e, ok := h.seen[at][index]
	if !ok {
		return nil, f.fail(at, "global heap collection", fmt.Sprintf("no object %d", index), "the object that a string refers to")
	}
	c, err := h.budget.read(e.at, e.size, "global heap object")
	if err != nil {
		return nil, err
	}
	return c.b, nil
}

// collection lists the objects of the collection at an offset.
func (h *globalHeap) collection(at int64) (map[uint32]extent, error) {
	const head = 8 + width
	f := h.budget.f
	c, err := h.budget.read(at, head, "global heap collection")
	if err != nil {
		return nil, err
	}
	c.expect("GCOL")
	c.version(1, 1)
	c.skip(3)
	size := c.u64()
	if c.err != nil {
		return nil, c.err
	}
	if size < head || size > uint64(f.size-at) {
		return nil, f.fail(at+8, "global heap collection", fmt.Sprintf("%d bytes", size),
			fmt.Sprintf("%d to %d, the end of the file", head, f.size-at))
	}
	list := map[uint32]extent{}
	end := at + int64(size)
	for at += head; end-at >= head; {
		if c, err = h.budget.read(at, head, "global heap object"); err != nil {
			return nil, err
		}
		index := uint32(c.u16())
		c.skip(6) // reference count, reserved
		n := c.u64()
		if index == 0 {
			break // the free space, which is last
		}
		if n > uint64(end-at-head) {
			return nil, f.fail(at+8, "global heap object", fmt.Sprintf("%d bytes", n),
				fmt.Sprintf("at most %d, to the end of its collection", end-at-head))
		}
		list[index] = extent{at + head, int(n)}
		at += head + int64((n+7)&^7)
	}
	return list, nil
}
