package site

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"

	"leat/api/wire"
)

//go:embed problems.html
var problemsText string

// advice is what there is to say of one type of problem: whence it comes, and what to do.
type advice struct{ Cause, Cure string }

// advices tell of every type of package wire's table, by its name.
var advices = map[string]advice{
	"malformed_json": {
		"The body could not be read as one JSON value: a comma or a bracket is missing or too many, a member stands twice in one object, a text is not UTF-8, a number is NaN, infinite, too long or out of range, or something follows after the end. In bulk this is said of one line.",
		"Go to the line, column and byte that the detail names. Better than to mend the text is to have it written by a JSON library; such libraries write NaN and Infinity unless told not to, so leave unknown numbers out or give null.",
	},
	"malformed_csv": {
		"The body could not be read as comma-separated values (RFC 4180): there is no header line, another sign than the comma separates the columns, a quotation mark is never closed, or the text is not UTF-8.",
		"Save the table anew with commas between columns, points before decimals and UTF-8 as its encoding; spreadsheets and GIS programs ask for these when they export. Have programs write CSV by a library, which sets quotation marks where they are needed.",
	},
	"bad_parameter": {
		"The address bears a query parameter that this operation does not have, one that stands twice, or one with a value that is not accepted.",
		"Look at the parameter that errors names; its detail lists what is accepted. What describes the asset belongs in the body, not in the address.",
	},
	"unauthorized": {
		"The operator of this service gives answers to holders of a key only, and the request bore none, or one that is not known.",
		"Send the header Authorization: Bearer and your key. Ask the operator for one if you have none.",
	},
	"not_found": {
		"There is no such path here: it is misspelt, it ends in a slash too many, or this version of the service does not have it yet.",
		"The page at / and the contract at /openapi.yaml list all paths; GET /version says what runs here.",
	},
	"method_not_allowed": {
		"The path is right and the method is not: calculations are asked for with POST, documents with GET.",
		"Send the request with a method that the header Allow of the answer names. Some clients turn POST into GET when they follow a redirection: ask at the final address.",
	},
	"not_acceptable": {
		"The header Accept names only media types in which this answer cannot be given. Some forms need more in the request: places on a map need its geometry.",
		"Leave Accept out, or name one of the types that the detail lists.",
	},
	"request_timeout": {
		"The body began but did not arrive in time, or the sender went away.",
		"Send the request again, without pauses inside the body. Where bodies are made while they are sent, make them first, or send them as a bulk stream, which may take as long as it likes while it moves.",
	},
	"too_large": {
		"The body, a list in it or what it asks for is larger than a limit of this service. The fault names the limit.",
		"GET /v1/limits shows the limits in force. Send less at once: a register goes through the bulk routes, where a limit holds for each record and the stream has none; a survey can be thinned where its points lie on a line. An operator can raise the limits.",
	},
	"unsupported_media_type": {
		"The header Content-Type is absent or names another type than this path reads, or the body is compressed or in another character set than UTF-8.",
		"Send the type that the detail names: application/json for one request, application/x-ndjson for bulk. Some programs send the type of a web form unless told otherwise.",
	},
	"invalid_request": {
		"The body is sound JSON but breaks rules of the contract: a member is missing, unknown or of the wrong type, a number is outside its bounds, or the members do not make a section, a friction law or a run together.",
		"Each entry of errors has the pointer of the member and says what would be accepted. All faults that can be told at once are told at once, so that one round of mending is often enough. The contract at /openapi.yaml describes every member.",
	},
	"no_solution": {
		"The request is sound, and the physics has no answer to it: a rating that does not cover the discharge, a control by normal depth on a bed that does not fall, supercritical flow that comes to critical depth where nothing meets it.",
		"The detail says which physical reason holds, and the pointer which member to look at. Give another boundary, section or discharge; or take it for a finding about the site.",
	},
	"too_many_requests": {
		"This key, or this address where there are no keys, has sent more requests in a while than the operator allows it.",
		"Wait for the seconds that the header Retry-After names, and send fewer at a time; a bulk stream counts as one request.",
	},
	"internal_error": {
		"The service failed, or a solver did not reach the precision that it promises and gave nothing rather than a guess. The fault is ours and not the request's.",
		"Send the request again once. If it fails again, tell the operator the request id (the header Request-Id, also in instance): the log holds the fault under it. In bulk, other records are not affected.",
	},
	"non_finite_result": {
		"A number of the answer came out infinite or as no number at all. Bounds on requests should make that impossible, so the fault is ours.",
		"Tell the operator the request id, and the request if you may. Until it is mended, look for a value in the request that is far from any real one.",
	},
	"saturated": {
		"As many requests as the service takes at once are being read or solved at this moment.",
		"Wait for the seconds that the header Retry-After names, then send the same request again: every POST may be repeated. If it happens often, send fewer at once, use the bulk routes, or run more replicas.",
	},
	"draining": {
		"This replica is about to stop, for an upgrade as a rule, and takes no new work of this kind.",
		"Send the same request again after the seconds that the header Retry-After names; another replica will take it. A bulk stream that ends early says with resume_at from which line to go on.",
	},
	"not_ready": {
		"The probe at /readyz says not to send requests here: the replica is about to stop, or its calculation with a known answer came out wrong.",
		"An orchestrator waits, or sends requests elsewhere, by itself. If a replica stays unready, its log says why.",
	},
	"time_limit": {
		"The calculation took longer than time_limit_seconds of GET /v1/limits and was ended.",
		"Ask for less at once: fewer stations or depths, a coarser report, a run in parts from one control to the next. An operator can raise the limit.",
	},
}

// A problemPage is what one page shows.
type problemPage struct {
	wire.ProblemType
	advice
}

// Problems returns the page that lists all types of problem, and the page of each by its name. They may be shown under the
// ContentSecurityPolicy of Page, whose style they have.
func Problems() (list []byte, each map[string][]byte, err error) {
	t, err := template.New("problems").Parse(problemsText)
	if err != nil {
		return nil, nil, err
	}
	show := func(one *problemPage, all []wire.ProblemType) ([]byte, error) {
		var b bytes.Buffer
		err := t.Execute(&b, map[string]any{"Style": template.CSS(style(page)), "One": one, "All": all})
		return b.Bytes(), err
	}
	all := wire.ProblemTypes()
	each = make(map[string][]byte, len(all))
	for _, kind := range all {
		told, known := advices[kind.Name]
		if !known {
			return nil, nil, fmt.Errorf("site: nothing is told of the problem %s", kind.Name)
		}
		if each[kind.Name], err = show(&problemPage{kind, told}, nil); err != nil {
			return nil, nil, err
		}
	}
	list, err = show(nil, all)
	return list, each, err
}
