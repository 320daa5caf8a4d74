package picture

import (
	"leat/api/format"
	"leat/api/operation"
	"leat/api/wire"
)

// The media types of pictures.
const (
	MediaSVG = "image/svg+xml"
	MediaPNG = "image/png"
)

// Renderings returns the pictures that the answers of an operation can be had as: those of every operation whose answers are drawn here.
func Renderings(op *operation.Operation) []format.Rendering {
	switch op.Form.(type) {
	case *wire.SectionAnswer, *wire.DepthsAnswer, *wire.RatingAnswer, *wire.ProfileAnswer, *wire.AppraisalAnswer:
		return []format.Rendering{{MediaType: MediaSVG, ContentType: MediaSVG, Append: AppendSVG}, {MediaType: MediaPNG, ContentType: MediaPNG, Append: AppendPNG}}
	}
	return nil
}

// AppendSVG appends the picture of an answer as an SVG document: light or dark as its viewer prefers, with a title and a description.
func AppendSVG(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem) {
	l, problem := drawn(solved)
	if problem != nil {
		return dst, problem
	}
	return appendSVG(dst, l), nil
}

// AppendPNG appends the picture of an answer as a PNG of twice as many pixels as the SVG has units.
func AppendPNG(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem) {
	l, problem := drawn(solved)
	if problem != nil {
		return dst, problem
	}
	out, err := appendPNG(dst, l)
	if err != nil {
		return dst, wire.Internal("The picture could not be written.")
	}
	return out, nil
}

// drawn returns the display list of an answer.
func drawn(solved *operation.Solved) (*list, *wire.Problem) {
	figure, problem := solved.Figure()
	if problem != nil {
		return nil, problem
	}
	switch a := solved.Answer.(type) {
	case *wire.SectionAnswer:
		return drawSection(solved, a, figure), nil
	case *wire.DepthsAnswer:
		return drawDepths(solved, a, figure), nil
	case *wire.RatingAnswer:
		return drawRating(solved, a, figure), nil
	case *wire.ProfileAnswer:
		return drawProfile(solved, a, figure), nil
	case *wire.AppraisalAnswer:
		return drawAppraisal(solved, a, figure), nil
	}
	return nil, wire.Internal("There is no picture of this answer.")
}
