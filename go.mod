module labelweir

go 1.26

require (
	github.com/apache/arrow/go/v16 v16.1.0
	github.com/goccy/go-yaml v1.19.2
	github.com/rogpeppe/go-internal v1.16.0
	gonum.org/v1/gonum v0.17.0
	pgregory.net/rapid v1.3.0
)

tool honnef.co/go/tools/cmd/staticcheck

require honnef.co/go/tools v0.8.2 // indirect
