package register_test

import (
	"path/filepath"
	"strings"
	"testing"

	"leat/cmd/internal/register"
)

// The end of a run says of the assets that it computed what became of them, and what is to be doubted: a width in mm is impossible nowhere and wrong all the same.
func TestSummaryTellsVerdictsAndWarnings(t *testing.T) {
	const mapping = `operation: appraisal
source: {format: csv, path: drains.csv, key: asset}
target: {format: csv, path: verdicts.csv, overwrite: true}
columns:
  section_kind: {constant: rectangular}
  section_bottom_width: width
  section_bank_height: bank
  roughness_manning: 0.02
  bed_slope: 0.002
flows: {design: 1}
criteria: {least_freeboard: 0.2}
`
	path := folder(t, map[string]string{"m.yaml": mapping, "drains.csv": "asset,width,bank\na,1.2,2\nb,1.2,0.5\nc,1.2,\nd,1200,2\ne,-1,2\n"})
	outcome, out, stderr := command(t, "run", filepath.Join(path, "m.yaml"))
	if outcome != register.Problems {
		t.Fatalf("%v %s %s", outcome, out, stderr)
	}
	for _, want := range []string{
		"verdicts of the assets computed: 2 meets, 1 falls_short, 1 undetermined\n", "assets computed with warnings: 1 overtopped, 1 undetermined, 1 unusual_value\n",
	} {
		if !strings.Contains(out, want) {
			t.Errorf("%q is not said in\n%s", want, out)
		}
	}
}
