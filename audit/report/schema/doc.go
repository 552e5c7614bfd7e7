// Package schema holds the JSON Schemas (draft 2020-12) of the reports. A layout
// that changes what a reader may rely on gets a new number and a new file.
package schema

import _ "embed"

// Compare is the schema of fettle.compare/1.
//
//go:embed compare-1.json
var Compare []byte

// Audit is the schema of fettle.audit/1.
//
//go:embed audit-1.json
var Audit []byte
