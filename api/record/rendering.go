package record

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"html/template"
	"sync"

	"leat/api/format"
	"leat/api/operation"
	"leat/api/picture"
	"leat/api/wire"
	"leat/compute"
)

// Media is the media type of records.
const Media = "text/html"

//go:embed record.html
var source string

//go:embed record.css
var style string

// page is parsed when the first record is asked for.
var page = sync.OnceValues(func() (*template.Template, error) { return template.New("record").Parse(source) })

// Policy is the Content-Security-Policy under which records are shown: their own style and nothing else.
func Policy() string {
	sum := sha256.Sum256([]byte(style))
	return "default-src 'none'; style-src 'sha256-" + base64.StdEncoding.EncodeToString(sum[:]) + "'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
}

// Renderings returns the record of an operation's answers, of which there must be a picture.
func Renderings(op *operation.Operation) []format.Rendering {
	if len(picture.Renderings(op)) == 0 {
		return nil
	}
	return []format.Rendering{{MediaType: Media, ContentType: "text/html; charset=utf-8", Policy: Policy(),
		Append: func(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem) {
			return appendRecord(dst, op.Name, solved)
		}}}
}

// content is what the page shows.
type content struct {
	Title, Operation, Version, ID, Units, Fingerprint, Notice string

	Style       template.CSS
	Picture     template.HTML
	Inputs      []input
	Assumptions []assumption
	Methods     []method
	Results     []grid
	Worked      []worked
	More        int
	Warnings    []wire.Warning
}

// appendRecord appends the record of an answer.
func appendRecord(dst []byte, name string, solved *operation.Solved) ([]byte, *wire.Problem) {
	broken := wire.Internal("The record could not be written.")
	request, err := read(solved.Request())
	if err != nil {
		return dst, broken
	}
	answer, err := read(solved.AppendJSON(nil, true))
	if err != nil {
		return dst, broken
	}
	inSI, err := read(solved.Answer.AppendJSON(nil, wire.SI, nil))
	if err != nil {
		return dst, broken
	}
	drawing, problem := picture.AppendSVG(nil, solved)
	if problem != nil {
		return dst, problem
	}
	c := content{
		Title: "Calculation record", Operation: name, Version: compute.EngineVersion, ID: solved.ID.Text(), Units: solved.Units.String(), Fingerprint: solved.Fingerprint,
		Style: template.CSS(style), Picture: template.HTML(withoutStyle(drawing)),
		Inputs:  inputs(request, solved.Units, name == operation.Profile.Name),
		Methods: methods(name, request), Results: results(answer, solved.Units), Warnings: warningsOf(answer),
	}
	if c.ID != "" {
		c.Title += " of " + c.ID
	}
	notice, _ := answer.get("notice")
	c.Notice, _ = notice.value.(string)
	c.Assumptions = assumptions(name, answer, c.Warnings)
	var all int
	c.Worked, all = workThrough(inSI, request, solved.Units, solved.Answer)
	c.More = all - len(c.Worked)
	t, err := page()
	if err != nil {
		return dst, broken
	}
	out := bytes.NewBuffer(dst)
	if err := t.Execute(out, &c); err != nil {
		return dst, broken
	}
	return out.Bytes(), nil
}

// withoutStyle returns a drawing without its style, which is for dark paper: a record is light, and its policy lets no other style in.
func withoutStyle(svg []byte) []byte {
	before, rest, found := bytes.Cut(svg, []byte("<style>"))
	_, after, ended := bytes.Cut(rest, []byte("</style>"))
	if !found || !ended {
		return svg
	}
	return append(bytes.Clone(before), after...)
}

// warningsOf returns the warnings of an answer.
func warningsOf(answer node) []wire.Warning {
	list, _ := answer.get("warnings")
	all, _ := list.value.(items)
	out := make([]wire.Warning, len(all))
	for i, n := range all {
		for member, to := range map[string]*string{"code": &out[i].Code, "detail": &out[i].Detail, "pointer": &out[i].Pointer} {
			m, _ := n.get(member)
			*to, _ = m.value.(string)
		}
	}
	return out
}
