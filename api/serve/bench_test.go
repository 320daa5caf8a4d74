package serve

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"net"
	"strconv"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

// Requests of different regimes, so that no run measures one branch only.
var benchBodies = []string{
	`{"section":{"kind":"trapezoidal","bottom_width":1.2,"side_slope":1.5,"bank_height":1.5},"roughness":{"manning":0.022},"bed_slope":0.002,"discharge":2.4}`,
	`{"section":{"kind":"circular","diameter":0.9},"roughness":{"manning":0.013},"bed_slope":0.004,"discharge":0.7}`,
	`{"section":{"kind":"rectangular","bottom_width":2,"bank_height":1.2},"roughness":{"manning":0.015},"bed_slope":0.012,"discharge":3.1}`,
	`{"section":{"kind":"triangular","side_slope":2,"bank_height":0.8},"roughness":{"strickler":45},"bed_slope":0.006,"discharge":0.35}`,
}

// withoutComputing is depths with the same codec and a ready answer of the same shape: what of a request's time is not hydraulics.
func withoutComputing() *operation.Operation {
	state := wire.State{
		Members: wire.WithConveyance | wire.WithUniform | wire.WithFlow | wire.WithFriction,
		Depth:   0.8067163276770255, Area: 1.9442464432234896, WettedPerimeter: 4.108657084193525, HydraulicRadius: 0.47320727999015266,
		TopWidth: 3.6201489830310765, HydraulicDepth: 0.5370625497284401, CentroidDepth: 0.33585078640767385, Conveyance: 53.66563145999494,
		UniformDischarge: 2.3999999999999995, Velocity: 1.2344114134116082, VelocityHead: 0.07769072708625496, FroudeNumber: 0.537882717560183,
		SpecificEnergy: 0.8844054413290117, SpecificForce: 0.9550752305900281, Regime: wire.Subcritical,
		FrictionSlope: 0.0020000000000000005, BedShearStress: 9.281156344630864, StreamPower: 11.456765321469899,
	}
	ready := wire.DepthsAnswer{
		NormalDepth: 0.8067163276770255, CriticalDepth: 0.5796561120315022, Normal: []wire.State{state}, Critical: []wire.State{state},
		NormalVelocity: 1.2344114134116082, NormalFroudeNumber: 0.537882717560183, NormalBedShearStress: 9.281156344630864,
		Fill: 0.537810885118017, SlopeClass: "mild", CriticalSlope: 0.00743712810367259,
		Capacity:  wire.Capacity{Known: true, Discharge: 8.937482977871584, Depth: 1.5, FullDischarge: math.NaN(), Ratio: 0.2685319799704444},
		Freeboard: 0.6932836723229745,
	}
	limits := wire.DefaultLimits()
	return &operation.Operation{Name: "depths", Solve: func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		var request wire.DepthsRequest
		if problem := wire.Decode(body, options.Units, &limits, &request); problem != nil {
			return operation.Solved{}, problem
		}
		return operation.Solved{Answer: &ready, Units: options.Units}, nil
	}}
}

// BenchmarkDepths posts `depths` over kept connections of the loopback, as many at once as there are processors; client and server share them.
func BenchmarkDepths(b *testing.B) {
	for _, row := range []struct {
		name string
		op   *operation.Operation
	}{{"whole", &operation.Depths}, {"without computing", withoutComputing()}} {
		b.Run(row.name, func(b *testing.B) {
			config := Default()
			config.Listen, config.SpoolDir = "127.0.0.1:0", b.TempDir()
			server, err := New(config, []*operation.Operation{row.op}, testSurroundings(io.Discard))
			if err != nil {
				b.Fatal(err)
			}
			address, err := server.Start()
			if err != nil {
				b.Fatal(err)
			}
			b.Cleanup(func() { server.Stop() })
			b.ReportAllocs()
			b.RunParallel(func(pb *testing.PB) {
				c, err := net.Dial("tcp", address.String())
				if err != nil {
					b.Error(err)
					return
				}
				defer c.Close()
				in := bufio.NewReader(c)
				var requests [][]byte
				for _, body := range benchBodies {
					requests = append(requests, fmt.Appendf(nil, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: %d\r\n\r\n%s", len(body), body))
				}
				for i := 0; pb.Next(); i++ {
					c.Write(requests[i%len(requests)])
					if err := readAnswer(in); err != nil {
						b.Error(err)
						return
					}
				}
			})
			b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "requests/s")
		})
	}
}

// readAnswer reads a 200 with a Content-Length, with less work than net/http's client would do.
func readAnswer(in *bufio.Reader) error {
	length := 0
	for first := true; ; first = false {
		line, err := in.ReadSlice('\n')
		if err != nil {
			return err
		}
		if first && !strings.HasPrefix(string(line), "HTTP/1.1 200 ") {
			return fmt.Errorf("%s", line)
		}
		if rest, found := strings.CutPrefix(string(line), "Content-Length: "); found {
			if length, err = strconv.Atoi(strings.TrimSpace(rest)); err != nil {
				return err
			}
		}
		if len(line) == 2 {
			_, err := in.Discard(length)
			return err
		}
	}
}
