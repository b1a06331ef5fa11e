package csv

import (
	"strings"

	"labelweir/connectors/table"
)

const formatName = "csv"

// Format describes the format. Nothing at a file's beginning tells it, so it goes by the name.
func Format() table.Format {
	return table.Format{Name: formatName, Title: "CSV", Endings: []string{".csv", tabbed}, Pipe: true, Rows: true, Open: open, Create: create}
}

// tabbed is the ending of a name that promises tabs between the cells.
const tabbed = ".tsv"

func isTabbed(name string) bool { return strings.HasSuffix(strings.ToLower(name), tabbed) }

// manner is how a file is written beyond its columns.
type manner struct {
	delimiter byte
	header    []byte // as it stands in the file, a byte order mark included, without the line's end
	newline   string // behind each row: LF or CR LF
}

// delimiters are those that are told by looking at the first rows, the likelier first.
const delimiters = ",;\t|"

// delimiterKey is the metadata key, on the hidden column, of the delimiter that its rows are written with.
const delimiterKey = "labelweir.delimiter"
