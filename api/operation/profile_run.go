package operation

import (
	"math"
	"reflect"
	"strconv"
	"strings"

	"leat/api/wire"
	"leat/compute/profile"
)

// A profileRun is a request for a profile in the solver's terms.
type profileRun struct {
	doubts  warnings // what is to be doubted in the request
	request *wire.ProfileRequest
	run     profile.Run
	length  float64 // of the run, m
	start   float64 // chainage that the request gives its upstream end, m
}

// newProfileRun builds all channels of a run, or tells every fault of their sections and roughnesses.
func newProfileRun(r *wire.ProfileRequest, options Options) (*profileRun, *wire.Problem) {
	limits := options.Limits
	if limits == nil {
		limits = &defaultLimits
	}
	p := &profileRun{request: r}
	p.length, p.start = r.Run()
	p.run = profile.Run{
		Discharge: r.Discharge.Value, Upstream: boundary(&r.Upstream), Downstream: boundary(&r.Downstream), Datum: r.Datum.Or(0),
		Report: profile.Report{Spacing: r.Report.Spacing.Or(0), At: r.Report.At, Most: limits.ReportPoints},
	}
	if options.Begin != nil {
		p.run.Checkpoint = options.Begin(options.Worker)
	}
	for i := len(r.Report.At) - 1; i >= 0 && r.Report.At[i] > p.length; i-- {
		r.Report.At[i] = p.length // what was rounded beyond the end
	}
	faults, err := p.stations(nil)
	if err == nil {
		faults, err = p.reaches(faults)
	}
	switch {
	case err != nil:
		return nil, p.problem(err)
	case len(faults) > 0:
		return nil, wire.InvalidRequest(faults...)
	}
	return p, nil
}

// goOn reports whether there is more to build after so many faults; the error is that of the checkpoint.
func (p *profileRun) goOn(faults int) (bool, error) {
	if p.run.Checkpoint != nil {
		if err := p.run.Checkpoint(); err != nil {
			return false, err
		}
	}
	return faults < wire.MaxFaults, nil
}

