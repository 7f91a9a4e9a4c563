// Package checkpoint keeps the state of a long computation in a file, so that it can
// be gone on with after an interruption.
//
// The road of a state:
//
//  1. Lock makes sure that one process alone works in a directory.
//  2. File.Save writes the bytes beside the file, flushes them to the disk and gives
//     them the file's name: at any moment the file holds one whole state, the old or
//     the new.
//  3. File.Load gives them back, or says why what stands there is not a whole state.
//
// What the bytes mean is the caller's matter; Load vouches only that they are the ones
// that were saved. A file is
//
//	magic     22 bytes, "knell kept state file\n"
//	version    4 bytes, the layout's, big-endian
//	length     8 bytes, of the state, big-endian
//	checksum  32 bytes, SHA-256 of the three above and the state
//	state
package checkpoint
