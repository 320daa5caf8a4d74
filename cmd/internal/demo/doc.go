// Package demo makes the register of Ostermere: the drainage assets of an invented fen district, as the people who keep such
// registers would hand them over. Everything in it is made up: places, sizes, surveys and flows.
//
// The register is a list of requests for the `depths` operation, one JSON object a line. A fixed seed gives the same bytes on
// every run. Some twenty rows are wrong on purpose; Mistakes lists them with what a caller must be told.
//
// The appraisals are of the same assets, each under several named flows and held to the criteria of its class: requests for the `appraisal` operation.
// AppraisalMistakes lists their rows that are wrong on purpose.
//
// Beside it stand the runs of the district's main drain: requests for the `profile` operation, each with the story that its answer must tell.
package demo
