package serve

import "testing"

func TestCORS(t *testing.T) {
	const page = "https://maps.ostermere.example"
	preflight := []string{"Access-Control-Request-Method", "POST", "Access-Control-Request-Headers", "content-type"}
	for _, row := range []struct {
		name, allow, method string
		headers             []string
		status              int
		origin, methods     string
		vary                string
	}{
		{"none allowed", "", "OPTIONS", append([]string{"Origin", page}, preflight...), 204, "", "", ""},
		{"none allowed, plain", "", "POST", []string{"Origin", page}, 200, "", "", ""},
		{"preflight", page, "OPTIONS", append([]string{"Origin", page}, preflight...), 204, page, "GET, HEAD, POST", "Origin, Access-Control-Request-Method, Access-Control-Request-Headers"},
		{"preflight of another", page, "OPTIONS", append([]string{"Origin", "https://else.example"}, preflight...), 204, "", "", "Origin, Access-Control-Request-Method, Access-Control-Request-Headers"},
		{"OPTIONS that is none", page, "OPTIONS", []string{"Origin", page}, 204, page, "", "Origin"},
		{"plain", "https://a.example," + page, "POST", []string{"Origin", page}, 200, page, "", "Origin"},
		{"plain of another", page, "POST", []string{"Origin", "https://else.example"}, 200, "", "", "Origin"},
		{"the same host over HTTP", page, "POST", []string{"Origin", "http://maps.ostermere.example"}, 200, "", "", "Origin"},
		{"a longer name", page, "POST", []string{"Origin", page + ".else.example"}, 200, "", "", "Origin"},
		{"no origin", page, "POST", nil, 200, "", "", "Origin"},
		{"null", page, "POST", []string{"Origin", "null"}, 200, "", "", "Origin"},
		{"all", "*", "POST", []string{"Origin", "null"}, 200, "*", "", ""},
		{"a problem can be read too", page, "PUT", []string{"Origin", page}, 405, page, "", "Origin"},
	} {
		t.Run(row.name, func(t *testing.T) {
			r := start(t, func(c *Config, _ *Surroundings) { c.AllowOrigin = row.allow })
			got := r.send(row.method, "/v1/depths", "{}", append(row.headers, "Content-Type", jsonHeader)...)
			h := got.header
			if got.status != row.status || h.Get("Access-Control-Allow-Origin") != row.origin || h.Get("Access-Control-Allow-Methods") != row.methods || h.Get("Vary") != row.vary {
				t.Errorf("%d %v", got.status, h)
			}
			if (row.methods != "") != (h.Get("Access-Control-Allow-Headers") != "") || h.Get("Access-Control-Allow-Credentials") != "" {
				t.Errorf("%v", h)
			}
			if row.method == "OPTIONS" && h.Get("Allow") != "OPTIONS, POST" {
				t.Errorf("Allow %q", h.Get("Allow"))
			}
		})
	}
}