// reaches builds the chain of reaches, and adds the faults of their members.
func (p *profileRun) reaches(faults []wire.Fault) ([]wire.Fault, error) {
	for i := range p.request.Reaches {
		if more, err := p.goOn(len(faults)); !more {
			return faults, err
		}
		r := &p.request.Reaches[i]
		reach := profile.Reach{
			Length: r.Length.Value, Inflow: r.Inflow.Or(0), Lateral: r.LateralInflow.Or(0), Drop: r.Drop.Or(0), Loss: r.LossCoefficient.Or(0),
			Entry: r.EntryLossCoefficient.Or(0),
		}
		in := inputs{&p.request.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
		reach.Channel, faults = in.build("/reaches/"+strconv.Itoa(i), faults)
		p.doubts.doubt("/reaches/"+strconv.Itoa(i), &in)
		p.run.Reaches = append(p.run.Reaches, reach)
	}
	return faults, nil
}

// stations builds the surveyed stations, and adds the faults of their members. Stations that say the same share one section and one
// law, by which the solver knows them.
func (p *profileRun) stations(faults []wire.Fault) ([]wire.Fault, error) {
	for i := range p.request.Stations {
		if more, err := p.goOn(len(faults)); !more {
			return faults, err
		}
		r := &p.request.Stations[i]
		station := profile.Station{Chainage: r.Chainage.Value - p.start, BedLevel: bedLevel(r)}
		in := inputs{&p.request.Common, r.Barrels, &r.Section, &r.Roughness, wire.Number{}}
		station.Channel, faults = in.build("/stations/"+strconv.Itoa(i), faults)
		p.doubts.doubt("/stations/"+strconv.Itoa(i), &in)
		if i > 0 {
			above, before := &p.request.Stations[i-1], &p.run.Stations[i-1].Channel
			if reflect.DeepEqual(&above.Section, &r.Section) {
				station.Channel.Section = before.Section
				if reflect.DeepEqual(&above.Roughness, &r.Roughness) {
					station.Channel.Law = before.Law
				}
			}
			if above := &p.run.Stations[i-1]; !(math.Abs(station.BedLevel-above.BedLevel) < station.Chainage-above.Chainage) {
				faults = append(faults, wire.Fault{Pointer: "/stations/" + strconv.Itoa(i) + "/chainage", Code: "bed_too_steep",
					Detail: "The bed falls or rises by as much as its own length from the station before; chainages are measured along the bed."})
			}
		}
		p.run.Stations = append(p.run.Stations, station)
	}
	return faults, nil
}

// bedLevel returns the level of a station's bed: as given, or that of the lowest of its surveyed points.
func bedLevel(r *wire.Station) float64 {
	if r.Section.Kind != wire.Surveyed || len(r.Section.Points) == 0 {
		return r.BedLevel.Value
	}
	lowest := r.Section.Points[0][1]
	for _, point := range r.Section.Points {
		lowest = min(lowest, point[1])
	}
	return lowest
}

// contraction is the contraction coefficient of a gate's jet where the request gives none.
const contraction = 0.61

// boundary returns what is known at an end in the solver's terms.
func boundary(b *wire.Boundary) profile.Boundary {
	switch b.Form {
	case "depth":
		return profile.Boundary{Kind: profile.Depth, Value: b.Depth.Value}
	case "level":
		return profile.Boundary{Kind: profile.Level, Value: b.Level.Value}
	case "control":
		return profile.Boundary{Kind: controlKinds[b.Control]}
	case "gate":
		return profile.Boundary{Kind: profile.Gate, Opening: b.Gate.Opening.Value, Contraction: b.Gate.ContractionCoefficient.Or(contraction)}
	case "weir":
		return profile.Boundary{
			Kind: weirKinds[b.Weir.Kind], CrestHeight: b.Weir.CrestHeight.Value, CrestWidth: b.Weir.CrestWidth.Value,
			Coefficient: b.Weir.DischargeCoefficient.Or(0),
		}
	case "rating":
		return profile.Boundary{Kind: profile.Rating, Curve: b.Rating}
	}
	return profile.Boundary{Kind: profile.LeftOut}
}

var controlKinds = map[wire.BoundaryControl]profile.BoundaryKind{
	wire.ControlNormal: profile.Normal, wire.ControlCritical: profile.CriticalFlow, wire.ControlFreeOverfall: profile.FreeOverfall,
}

var weirKinds = map[wire.WeirKind]profile.BoundaryKind{wire.SharpCrested: profile.SharpCrested, wire.BroadCrested: profile.BroadCrested}

// memberNames are the members of the request for what the solver calls otherwise.
var memberNames = map[string]string{
	"loss": "loss_coefficient", "entry": "entry_loss_coefficient", "lateral": "lateral_inflow", "slope": "bed_slope", "contraction": "contraction_coefficient",
	"coefficient": "discharge_coefficient", "curve": "rating",
}

// pointer returns the JSON Pointer of the request's member that the solver means by a path. Where the request has it inside a
// boundary's form, it is there.
func (p *profileRun) pointer(path string) string {
	if path == "" {
		return ""
	}
	parts := strings.Split(path, "/")
	for i, part := range parts {
		if name, other := memberNames[part]; other {
			parts[i] = name
		}
	}
	b := &p.request.Downstream
	switch parts[0] {
	case "upstream":
		b = &p.request.Upstream
	case "downstream":
	default:
		return "/" + strings.Join(parts, "/")
	}
	switch {
	case len(parts) == 1 && b.Form != "", len(parts) > 1 && parts[1] == "value":
		parts = append(parts[:1], b.Form)
	case len(parts) > 1 && parts[1] != b.Form && (b.Form == "gate" || b.Form == "weir"):
		parts = append([]string{parts[0], b.Form}, parts[1:]...)
	}
	return "/" + strings.Join(parts, "/")
}
