package hdf5

import (
	"bytes"
	"fmt"
	"strings"
)

const (
	nodeHead  = 8 + 2*width // a B-tree node before its keys
	entrySize = 2*width + 24
	softLink  = 2 // cache type of a symbol table entry that is a soft link
)

// entry is one member of a group.
type entry struct {
	name   string
	header int64 // address of its object header; -1 for a soft link
	offset int64 // where the entry stands
}

// find walks path, such as "strain/Strain", from the root group and returns
// the address of the object's header.
func (f *File) find(path string) (int64, error) {
	at, walked := f.root, ""
	for _, name := range strings.Split(strings.Trim(path, "/"), "/") {
		if name == "" {
			continue
		}
		members, err := f.members(at, walked)
		if err != nil {
			return 0, err
		}
		var names []string
		found := false
		for _, m := range members {
			names = append(names, m.name)
			if m.name != name {
				continue
			}
			if m.header < 0 {
				return 0, f.fail(m.offset, "member "+walked+"/"+name, "a soft link", "a hard link")
			}
			at, found = m.header, true
			break
		}
		if !found {
			e := f.fail(at, "member "+name+" of group "+walked+"/", "no such member", "one of "+listed(names))
			e.Err = ErrNotFound
			return 0, e
		}
		walked += "/" + name
	}
	return at, nil
}

// listed joins names, a dozen at most and none longer than 40 bytes.
func listed(names []string) string {
	if len(names) == 0 {
		return "none (it is empty)"
	}
	var out []string
	for i, n := range names {
		if i == 12 {
			out = append(out, "...")
			break
		}
		if len(n) > 40 {
			n = n[:40] + "..."
		}
		out = append(out, fmt.Sprintf("%q", n))
	}
	return strings.Join(out, ", ")
}

// Members returns the names in the group at path, sorted as the file sorts them.
func (f *File) Members(path string) ([]string, error) {
	at, err := f.find(path)
	if err != nil {
		return nil, err
	}
	members, err := f.members(at, strings.Trim(path, "/"))
	if err != nil {
		return nil, err
	}
	names := make([]string, len(members))
	for i, m := range members {
		names[i] = m.name
	}
	return names, nil
}

// members lists the group whose object header is at header.
func (f *File) members(header int64, path string) ([]entry, error) {
	messages, err := f.messages(header)
	if err != nil {
		return nil, err
	}
	m := messages.first(messageSymbolTable)
	if m == nil {
		return nil, f.fail(header, "object /"+path, "no symbol table message", "a group of the symbol-table kind")
	}
	c := m.cursor("symbol table message")
	tree, heap := c.u64(), c.u64()
	if c.err != nil {
		return nil, c.err
	}
	names, err := f.localHeap(heap, m.offset+width)
	if err != nil {
		return nil, err
	}
	var out []entry
	err = f.walkGroup(f.budget(), tree, m.offset, -1, func(node *cursor) error {
		list, err := f.symbols(node, names)
		out = append(out, list...)
		return err
	})
	return out, err
}

// localHeap returns the data segment of a group's name heap.
func (f *File) localHeap(address uint64, from int64) (*cursor, error) {
	at, err := f.address(address, from, "local heap")
	if err != nil {
		return nil, err
	}
	c, err := f.cursor(at, 8+3*width, "local heap")
	if err != nil {
		return nil, err
	}
	c.expect("HEAP")
	c.version(0, 0)
	c.skip(3)
	size := c.u64()
	c.skip(width)
	data := c.u64()
	if c.err != nil {
		return nil, c.err
	}
	start, err := f.address(data, c.at()-width, "local heap data")
	if err != nil {
		return nil, err
	}
	if size > uint64(f.size) {
		return nil, f.fail(at+8, "local heap size", fmt.Sprint(size), fmt.Sprintf("at most the file's %d bytes", f.size))
	}
	return f.cursor(start, int(size), "local heap data")
}

// walkGroup calls leaf for each symbol table node under a group's B-tree.
// level is the level the node must have; -1 accepts any (the root).
func (f *File) walkGroup(b *budget, address uint64, from int64, level int, leaf func(*cursor) error) error {
	return f.walkTree(b, address, from, level, 0, width, func(_ *cursor, child uint64, at int64) error {
		start, err := f.address(child, at, "symbol table node")
		if err != nil {
			return err
		}
		c, err := b.read(start, 8, "symbol table node")
		if err != nil {
			return err
		}
		c.expect("SNOD")
		c.version(1, 1)
		c.skip(1)
		n := int(c.u16())
		if c.err != nil {
			return c.err
		}
		if c, err = b.read(start+8, n*entrySize, "symbol table node"); err != nil {
			return err
		}
		return leaf(c)
	})
}

// walkTree visits the children of all leaves of a version 1 B-tree whose nodes
// are of the given kind, with the key before each child.
func (f *File) walkTree(b *budget, address uint64, from int64, level int, kind byte, keySize int,
	visit func(key *cursor, child uint64, at int64) error) error {
	at, err := f.address(address, from, "B-tree node")
	if err != nil {
		return err
	}
	c, err := b.read(at, nodeHead, "B-tree node")
	if err != nil {
		return err
	}
	if err := c.expect("TREE"); err != nil {
		return err
	}
	if got := c.u8(); got != kind {
		return f.fail(at+4, "B-tree node type", fmt.Sprint(got), fmt.Sprint(kind))
	}
	here := int(c.u8())
	if level >= 0 && here != level {
		return f.fail(at+5, "B-tree node level", fmt.Sprint(here), fmt.Sprintf("%d, one below its parent", level))
	}
	n := int(c.u16())
	if c, err = b.read(at+nodeHead, n*(keySize+width), "B-tree node"); err != nil {
		return err
	}
	for range n {
		key := c.part(keySize, "B-tree key")
		child := c.u64()
		if c.err != nil {
			return c.err
		}
		if here == 0 {
			err = visit(key, child, c.at()-width)
		} else {
			err = f.walkTree(b, child, c.at()-width, here-1, kind, keySize, visit)
		}
		if err != nil {
			return err
		}
	}
	return nil
}

// symbols decodes the entries of one symbol table node.
func (f *File) symbols(c *cursor, names *cursor) ([]entry, error) {
	var out []entry
	for c.pos < len(c.b) {
		e := entry{offset: c.at(), header: -1}
		nameAt, header, cache := c.u64(), c.u64(), c.u32()
		c.skip(20)
		if c.err != nil {
			return nil, c.err
		}
		if nameAt >= uint64(len(names.b)) {
			return nil, f.fail(e.offset, "name offset", fmt.Sprint(nameAt),
				fmt.Sprintf("less than the heap's %d bytes", len(names.b)))
		}
		rest := names.b[nameAt:]
		end := bytes.IndexByte(rest, 0)
		if end < 0 {
			return nil, f.fail(names.base+int64(nameAt), "member name", "no terminating zero", "a zero-terminated name")
		}
		e.name = string(rest[:end])
		if cache != softLink {
			a, err := f.address(header, e.offset+width, "object header")
			if err != nil {
				return nil, err
			}
			e.header = a
		}
		out = append(out, e)
	}
	return out, nil
}
