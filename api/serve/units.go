package serve

// unitsDocument is the body of GET /v1/units.
func unitsDocument() any { return map[string]any{} }
