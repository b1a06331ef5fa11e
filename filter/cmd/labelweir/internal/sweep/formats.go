package sweep

import (
	"labelweir/connectors/arrowfile"
	"labelweir/connectors/csv"
	"labelweir/connectors/jsonlines"
	"labelweir/connectors/parquet"
	"labelweir/connectors/table"
)

// formats are the file formats that a sweep reads and writes.
func formats() []table.Format {
	return append(arrowfile.Formats(), parquet.Format(), csv.Format(), jsonlines.Format())
}

// FormatNames lists them by the names under which they are asked for.
func FormatNames() []string {
	var names []string
	for _, f := range formats() {
		names = append(names, f.Name)
	}
	return names
}
