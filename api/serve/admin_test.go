package serve

import (
	"io"
	"net/http"
	"strings"
	"testing"
)

func TestAdminListener(t *testing.T) {
	path := writeFile(t, t.TempDir()+"/keys", line("survey", "first"))
	r := start(t, func(c *Config, _ *Surroundings) { c.AdminListen, c.KeysFile = "127.0.0.1:0", path })
	client := r.client()
	get := func(address, path string) (int, string) {
		t.Helper()
		request := newRequest(t, "GET", "http://"+address+path)
		request.Header.Set("Authorization", "Bearer first")
		response, err := client.Do(request)
		if err != nil {
			t.Fatal(err)
		}
		defer response.Body.Close()
		text, err := io.ReadAll(response.Body)
		if err != nil {
			t.Fatal(err)
		}
		return response.StatusCode, string(text)
	}
	admin := r.AdminAddress().String()
	for _, row := range []struct {
		path          string
		public, admin int
		says          string
	}{
		{"/livez", 200, 200, "alive"}, {"/readyz", 200, 200, "ready"},
		{"/metrics", 404, 200, "leat_build_info"},
		{"/debug/pprof/", 404, 200, "goroutine"}, {"/debug/pprof/goroutine?debug=1", 404, 200, "goroutine profile"}, {"/debug/pprof/heap?debug=1", 404, 200, "heap profile"},
		{"/debug/pprof/cmdline", 404, 200, ""}, {"/debug/pprof/profile?seconds=1", 404, 200, ""}, {"/debug/pprof/nothing", 404, 404, "not_found"},
		{"/version", 200, 404, ""}, {"/v1/limits", 200, 404, ""}, {"/", 200, 404, ""},
	} {
		if status, _ := get(r.address, row.path); status != row.public {
			t.Errorf("%s on the public listener: %d, want %d", row.path, status, row.public)
		}
		if status, text := get(admin, row.path); status != row.admin || !strings.Contains(text, row.says) {
			t.Errorf("%s on the admin listener: %d, want %d: %.200s", row.path, status, row.admin, text)
		}
	}
	// No key is asked for there.
	response, err := http.Get("http://" + admin + "/metrics")
	if err != nil {
		t.Fatal(err)
	}
	io.Copy(io.Discard, response.Body)
	response.Body.Close()
	http.DefaultClient.CloseIdleConnections()
	if response.StatusCode != 200 {
		t.Errorf("metrics without a key: %s", response.Status)
	}
}

func TestTakenAdminPortFailsTheStart(t *testing.T) {
	r := start(t, nil)
	config := testConfig(t)
	config.AdminListen = r.address
	second, err := New(config, nil, testSurroundings(new(logBuffer)))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := second.Start(); err == nil || !strings.Contains(err.Error(), "--admin-listen "+r.address) {
		t.Errorf("error %v", err)
	}
}
