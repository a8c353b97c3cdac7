package report

import _ "embed"

//go:embed result.schema.json
var schema []byte

// Schema returns the JSON schema (draft 2020-12) of a stored result. It is made
// from the type calib.Result and its comments by the test of this package, and
// stands in docs/result.schema.json too.
func Schema() []byte { return append([]byte(nil), schema...) }
