package serve

import (
	"bytes"
	"fmt"
	"io"
	"net/http"
	"net/http/httptest"
	"runtime/debug"
	"strings"
	"testing"
	"time"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/operation"
)

// An unhurried is a recorder that can do what a stream asks of a connection.
type unhurried struct{ *httptest.ResponseRecorder }

func (unhurried) EnableFullDuplex() error          { return nil }
func (unhurried) SetReadDeadline(time.Time) error  { return nil }
func (unhurried) SetWriteDeadline(time.Time) error { return nil }

// FuzzRoutes sends anything at all to the real operations. No answer may be a fault of ours, each must be whole, and what is refused must be
// refused as a problem.
func FuzzRoutes(f *testing.F) {
	config := Default()
	config.SpoolDir = f.TempDir()
	config.BodyBytes, config.LineBytes = 1<<14, 1<<12
	around := testSurroundings(io.Discard)
	server, err := New(config, operation.All(), around)
	if err != nil {
		f.Fatal(err)
	}
	for _, body := range benchBodies {
		f.Add("POST", "/v1/depths", "", "application/json", "", []byte(body))
		f.Add("POST", "/v1/bulk/depths", "detail=brief", "application/x-ndjson", "*/*", []byte(body+"\n\n"+body))
	}
	f.Add("POST", "/v1/section", "units=us", "application/json; charset=utf-8", "application/json", []byte(`{"section":{"kind":"egg","height":3},"depths":[0.5,1,3],"roughness":{"sand_roughness":0.01},"bed_slope":0.01}`))
	f.Add("POST", "/v1/rating", "units=si&detail=full", "application/json", "", []byte(`{"section":{"kind":"surveyed","points":[[0,2],[1,0],[2,1],[3,0.2],[4,2]]},"roughness":{"zones":[{"until":2,"manning":0.03},{"manning":0.05}]},"bed_slope":0.003,"kind":"uniform","from_depth":0.1,"to_depth":1.5,"count":5}`))
	f.Add("POST", "/v1/bulk/section", "", "application/x-ndjson", "", []byte("{}\nnull\n[]\r\n\xff\n{\"id\":\"a\",\"section\":{\"kind\":\"box\",\"width\":1,\"height\":1},\"depth\":1}"))
	f.Add("POST", "/v1/appraisal", "detail=brief", "application/json", "text/csv", []byte(`{"section":{"kind":"trapezoidal","bottom_width":1,"side_slope":2,"bank_height":1},"bed_slope":0.02,"flows":{"b":0.4,"a~/":0.2},"criteria":{"least_freeboard":0.2,"least_lining_safety":1,"critical_band":[0.86,1.13]},"criterion_flows":{"least_freeboard":["b"]},"lining":{"kind":"vegetation","stem_height":0.1,"condition":"good","growth_form":"sod","soil_group":"clayey_sand","plasticity_index":16,"void_ratio":0.5},"bend":{"radius":20}}`))
	f.Add("POST", "/v1/bulk/appraisal", "units=us", "application/x-ndjson", "", []byte(`{"section":{"kind":"circular","diameter":2},"roughness":{"manning":0.013},"bed_slope":0.004,"flows":{"ten_year":9},"criteria":{"greatest_fill":0.8,"freeboard_rule":"canal"}}`+"\n"+`{"section":{"kind":"parabolic","top_width":6,"height":2},"bed_slope":0.01,"flows":{"ten_year":9},"criteria":{"greatest_vedernikov_number":1},"lining":{"kind":"gravel","stone_size":0.1}}`))
	f.Add("POST", "/v1/bulk/depths", "flat=true&prefix=leat_", "application/json", "", []byte(`[{"leat_section_kind":"circular","own":1},{"leat_section":{"kind":"box"}}]`))
	f.Add("POST", "/v1/bulk/depths", "prefix=leat_", "application/geo+json", "", []byte(`{"type":"FeatureCollection","features":[{"type":"Feature","id":1,"properties":{"leat_depth":2},"geometry":null}]}`))
	f.Add("POST", "/v1/bulk/section", "units=us", "text/csv", "application/x-ndjson", []byte("id,section_kind,section_bottom_width,depth\n1,rectangular,2,\"0.5\"\n2,\n"))
	f.Add("POST", "/v1/bulk/appraisal", "flat=true", "application/x-ndjson", "text/csv", []byte(`{"flows_design":1,"criteria":{"greatest_fill":0.8}}`))
	f.Add("GET", "/", "x=1", "", "text/html;q=0.1, application/json", []byte{})
	f.Add("HEAD", "/v1/limits", "%zz", "", ",;q=2", []byte{})
	f.Add("DELETE", "/v1/depths/", "units=us&units=us;a", "text/plain", "image/*", []byte("x"))
	f.Fuzz(func(t *testing.T, method, path, query, media, accept string, body []byte) {
		request, err := http.NewRequest(method, "http://leat/", bytes.NewReader(body))
		if err != nil {
			return // no method, so no request
		}
		request.URL.Path, request.URL.RawQuery = path, query
		request.Header.Set("Content-Type", media)
		request.Header.Set("Accept", accept)
		recorder := httptest.NewRecorder()
		// A request that hangs would hang the fuzzing too, and nobody would learn which it was.
		watchdog := time.AfterFunc(10*time.Second, func() {
			debug.SetTraceback("all")
			panic(fmt.Sprintf("no answer to %q %q %q %q %q %q", method, path, query, media, accept, body))
		})
		defer watchdog.Stop()
		server.http.Handler.ServeHTTP(unhurried{recorder}, request)
		text := recorder.Body.Bytes()
		switch {
		case recorder.Code >= 500:
			t.Errorf("%d: %s", recorder.Code, text)
		case recorder.Code >= 400:
			if recorder.Header().Get("Content-Type") != "application/problem+json" || !jsontext.Value(text).IsValid() || !bytes.Contains(text, []byte(`"instance":"urn:request:`)) {
				t.Errorf("%d %v: %s", recorder.Code, recorder.Header(), text)
			}
		case strings.HasPrefix(recorder.Header().Get("Content-Type"), "application/json"), strings.HasPrefix(recorder.Header().Get("Content-Type"), "application/geo+json"):
			if !jsontext.Value(text).IsValid() {
				t.Errorf("no JSON: %s", text)
			}
		case strings.HasPrefix(recorder.Header().Get("Content-Type"), "application/x-ndjson"):
			if strings.Contains(query, "flat") { // rows, whose problems are texts
				for line := range bytes.Lines(text) {
					if !jsontext.Value(line).IsValid() {
						t.Errorf("no JSON: %s", line)
					}
				}
			} else if end := checkStream(t, text); !*end.End {
				t.Errorf("end %+v", end)
			}
			if bytes.Contains(text, []byte(`"status":5`)) {
				t.Errorf("a fault of ours: %s", text)
			}
		}
	})
}
