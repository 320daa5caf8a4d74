package check

import (
	"context"
	"slices"
	"testing"

	"github.com/compose-spec/compose-go/v2/loader"
	"github.com/compose-spec/compose-go/v2/types"
)

// TestCompose reads the compose file with the specification's own loader, which knows its schema.
func TestCompose(t *testing.T) {
	project, err := loader.LoadWithContext(context.Background(), types.ConfigDetails{
		WorkingDir: "..", ConfigFiles: []types.ConfigFile{{Filename: "../compose.yaml"}},
	})
	if err != nil {
		t.Fatal(err)
	}
	service := project.Services["leat"]
	if !service.ReadOnly || service.User != "65532:65532" || !slices.Contains(service.CapDrop, "ALL") || !slices.Contains(service.SecurityOpt, "no-new-privileges:true") || service.MemLimit == 0 {
		t.Errorf("the service may do more than it needs: %+v", service)
	}
	for _, port := range service.Ports {
		if port.HostIP != "127.0.0.1" {
			t.Errorf("port %d is open to others, and the service to everybody", port.Target)
		}
	}
	if len(service.Volumes) != 1 || service.Volumes[0].Target != *service.Environment["LEAT_SPOOL_DIR"] {
		t.Error("the spool is not on a volume")
	}
}
