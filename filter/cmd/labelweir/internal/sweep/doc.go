// Package sweep runs one sweep over an Arrow file, from settings to the files on disk: it opens the input, has the
// pipeline judge every record, and writes the tagged file, the quarantine, the report and the snapshot.
package sweep
