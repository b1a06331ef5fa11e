package textrows

import "bytes"

// ByteOrderMark may stand before the first row.
const ByteOrderMark = "\xef\xbb\xbf"

// Foreign tells from the first bytes of a file what can't be text in UTF-8, and what to do; "" when nothing speaks against
// it.
func Foreign(head []byte) (what, do string) {
	switch {
	case bytes.HasPrefix(head, []byte("\xff\xfe")), bytes.HasPrefix(head, []byte("\xfe\xff")):
		return "is UTF-16 text, not UTF-8", "convert it to UTF-8 first"
	case bytes.HasPrefix(head, []byte("\x1f\x8b")):
		return "is compressed by gzip", "unpack it first"
	case bytes.HasPrefix(head, []byte("PK\x03\x04")):
		return "is a zip archive or a spreadsheet", "unpack it, or save it as text, first"
	}
	return "", ""
}
