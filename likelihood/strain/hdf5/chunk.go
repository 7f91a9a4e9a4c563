package hdf5

import (
	"cmp"
	"fmt"
	"slices"
)

// chunk is one stored piece of a chunked dataset.
type chunk struct {
	first  uint64 // index of its first element
	at     int64  // offset of its stored bytes
	stored int    // their number
	skip   uint32 // bit i: filter i was not applied
}

// chunks is a dataset's index, sorted by first element.
type chunks struct {
	size    int // elements per chunk, also of the last, which may hang over
	list    []chunk
	filters []filter
}

// readChunks reads the rest of a chunked layout message, the filter pipeline
// and the whole index.
func (d *Dataset) readChunks(c *cursor) error {
	at := c.at()
	rank := int(c.u8()) - 1
	tree := c.u64()
	if c.err != nil {
		return c.err
	}
	if rank != 1 || len(d.dims) != 1 {
		return d.f.fail(at, "chunked dataset "+d.path, fmt.Sprintf("%d dimensions in chunks of %d", len(d.dims), rank), "one dimension")
	}
	n, element := c.u32(), c.u32()
	if c.err != nil {
		return c.err
	}
	if n == 0 || int64(element) != int64(d.kind.size) || uint64(n)*uint64(element) > d.f.largest() {
		return d.f.fail(at+1+width, "chunk size", fmt.Sprintf("%d elements of %d bytes", n, element),
			fmt.Sprintf("at least 1 element of %d bytes, at most %d bytes in all", d.kind.size, d.f.largest()))
	}
	list := &chunks{size: int(n)}
	if m := d.header.first(messageFilters); m != nil {
		var err error
		if list.filters, err = m.cursor("filter message").filters(); err != nil {
			return err
		}
	}
	d.chunks = list
	if tree == undefined {
		return nil // nothing was ever written
	}
	const keySize = 4 + 4 + 2*8 // stored size, filter mask, first element and a zero
	err := d.f.walkTree(d.f.budget(), tree, at+1, -1, 1, keySize, func(key *cursor, child uint64, from int64) error {
		stored, mask, first := key.u32(), key.u32(), key.u64()
		if key.err != nil {
			return key.err
		}
		start, err := d.f.address(child, from, "chunk of "+d.path)
		if err != nil {
			return err
		}
		if int64(stored) > d.f.size-start {
			return d.f.fail(key.base, "chunk of "+d.path, fmt.Sprintf("%d bytes at %d", stored, start),
				fmt.Sprintf("an end within the file's %d bytes", d.f.size))
		}
		if first%uint64(n) != 0 || first >= uint64(d.elements) {
			return d.f.fail(key.base+8, "chunk of "+d.path, fmt.Sprintf("first element %d", first),
				fmt.Sprintf("a multiple of %d below %d", n, d.elements))
		}
		list.list = append(list.list, chunk{first, start, int(stored), mask})
		return nil
	})
	if err != nil {
		return err
	}
	slices.SortFunc(list.list, func(a, b chunk) int { return cmp.Compare(a.first, b.first) })
	for i := 1; i < len(list.list); i++ {
		if list.list[i].first == list.list[i-1].first {
			return d.f.fail(list.list[i].at, "chunk of "+d.path,
				fmt.Sprintf("a second chunk for element %d", list.list[i].first), "one chunk for each element")
		}
	}
	return nil
}

// chunked reads count elements from first; what no chunk holds is filled in.
func (d *Dataset) chunked(first, count int) ([]byte, error) {
	size := d.kind.size
	out := make([]byte, count*size)
	list := d.chunks.list
	i, _ := slices.BinarySearchFunc(list, uint64(first), func(c chunk, first uint64) int {
		return cmp.Compare(c.first+uint64(d.chunks.size)-1, first)
	})
	done := first // elements before it are written
	for ; i < len(list) && list[i].first < uint64(first+count); i++ {
		raw, err := d.unfilter(list[i])
		if err != nil {
			return nil, err
		}
		from := max(int(list[i].first), first)
		to := min(int(list[i].first)+d.chunks.size, first+count)
		d.fillIn(out[(done-first)*size : (from-first)*size])
		copy(out[(from-first)*size:(to-first)*size], raw[(from-int(list[i].first))*size:])
		done = to
	}
	d.fillIn(out[(done-first)*size:])
	return out, nil
}
