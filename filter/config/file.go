package config

import (
	"errors"
	"fmt"
	"strings"

	"github.com/goccy/go-yaml"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"

	"labelweir/filter"
)

// maxFileBytes bounds a configuration file; a real one has a few kilobytes.
const maxFileBytes = 1 << 20

// File takes the settings of a YAML file's text. Only plain mappings, lists and single values are read: anchors,
// aliases, tags and several documents are faults, since no setting needs them.
func (l *Loader) File(name string, text []byte) {
	l.file = name
	if len(text) > maxFileBytes {
		l.fault(FromFile, name, "", fmt.Sprintf("has %d bytes, and no settings file needs %d; is it the right file?", len(text), maxFileBytes))
		return
	}
	file, err := parse(text)
	if err != nil {
		f := &Fault{Layer: FromFile, Where: name, What: "is not YAML: " + firstLine(err.Error())}
		var syntax *yaml.SyntaxError
		if errors.As(err, &syntax) && syntax.Token != nil && syntax.Token.Position != nil {
			at := syntax.Token.Position
			f.Line, f.Column = at.Line, at.Column
			f.Where = fmt.Sprintf("%s:%d:%d", name, at.Line, at.Column)
			f.What = "is not YAML: " + firstLine(syntax.Message)
		}
		l.faults = append(l.faults, f)
		return
	}
	d := decoder{l, name}
	bodies := 0
	for _, doc := range file.Docs {
		if _, comment := doc.Body.(*ast.CommentGroupNode); doc.Body == nil || comment {
			continue
		}
		if bodies++; bodies > 1 {
			d.fault(doc.Body, "", "a second document; keep one")
			return
		}
		d.section(doc.Body, "")
	}
}

// parse fences the parser: a panic in it is a fault of the file.
func parse(text []byte) (file *ast.File, err error) {
	defer func() {
		if p := recover(); p != nil {
			file, err = nil, fmt.Errorf("%v", p)
		}
	}()
	return parser.ParseBytes(text, 0, parser.AllowDuplicateMapKey())
}

func firstLine(s string) string {
	line, _, _ := strings.Cut(strings.TrimSpace(s), "\n")
	return line
}

// decoder walks the nodes of one file.
type decoder struct {
	l    *Loader
	file string
}

func (d decoder) fault(n ast.Node, path, what string) {
	line, column := place(n)
	d.l.faults = append(d.l.faults, &Fault{
		Layer: FromFile, Where: d.where(line, column), Path: path, What: what, Line: line, Column: column,
	})
}

func (d decoder) where(line, column int) string {
	if line == 0 {
		return d.file
	}
	return fmt.Sprintf("%s:%d:%d", d.file, line, column)
}

// place is where n begins; a block mapping begins with its first key.
func place(n ast.Node) (line, column int) {
	switch m := n.(type) {
	case *ast.MappingNode:
		if !m.IsFlowStyle && len(m.Values) > 0 {
			n = m.Values[0].Key
		}
	case *ast.MappingValueNode:
		n = m.Key
	}
	if t := n.GetToken(); t != nil && t.Position != nil {
		return t.Position.Line, t.Position.Column
	}
	return 0, 0
}

// entries gives the keys and values of a mapping; nil when n is none.
func entries(n ast.Node) []*ast.MappingValueNode {
	switch n := n.(type) {
	case *ast.MappingNode:
		return n.Values
	case *ast.MappingValueNode:
		return []*ast.MappingValueNode{n}
	}
	return nil
}

// section reads the mapping at path; "" is the whole file.
func (d decoder) section(n ast.Node, path string) {
	values := entries(n)
	if values == nil {
		if m, ok := n.(*ast.MappingNode); ok && len(m.Values) == 0 {
			return // {}
		}
		what := "holds settings of its own, no single value; write key: value below it"
		if special := special(n); special != "" {
			what = special
		}
		d.fault(n, path, what)
		return
	}
	seen := make(map[string]int)
	for _, v := range values {
		key, ok := scalar(v.Key)
		if !ok {
			d.fault(v.Key, path, "a key that is no plain word; write it as a word")
			continue
		}
		below := strings.TrimPrefix(path+"."+key, ".")
		if line, ok := seen[key]; ok {
			d.fault(v.Key, below, fmt.Sprintf("stands already in line %d; keep one", line))
			continue
		}
		seen[key], _ = place(v.Key)
		d.entry(v, below)
	}
}

