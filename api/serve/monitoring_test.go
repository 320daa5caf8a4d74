package serve

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// TestMonitoringAsksForMetricsThatExist holds the alert rules and the dashboard to what /metrics has: a name that is not there alerts nobody.
func TestMonitoringAsksForMetricsThatExist(t *testing.T) {
	r := start(t, nil)
	text := string(r.send("GET", "/metrics", "").body)
	metric := regexp.MustCompile(`\b(leat|process|go)_[a-z_]+`)
	label := regexp.MustCompile(`label_values\([^)]*\)|"(leat)"`)
	for _, name := range []string{"alerts.yaml", "dashboard.json"} {
		file, err := os.ReadFile(filepath.Join("..", "..", "deploy", "monitoring", name))
		if err != nil {
			t.Fatal(err)
		}
		asked := map[string]bool{}
		for _, found := range metric.FindAllString(label.ReplaceAllString(string(file), ""), -1) {
			asked[found] = true
		}
		if len(asked) < 10 {
			t.Errorf("%s asks for %d metrics: the search finds nothing", name, len(asked))
		}
		for name := range asked {
			if !strings.Contains(text, "\n"+name+" ") && !strings.Contains(text, "\n"+name+"{") {
				t.Errorf("deploy/monitoring asks for %s, and /metrics has no such series", name)
			}
		}
	}
}
