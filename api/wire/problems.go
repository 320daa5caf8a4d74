package wire

import (
	"net/http"
	"slices"
)

// ProblemType is one row of the table of problems: what problems of one kind have in common.
type ProblemType struct {
	Name, Title string // neither ever changes
	Status      int
}

// Reference is the type's URI reference, at which the service's own documents tell of it.
func (t ProblemType) Reference() string { return "/docs/problems/" + t.Name }

// ProblemTypes returns the table of problems, in the order of the statuses.
func ProblemTypes() []ProblemType { return slices.Clone(problemTypes) }

var problemTypes []ProblemType

func newProblemType(name, title string, status int) ProblemType {
	t := ProblemType{name, title, status}
	problemTypes = append(problemTypes, t)
	return t
}

// The table of problems.
var (
	malformedJSON        = newProblemType("malformed_json", "The body is not acceptable JSON", http.StatusBadRequest)
	malformedCSV         = newProblemType("malformed_csv", "The body is not acceptable CSV", http.StatusBadRequest)
	badParameter         = newProblemType("bad_parameter", "A query parameter is not accepted", http.StatusBadRequest)
	unauthorized         = newProblemType("unauthorized", "A key is needed", http.StatusUnauthorized)
	notFound             = newProblemType("not_found", "There is nothing at this path", http.StatusNotFound)
	methodNotAllowed     = newProblemType("method_not_allowed", "The method is not accepted at this path", http.StatusMethodNotAllowed)
	notAcceptable        = newProblemType("not_acceptable", "None of the accepted media types can be given", http.StatusNotAcceptable)
	requestTimeout       = newProblemType("request_timeout", "The request did not arrive in time", http.StatusRequestTimeout)
	tooLarge             = newProblemType("too_large", "The request is larger than a limit", http.StatusRequestEntityTooLarge)
	unsupportedMediaType = newProblemType("unsupported_media_type", "The media type of the body is not accepted", http.StatusUnsupportedMediaType)
	invalidRequest       = newProblemType("invalid_request", "The request breaks a rule", http.StatusUnprocessableEntity)
	noSolution           = newProblemType("no_solution", "The request has no solution", http.StatusUnprocessableEntity)
	tooManyRequests      = newProblemType("too_many_requests", "Too many requests", http.StatusTooManyRequests)
	internalError        = newProblemType("internal_error", "The service failed", http.StatusInternalServerError)
	nonFiniteResult      = newProblemType("non_finite_result", "A result is not a finite number", http.StatusInternalServerError)
	saturated            = newProblemType("saturated", "The service is busy", http.StatusServiceUnavailable)
	draining             = newProblemType("draining", "The service is shutting down", http.StatusServiceUnavailable)
	notReady             = newProblemType("not_ready", "The service is not ready", http.StatusServiceUnavailable)
	timeLimit            = newProblemType("time_limit", "The calculation took too long", http.StatusGatewayTimeout)
)

func (t ProblemType) problem(detail string, faults ...Fault) *Problem {
	return &Problem{Type: t.Reference(), Title: t.Title, Status: t.Status, Detail: detail, Errors: faults}
}

// InvalidRequest is 422: valid JSON that breaks rules. It names every fault.
func InvalidRequest(faults ...Fault) *Problem {
	return invalidRequest.problem(summary(faults), limited(faults)...)
}

// NoSolution is 422: a sound request to which physics has no answer. The detail says which physical reason; the pointer is that of the member to change, or empty.
func NoSolution(pointer, code, detail string) *Problem {
	return noSolution.problem(detail, Fault{Pointer: pointer, Code: code, Detail: detail})
}

// TooLarge is 413; the faults name the limit.
func TooLarge(faults ...Fault) *Problem { return tooLarge.problem(summary(faults), limited(faults)...) }

// MalformedJSON is 400: not I-JSON.
func MalformedJSON(fault Fault) *Problem { return malformedJSON.problem(fault.Detail, fault) }

// MalformedCSV is 400: CSV whose rows cannot be found.
func MalformedCSV(fault Fault) *Problem { return malformedCSV.problem(fault.Detail, fault) }

// BadParameter is 400: query parameters that are unknown or have an unknown value.
func BadParameter(faults ...Fault) *Problem {
	return badParameter.problem(summary(faults), limited(faults)...)
}

// Unauthorized is 401.
func Unauthorized(detail string) *Problem { return unauthorized.problem(detail) }

// NotFound is 404.
func NotFound(detail string) *Problem { return notFound.problem(detail) }

// MethodNotAllowed is 405.
func MethodNotAllowed(detail string) *Problem { return methodNotAllowed.problem(detail) }

// NotAcceptable is 406.
func NotAcceptable(detail string) *Problem { return notAcceptable.problem(detail) }

// RequestTimeout is 408.
func RequestTimeout(detail string) *Problem { return requestTimeout.problem(detail) }

// UnsupportedMediaType is 415.
func UnsupportedMediaType(detail string) *Problem { return unsupportedMediaType.problem(detail) }

// TooManyRequests is 429.
func TooManyRequests(detail string) *Problem { return tooManyRequests.problem(detail) }

// Internal is 500.
func Internal(detail string) *Problem { return internalError.problem(detail) }

// NonFiniteResult is 500: a result that should have been a number is none.
func NonFiniteResult(detail string) *Problem { return nonFiniteResult.problem(detail) }

// Saturated is 503: no free slot.
func Saturated(detail string) *Problem { return saturated.problem(detail) }

// Draining is 503: the service is shutting down.
func Draining(detail string) *Problem { return draining.problem(detail) }

// NotReady is 503, for probes alone.
func NotReady(detail string) *Problem { return notReady.problem(detail) }

// TimeLimit is 504.
func TimeLimit(detail string) *Problem { return timeLimit.problem(detail) }

// limited keeps the first MaxFaults.
func limited(faults []Fault) []Fault {
	if len(faults) > MaxFaults {
		return faults[:MaxFaults]
	}
	return faults
}
