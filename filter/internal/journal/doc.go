// Package journal keeps streams of bytes in one growing file, up to marks that survive whatever happens after them. It
// knows nothing of what the bytes mean.
//
// The file. Integers are little-endian.
//
//	bytes  field
//	8      "LWRESUME"
//	2      u16 version, 1
//	       frames, each:
//	1        u8 kind: 0 a mark, else the number of a stream
//	4        u32 n, at most 65536
//	n        bytes of the stream, or of the mark
//	4        u32 CRC-32C (Castagnoli) of all bytes of the file before it
//
// What stands after the last mark, and everything from the first frame on whose checksum does not fit, counts as not
// written.
package journal
