package serve

import (
	"io"
	"log/slog"
)

// NewLog returns a logger that writes one JSON object a line, with the names of the contract: time (RFC 3339, UTC), level, message.
func NewLog(w io.Writer) *slog.Logger {
	return slog.New(slog.NewJSONHandler(w, &slog.HandlerOptions{
		ReplaceAttr: func(groups []string, a slog.Attr) slog.Attr {
			if len(groups) > 0 {
				return a
			}
			switch a.Key {
			case slog.TimeKey:
				if a.Value.Kind() == slog.KindTime {
					return slog.Time(slog.TimeKey, a.Value.Time().UTC())
				}
			case slog.MessageKey:
				a.Key = "message"
			}
			return a
		},
	}))
}
