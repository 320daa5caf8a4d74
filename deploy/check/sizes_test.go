package check

import (
	"strings"
	"testing"

	"k8s.io/apimachinery/pkg/api/resource"
)

// mustBytes reads a size as leat serve spells it: GiB where Kubernetes says Gi.
func mustBytes(t *testing.T, text string) int64 {
	t.Helper()
	q, err := resource.ParseQuantity(strings.TrimSuffix(text, "B"))
	if err != nil {
		t.Fatalf("%q: %v", text, err)
	}
	return q.Value()
}
