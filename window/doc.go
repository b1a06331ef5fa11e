// Package window keeps the labelled records that the model is trained on now: a bounded sample of the recent past.
//
// A [Window] holds at most a number of rows, from the last span of record time, within a number of bytes. When more
// rows arrive than fit it keeps a uniform sample of the span, with a floor for rare classes. It is column-major, has
// one writer, and gives a fit its own copy of the rows through [Window.View]. It has no clock and reads no files: time
// comes with the rows, bytes go through io.Reader and io.Writer.
package window
