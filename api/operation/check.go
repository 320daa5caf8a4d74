package operation

import (
	"reflect"

	"leat/api/wire"
)

// Check decodes one request object and finds what Solve would refuse in it before it solves: rules of members, and what section and
// roughness are impossible. What only the physics of the flow can tell, Solve alone says. The problem is without Instance.
func (o *Operation) Check(body []byte, options Options) *wire.Problem {
	request := reflect.New(reflect.TypeOf(o.Request).Elem()).Interface().(wire.Request)
	if problem := wire.Decode(body, options.Units, options.limits(), request); problem != nil {
		return problem
	}
	var problem *wire.Problem
	switch r := request.(type) {
	case *wire.SectionRequest:
		_, problem = inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}.channel()
	case *wire.DepthsRequest:
		_, problem = inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}.channel()
	case *wire.RatingRequest:
		_, problem = inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}.channel()
	case *wire.AppraisalRequest:
		var w warnings
		_, _, problem = newAsset(r, &w)
	case *wire.ProfileRequest:
		_, problem = newProfileRun(r, options)
	}
	return problem
}
