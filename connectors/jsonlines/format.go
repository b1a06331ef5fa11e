package jsonlines

import "labelweir/connectors/table"

const formatName = "jsonlines"

// Format describes the format. Nothing at a file's beginning tells it, so it goes by the name.
func Format() table.Format {
	return table.Format{Name: formatName, Title: "JSON lines", Endings: []string{".jsonl", ".ndjson", ".json"}, Pipe: true, Rows: true, Open: open, Create: create}
}

// manner is how a file is written beyond its lines.
type manner struct {
	mark string // the byte order mark before the first line, if there is one
}
