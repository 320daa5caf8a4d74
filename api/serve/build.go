package serve

import (
	"runtime"
	"runtime/debug"

	"leat/compute"
)

// Build says what runs.
type Build struct {
	Version  string // module version or "devel"
	Revision string // commit, or "unknown"
	Modified bool   // built from a tree with changes that were not committed
}

// ReadBuild reads what the Go linker put into this binary; no stamp is needed, so none can be wrong.
func ReadBuild() Build {
	build := Build{Version: "devel", Revision: "unknown"}
	info, found := debug.ReadBuildInfo()
	if !found {
		return build
	}
	if v := info.Main.Version; v != "" && v != "(devel)" {
		build.Version = v
	}
	for _, s := range info.Settings {
		switch s.Key {
		case "vcs.revision":
			build.Revision = s.Value
		case "vcs.modified":
			build.Modified = s.Value == "true"
		}
	}
	return build
}

// versionDocument is the body of GET /version.
type versionDocument struct {
	Name          string `json:"name"`
	Version       string `json:"version"`
	Revision      string `json:"revision"`
	Modified      bool   `json:"modified"`
	EngineVersion string `json:"engine_version"`
	GoVersion     string `json:"go_version"`
}

func (b Build) document() versionDocument {
	return versionDocument{"leat", b.Version, b.Revision, b.Modified, compute.EngineVersion, runtime.Version()}
}
