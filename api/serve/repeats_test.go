package serve_test

import (
	"bytes"
	"strings"
	"sync"
	"testing"

	"leat/api/serve"
)

// TestAThousandRepeats sends the same requests a thousand times from several goroutines at once, among each other, so that memory of one solve that came into another's answer
// would show: one request, one text. In bulk each line has the same result.
func TestAThousandRepeats(t *testing.T) {
	const repeats, senders = 1000, 4
	s := startService(t)
	s.http.Transport = s.http.Transport.(*serve.ContractTransport).Next // the contract is judged elsewhere, and takes longer than the answers
	const section = `"section":{"kind":"two_stage","bottom_width":1,"side_slope":1.5,"bench_height":0.8,"bench_width":2,"upper_side_slope":2,"bank_height":2},"roughness":{"manning":0.03},"bed_slope":0.002`
	requests := []struct{ operation, body string }{
		{"depths", `{` + section + `,"discharge":3,"depth":0.5}`},
		{"section", `{"units":"us","section":{"kind":"egg","height":3},"roughness":{"sand_roughness":0.005},"bed_slope":0.01,"discharge":4,"depths":[0.2,1,2.5]}`},
		{"rating", `{` + section + `,"kind":"uniform","from_depth":0.1,"to_depth":1.9,"count":7}`},
		{"appraisal", `{` + section + `,"flows":{"ten_year":2,"hundred_year":9},"criteria":{"least_freeboard":0.2,"greatest_velocity":1.5}}`},
		{"profile", `{"discharge":3,"reaches":[{"length":200,` + section + `},{"length":100,` + strings.Replace(section, "0.002", "0.03", 1) + `}],"downstream":{"depth":1.4}}`},
	}
	first := make([][]byte, len(requests))
	for i, r := range requests {
		var status int
		if status, first[i] = s.post("/v1/"+r.operation, jsonMedia, []byte(r.body)); status != 200 {
			t.Fatalf("%s: %d %s", r.operation, status, first[i])
		}
	}
	var all sync.WaitGroup
	for sender := range senders {
		all.Go(func() {
			for n := sender; n < repeats; n += senders {
				for i := range requests {
					r := requests[(i+sender)%len(requests)]
					if status, answer := s.post("/v1/"+r.operation, jsonMedia, []byte(r.body)); status != 200 || !bytes.Equal(answer, first[(i+sender)%len(requests)]) {
						t.Errorf("%s, repeat %d: %d\n%s\nafter\n%s", r.operation, n, status, answer, first[(i+sender)%len(requests)])
						return
					}
				}
			}
		})
	}
	all.Wait()
	for i, r := range requests {
		target := "/v1/bulk/" + r.operation + "?fingerprint=true"
		status, text := s.post(target, ndjsonMedia, []byte(strings.Repeat(r.body+"\n", repeats)))
		lines := bytes.Split(text, []byte("\n"))
		if status != 200 || len(lines) != repeats+2 {
			t.Fatalf("%s: %d with %d lines", target, status, len(lines))
		}
		for n, line := range lines[:repeats] {
			_, result, _ := bytes.Cut(line, []byte(`"result":`))
			if !bytes.Equal(bytes.TrimSuffix(result, []byte("}")), first[i]) {
				t.Fatalf("%s, line %d: %s\nafter\n%s", target, n+1, line, first[i])
			}
		}
	}
}
