package format

import (
	"encoding/hex"
	"strconv"

	"leat/api/stream"
)

// lineWriter writes one answer a line, and at the end one that says how the run ended:
//
//	{"end":true,"lines":…,"problems":…,"sha256":"…"}
//	{"end":false,"reason":"…","resume_at":…,"lines":…,"problems":…,"sha256":"…"}
type lineWriter struct{}

func (lineWriter) Begin(dst []byte) []byte { return dst }

func (lineWriter) Answer(dst, answer []byte) []byte { return append(append(dst, answer...), '\n') }

func (lineWriter) Flush(dst []byte) []byte { return dst }

func (lineWriter) End(dst []byte, s stream.Summary) []byte {
	if s.Complete {
		dst = append(dst, `{"end":true`...)
	} else {
		dst = append(dst, `{"end":false,"reason":"`...)
		dst = append(dst, s.Reason...)
		dst = append(dst, `","resume_at":`...)
		dst = strconv.AppendInt(dst, s.ResumeAt, 10)
	}
	dst = append(dst, `,"lines":`...)
	dst = strconv.AppendInt(dst, s.Lines, 10)
	dst = append(dst, `,"problems":`...)
	dst = strconv.AppendInt(dst, s.Problems, 10)
	dst = append(dst, `,"sha256":"`...)
	dst = hex.AppendEncode(dst, s.SHA256[:])
	return append(dst, "\"}\n"...)
}
