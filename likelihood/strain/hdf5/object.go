package hdf5

import "fmt"

// Types of header messages that are read.
const (
	messageDataspace    = 0x01
	messageDatatype     = 0x03
	messageOldFill      = 0x04
	messageFill         = 0x05
	messageLayout       = 0x08
	messageFilters      = 0x0b
	messageAttribute    = 0x0c
	messageContinuation = 0x10
	messageSymbolTable  = 0x11
)

const flagShared = 1 << 1

// message is one message of an object header.
type message struct {
	f      *File
	kind   uint16
	flags  byte
	offset int64 // of the body
	body   []byte
}

func (m *message) cursor(what string) *cursor {
	c := &cursor{f: m.f, what: what, base: m.offset, b: m.body}
	if m.flags&flagShared != 0 {
		c.err = m.f.fail(m.offset, what, "a reference to a shared message", "the message itself")
	}
	return c
}

type header struct {
	at   int64
	list []message
}

func (h *header) first(kind uint16) *message {
	for i := range h.list {
		if h.list[i].kind == kind {
			return &h.list[i]
		}
	}
	return nil
}

// need is first, with an error when the object has no such message.
func (h *header) need(f *File, kind uint16, what string) (*cursor, error) {
	m := h.first(kind)
	if m == nil {
		return nil, f.fail(h.at, "object header", "no "+what+" message", "a dataset")
	}
	c := m.cursor(what + " message")
	return c, c.err
}

// messages reads the version 1 object header at an address, with its
// continuation blocks.
func (f *File) messages(at int64) (*header, error) {
	b := f.budget()
	c, err := b.read(at, 12, "object header")
	if err != nil {
		return nil, err
	}
	c.version(1, 1)
	c.skip(1)
	total := int(c.u16())
	c.skip(4) // reference count
	size := c.u32()
	if c.err != nil {
		return nil, c.err
	}
	type block struct {
		at   int64
		size uint64
	}
	h := &header{at: at}
	// The prefix is padded to a multiple of 8.
	for todo := []block{{at + 16, uint64(size)}}; len(todo) > 0; todo = todo[1:] {
		if todo[0].size > uint64(f.size) {
			return nil, f.fail(todo[0].at, "object header block", fmt.Sprintf("%d bytes", todo[0].size),
				fmt.Sprintf("at most the file's %d bytes", f.size))
		}
		c, err := b.read(todo[0].at, int(todo[0].size), "object header block")
		if err != nil {
			return nil, err
		}
		for len(h.list) < total && len(c.b)-c.pos >= 8 {
			m := message{f: f, kind: c.u16()}
			n := int(c.u16())
			m.flags = c.u8()
			c.skip(3)
			m.offset = c.at()
			m.body = c.take(n)
			if c.err != nil {
				return nil, c.err
			}
			if m.kind == messageContinuation {
				cc := m.cursor("continuation message")
				next, length := cc.u64(), cc.u64()
				if cc.err != nil {
					return nil, cc.err
				}
				start, err := f.address(next, m.offset, "object header continuation")
				if err != nil {
					return nil, err
				}
				todo = append(todo, block{start, length})
			}
			h.list = append(h.list, m)
		}
	}
	if len(h.list) < total {
		return nil, f.fail(at+2, "object header", fmt.Sprintf("%d messages", len(h.list)),
			fmt.Sprintf("the %d it declares", total))
	}
	return h, nil
}
