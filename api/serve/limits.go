package serve

import (
	"slices"

	"leat/api/operation"
)

// limitsDocument is the body of GET /v1/limits: the very numbers that are enforced.
type limitsDocument struct {
	BodyBytes        int64   `json:"body_bytes"`
	ProfileBodyBytes int64   `json:"profile_body_bytes,omitzero"`
	LineBytes        int64   `json:"line_bytes"`
	HeldBytes        int64   `json:"held_bytes"`
	ArrayItems       int     `json:"array_items"`
	Points           int     `json:"points"`
	Reaches          int     `json:"reaches,omitzero"`
	Stations         int     `json:"stations,omitzero"`
	ReportPoints     int     `json:"report_points,omitzero"`
	Flows            int     `json:"flows"`
	Work             int     `json:"work"`
	TimeLimitSeconds float64 `json:"time_limit_seconds"`
	Queue            int     `json:"queue"`
	QueueWaitSeconds float64 `json:"queue_wait_seconds"`
	Streams          int     `json:"streams"`
	Rate             float64 `json:"requests_per_second"`
	Burst            int     `json:"burst"`
	IdleLimitSeconds float64 `json:"idle_limit_seconds"`
	SpoolBytes       int64   `json:"spool_bytes"`
	Connections      int     `json:"connections"`
}

// limitsDocument leaves out the limits of operations that are not served.
func (s *Server) limitsDocument() limitsDocument {
	d := limitsDocument{
		BodyBytes:        s.config.BodyBytes,
		LineBytes:        s.config.LineBytes,
		HeldBytes:        s.config.HeldBytes,
		ArrayItems:       s.limits.ArrayItems,
		Points:           s.limits.Points,
		Flows:            s.limits.Flows,
		Work:             s.limits.Work,
		TimeLimitSeconds: s.config.TimeLimit.Seconds(),
		Queue:            s.config.Queue,
		QueueWaitSeconds: s.config.QueueWait.Seconds(),
		Streams:          s.config.Streams,
		Rate:             s.config.Rate,
		Burst:            s.config.Burst,
		IdleLimitSeconds: s.config.IdleLimit.Seconds(),
		SpoolBytes:       s.config.SpoolBytes,
		Connections:      s.config.Connections,
	}
	if slices.ContainsFunc(s.operations, func(op *operation.Operation) bool { return op.Long }) {
		d.ProfileBodyBytes = s.config.ProfileBytes
		d.Reaches = s.limits.Reaches
		d.Stations = s.limits.Stations
		d.ReportPoints = s.limits.ReportPoints
	}
	return d
}
