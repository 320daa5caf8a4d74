package serve

// limitsDocument is the body of GET /v1/limits: the very numbers that are enforced.
type limitsDocument struct {
	BodyBytes        int64   `json:"body_bytes"`
	LineBytes        int64   `json:"line_bytes"`
	HeldBytes        int64   `json:"held_bytes"`
	ArrayItems       int     `json:"array_items"`
	Points           int     `json:"points"`
	TimeLimitSeconds float64 `json:"time_limit_seconds"`
	IdleLimitSeconds float64 `json:"idle_limit_seconds"`
	SpoolBytes       int64   `json:"spool_bytes"`
}

func (s *Server) limitsDocument() limitsDocument {
	return limitsDocument{
		BodyBytes:        s.config.BodyBytes,
		LineBytes:        s.config.LineBytes,
		HeldBytes:        s.config.HeldBytes,
		ArrayItems:       s.config.ArrayItems,
		Points:           s.config.Points,
		TimeLimitSeconds: s.config.TimeLimit.Seconds(),
		IdleLimitSeconds: s.config.IdleLimit.Seconds(),
		SpoolBytes:       s.config.SpoolBytes,
	}
}
