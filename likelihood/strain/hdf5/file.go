package hdf5

import (
	"errors"
	"fmt"
	"io"
	"os"
)

const (
	signature = "\x89HDF\r\n\x1a\n"
	// undefined is the address of something that was never allocated.
	undefined = ^uint64(0)
	// width is the only size of offsets and lengths that is read, in bytes.
	width = 8
)

// File is an open file. Its methods and those of its datasets may be used by
// several goroutines at once.
type File struct {
	r      io.ReaderAt
	size   int64
	name   string
	root   int64 // address of the root group's object header
	closer io.Closer
}

// Open opens the file at path. The caller closes it.
func Open(path string) (*File, error) {
	osFile, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	info, err := osFile.Stat()
	if err == nil && !info.Mode().IsRegular() {
		err = fmt.Errorf("%s: got %s, want a regular file", path, info.Mode().Type())
	}
	if err != nil {
		osFile.Close()
		return nil, err
	}
	f, err := New(osFile, info.Size(), path)
	if err != nil {
		osFile.Close()
		return nil, err
	}
	f.closer = osFile
	return f, nil
}

// New reads from the first size bytes of r; name stands for the file in errors.
func New(r io.ReaderAt, size int64, name string) (*File, error) {
	f := &File{r: r, size: size, name: name}
	head, err := f.read(0, len(signature), "signature")
	if err != nil {
		return nil, err
	}
	if string(head) != signature {
		return nil, f.fail(0, "signature", fmt.Sprintf("%q", head), fmt.Sprintf("%q (an HDF5 file)", signature))
	}
	c, err := f.cursor(8, 16, "superblock")
	if err != nil {
		return nil, err
	}
	version := c.u8()
	if version > 1 {
		return nil, f.fail(8, "superblock version", fmt.Sprint(version),
			"0 or 1 (a file written for the earliest library version)")
	}
	c.skip(4) // versions of other structures, which carry their own
	if o, l := c.u8(), c.u8(); o != width || l != width {
		return nil, f.fail(13, "sizes of offsets and lengths", fmt.Sprintf("%d and %d", o, l), "8 and 8")
	}
	at := int64(24)
	if version == 1 {
		at += 4 // the chunk index's node size
	}
	// Base address, free space, end of file, driver block, root group entry.
	if c, err = f.cursor(at, 4*width+40, "superblock"); err != nil {
		return nil, err
	}
	if base := c.u64(); base != 0 {
		return nil, f.fail(at, "base address", fmt.Sprint(base), "0")
	}
	c.skip(width)
	if end := c.u64(); end > uint64(size) {
		return nil, f.fail(at+2*width, "length of the file", fmt.Sprintf("%d bytes", size),
			fmt.Sprintf("the %d bytes the superblock declares (is the file cut off?)", end))
	}
	c.skip(2 * width) // driver block, name offset
	if f.root, err = f.address(c.u64(), c.at()-width, "root group"); err != nil {
		return nil, err
	}
	return f, nil
}

// Close closes what Open opened.
func (f *File) Close() error {
	if f.closer == nil {
		return nil
	}
	return f.closer.Close()
}

// address checks that an address read at offset points into the file.
func (f *File) address(a uint64, offset int64, what string) (int64, error) {
	if a >= uint64(f.size) {
		got := fmt.Sprint(a)
		if a == undefined {
			got = "the undefined address"
		}
		return 0, f.fail(offset, "address of "+what, got, fmt.Sprintf("less than the file's %d bytes", f.size))
	}
	return int64(a), nil
}

// read returns n bytes from offset in a slice of their own.
func (f *File) read(offset int64, n int, what string) ([]byte, error) {
	if offset < 0 || n < 0 || offset > f.size || int64(n) > f.size-offset {
		return nil, f.fail(offset, what, fmt.Sprintf("%d bytes to the end of the file", max(0, f.size-offset)),
			fmt.Sprintf("%d bytes", n))
	}
	b := make([]byte, n)
	if got, err := f.r.ReadAt(b, offset); got < n {
		if err == nil || errors.Is(err, io.EOF) {
			err = io.ErrUnexpectedEOF
		}
		e := f.fail(offset, what, fmt.Sprintf("%d bytes and then: %v", got, err), fmt.Sprintf("%d bytes", n))
		e.Err = err
		return nil, e
	}
	return b, nil
}

// budget is how many bytes a walk over linked structures may still read. A
// well-formed walk meets no byte twice, so it starts at the file's size; a
// cycle or overlapping structures use it up.
type budget struct {
	f    *File
	left int64
}

func (f *File) budget() *budget { return &budget{f, f.size} }

func (b *budget) read(offset int64, n int, what string) (*cursor, error) {
	if b.left -= int64(n); b.left < 0 {
		return nil, b.f.fail(offset, what, "structures of more bytes than the file has", "structures that do not refer back to themselves")
	}
	return b.f.cursor(offset, n, what)
}
