// Package configs carries the example site files, each of an invented plant, and
// the JSON Schema by which an editor completes and checks a site file.
//
// The schema (draft 2020-12) tells which keys there are and what kind of value
// each takes. The reader, package agent/site, knows more: units, fluids, ranges
// and which tags are declared. What the schema refuses the reader refuses too.
package configs

import "embed"

// Files are the example site files.
//
//go:embed *.yaml
var Files embed.FS

// DemoName is the file of the plant that the demo plays, among [Files].
const DemoName = "brackwater-creamery.yaml"

// Demo is the text of that file.
//
//go:embed brackwater-creamery.yaml
var Demo []byte

// Schema is the JSON Schema of a site file.
//
//go:embed site.schema.json
var Schema []byte

// WarningSchema is the JSON Schema of what the agent publishes of a warning.
//
//go:embed warning.schema.json
var WarningSchema []byte

// ResultSchema is the JSON Schema of what the agent publishes of a load.
//
//go:embed result.schema.json
var ResultSchema []byte
