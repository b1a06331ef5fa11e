// Package guard runs this program a second time, as a child with a limit on its memory, and watches it. What reads bytes
// from anywhere may run out of memory, overflow its stack or never end, and none of that can be caught from within: so
// it happens in the child, and the parent lives to say what it was and where.
//
// The parent calls [Run], the child [Join]. Between them stand a page of shared memory, in which the child notes where
// it is ([Marks]) and the parent looks when the child has died, and a pipe that closes when the parent ends, upon which
// the child ends too. The child's standard error is a pipe that only the Go runtime writes to, when it dies; what people
// are to read goes to [Child.Err].
//
// The package works on Unix. Elsewhere [Supported] is false and Run is not to be called.
package guard
