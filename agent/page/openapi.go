package page

import _ "embed"

//go:embed openapi.json
var openAPI []byte

// OpenAPI describes the interface under /api/v1/, by OpenAPI 3.1.
func OpenAPI() []byte { return openAPI }