// entry reads one key of a section.
func (d decoder) entry(v *ast.MappingValueNode, path string) {
	var isSection bool
	for _, s := range Settings() {
		switch {
		case s.Path == path && path == "record.fields":
			d.fields(v)
			return
		case s.Path == path:
			d.value(v, path)
			return
		case strings.HasPrefix(s.Path, path+"."):
			isSection = true
		}
	}
	if isSection {
		if empty(v.Value) {
			d.fault(v.Key, path, "has nothing below it; leave it out")
			return
		}
		d.section(v.Value, path)
		return
	}
	if meant := meantBy(path); meant != "" {
		d.fault(v.Key, path, "unknown key; did you mean "+meant+"?")
		return
	}
	d.fault(v.Key, path, "unknown key; the README lists all settings")
}

// meantBy guesses the key that was meant by an unknown one: a like one of its section, or the same word elsewhere.
func meantBy(path string) string {
	at := strings.LastIndexByte(path, '.') + 1
	section, word := path[:at], path[at:]
	var siblings []string
	elsewhere := ""
	for _, s := range Settings() {
		if rest, ok := strings.CutPrefix(s.Path, section); ok {
			sibling, _, _ := strings.Cut(rest, ".")
			siblings = append(siblings, sibling)
		}
		if strings.HasSuffix(s.Path, "."+word) && elsewhere == "" {
			elsewhere = s.Path
		}
	}
	if near := filter.Nearest(word, siblings); near != "" {
		return section + near
	}
	return elsewhere
}

// value reads a single value.
func (d decoder) value(v *ast.MappingValueNode, path string) {
	if empty(v.Value) {
		d.fault(v.Key, path, "has no value; write one, or leave the key out")
		return
	}
	text, ok := scalar(v.Value)
	if !ok {
		what := "wants a single value"
		if special := special(v.Value); special != "" {
			what = special
		}
		d.fault(v.Value, path, what)
		return
	}
	line, column := place(v.Value)
	d.l.put(path, value{layer: FromFile, where: d.where(line, column), line: line, column: column, text: text})
}

// special tells what to do about the parts of YAML that are not read; empty for the others.
func special(n ast.Node) string {
	switch n.(type) {
	case *ast.AnchorNode, *ast.AliasNode:
		return "anchors and aliases are not read; write the value itself"
	case *ast.TagNode:
		return "tags are not read; write the value without one"
	}
	return ""
}

// scalar gives the text of a single value.
func scalar(n ast.Node) (string, bool) {
	switch n := n.(type) {
	case *ast.StringNode:
		return n.Value, true
	case *ast.LiteralNode:
		return n.Value.Value, true
	case *ast.IntegerNode, *ast.FloatNode, *ast.BoolNode, *ast.InfinityNode, *ast.NanNode, *ast.NullNode:
		return n.GetToken().Value, true
	}
	return "", false
}

// empty tells whether a key stands without a value.
func empty(n ast.Node) bool {
	_, null := n.(*ast.NullNode)
	return n == nil || null
}

// fields reads record.fields: a list of names, or of {path, kind, size}.
func (d decoder) fields(v *ast.MappingValueNode) {
	const path = "record.fields"
	list, ok := v.Value.(*ast.SequenceNode)
	if !ok || len(list.Values) == 0 {
		d.fault(v.Key, path, "wants a list of names, or of {path: NAME, kind: KIND}; leave it out to have them chosen")
		return
	}
	before := len(d.l.faults)
	fields := make([]filter.Field, 0, len(list.Values))
	for _, item := range list.Values {
		fields = append(fields, d.field(item))
	}
	if len(d.l.faults) == before {
		line, column := place(v.Key)
		d.l.put(path, value{layer: FromFile, where: d.where(line, column), line: line, column: column, fields: fields})
	}
}

// field reads one entry of record.fields.
func (d decoder) field(item ast.Node) (f filter.Field) {
	const at = "record.fields"
	if name, ok := scalar(item); ok && !empty(item) {
		if _, err := parseName(name); err != nil {
			d.fault(item, at, err.Error())
		}
		return filter.Field{Path: name}
	}
	seen := make(map[string]bool)
	for _, v := range entries(item) {
		key, _ := scalar(v.Key)
		text, single := scalar(v.Value)
		var err error
		switch {
		case seen[key]:
			err = errors.New("stands twice in one field; keep one")
		case key != "path" && key != "kind" && key != "size":
			err = errors.New("unknown key; a field has path, kind and size")
			if near := filter.Nearest(key, []string{"path", "kind", "size"}); near != "" {
				err = fmt.Errorf("unknown key; did you mean %s?", near)
			}
		case !single || empty(v.Value):
			err = errors.New("wants a single value")
		case key == "path":
			f.Path, err = parseName(text)
		case key == "kind":
			f.Kind, err = parseKind(text)
		case key == "size":
			f.Size, err = parseCount(1)(text)
		}
		seen[key] = true
		if err != nil {
			d.fault(v.Key, at+"."+key, err.Error())
		}
	}
	if !seen["path"] {
		d.fault(item, at, "a field without a path; write {path: NAME, kind: KIND}")
	}
	return f
}
