// Package hdf5 reads numbers and strings out of HDF5 files of the kind in which
// public strain is released: superblock 0 or 1, groups by symbol table, object
// headers of version 1, contiguous, compact or one-dimensional chunked data,
// filters deflate, shuffle and fletcher32. It writes nothing.
//
// The road of one read:
//
//  1. Open or New checks the superblock and finds the root group (file.go).
//  2. Dataset walks the path through the groups (group.go) to an object
//     header, and collects the header's messages (object.go, message.go).
//  3. For chunked data the index is read once into a sorted list (chunk.go).
//  4. Float64s, Int64s and Strings read the stored bytes of the elements asked
//     for, undo the filters (filter.go) and decode them (value.go).
//
// Trust: a file is foreign input. Every length and address is checked against
// the size of the file before anything is allocated or read, each walk over
// linked structures has the file's size as its budget of bytes (so that a cycle
// ends in an error), and inflated data are limited by the declared size of a
// chunk, which in turn is limited to 256 times the file (or 1 MiB).
// Every error is an *Error with the file, the offset, what was found there and
// what would have been accepted.
//
// Source: the HDF5 file format specification, version 1.1 (structures) and 2.0
// (later versions of single messages), from memory; the tests compare with
// files written and read by the format's general-purpose library.
package hdf5
