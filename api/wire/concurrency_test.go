package wire

import (
	"fmt"
	"strings"
	"sync"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// TestDecodeConcurrently holds that calls at the same time do not see each other's requests.
func TestDecodeConcurrently(t *testing.T) {
	limits := DefaultLimits()
	var group sync.WaitGroup
	for worker := range 4 {
		group.Go(func() {
			for i := range 300 {
				width := float64(worker*1000 + i + 1)
				body := strings.Replace(trapezoidDepths, "2.5", fmt.Sprint(width), 1)
				if i%7 == 0 {
					body = strings.Replace(body, "discharge", "discarge", 1)
				}
				var r DepthsRequest
				p := Decode([]byte(body), SI, &limits, &r)
				switch {
				case i%7 == 0:
					if got := places(p); got != "/discarge unknown_member\n/discharge missing_member\n" {
						t.Errorf("%q", got)
					}
				case p != nil:
					t.Error(p)
				case r.Section.BottomWidth.Value != width:
					t.Error(cmp.Diff(width, r.Section.BottomWidth.Value))
				}
			}
		})
	}
	group.Wait()
}
