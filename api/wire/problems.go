package wire

import "net/http"

// A problemType is one row of the table of problems. Its title never changes.
type problemType struct {
	name, title string
	status      int
}

// The table of problems. A type's reference is /docs/problems/ and its name.
var (
	malformedJSON        = problemType{"malformed_json", "The body is not acceptable JSON", http.StatusBadRequest}
	badParameter         = problemType{"bad_parameter", "A query parameter is not accepted", http.StatusBadRequest}
	unauthorized         = problemType{"unauthorized", "A key is needed", http.StatusUnauthorized}
	notFound             = problemType{"not_found", "There is nothing at this path", http.StatusNotFound}
	methodNotAllowed     = problemType{"method_not_allowed", "The method is not accepted at this path", http.StatusMethodNotAllowed}
	notAcceptable        = problemType{"not_acceptable", "None of the accepted media types can be given", http.StatusNotAcceptable}
	requestTimeout       = problemType{"request_timeout", "The request did not arrive in time", http.StatusRequestTimeout}
	tooLarge             = problemType{"too_large", "The request is larger than a limit", http.StatusRequestEntityTooLarge}
	unsupportedMediaType = problemType{"unsupported_media_type", "The media type of the body is not accepted", http.StatusUnsupportedMediaType}
	invalidRequest       = problemType{"invalid_request", "The request breaks a rule", http.StatusUnprocessableEntity}
	noSolution           = problemType{"no_solution", "The request has no solution", http.StatusUnprocessableEntity}
	tooManyRequests      = problemType{"too_many_requests", "Too many requests", http.StatusTooManyRequests}
	internalError        = problemType{"internal_error", "The service failed", http.StatusInternalServerError}
	nonFiniteResult      = problemType{"non_finite_result", "A result is not a finite number", http.StatusInternalServerError}
	saturated            = problemType{"saturated", "The service is busy", http.StatusServiceUnavailable}
	draining             = problemType{"draining", "The service is shutting down", http.StatusServiceUnavailable}
	timeLimit            = problemType{"time_limit", "The calculation took too long", http.StatusGatewayTimeout}
)

func (t problemType) problem(detail string, faults ...Fault) *Problem {
	return &Problem{Type: "/docs/problems/" + t.name, Title: t.title, Status: t.status, Detail: detail, Errors: faults}
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

// TimeLimit is 504.
func TimeLimit(detail string) *Problem { return timeLimit.problem(detail) }

// limited keeps the first MaxFaults.
func limited(faults []Fault) []Fault {
	if len(faults) > MaxFaults {
		return faults[:MaxFaults]
	}
	return faults
}
