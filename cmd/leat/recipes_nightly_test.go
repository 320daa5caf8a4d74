package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/goccy/go-yaml"
	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
)

// binary writes a program that behaves as leat, for recipes that start it by its path.
func binary(t *testing.T, folder string) string {
	t.Helper()
	self, err := filepath.Abs(os.Args[0])
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(folder, "leat")
	if err := os.WriteFile(path, []byte("#!/bin/sh\n"+asCommand+"=1 exec "+self+" \"$@\"\n"), 0o700); err != nil {
		t.Fatal(err)
	}
	return path
}

// verdicts are how many assets of each class have which verdict, and how many problems there are.
func verdicts(t *testing.T, mapping string) string {
	t.Helper()
	f, err := geopackage.Open(t.Context(), filepath.Join(filepath.Dir(mapping), "ostermere.gpkg"), geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var out strings.Builder
	err = f.Rows("SELECT class || ' ' || verdict || ' ' || count(*) FROM leat_results GROUP BY class, verdict UNION ALL SELECT 'problems ' || count(*) FROM leat_results_problems", func(s *sqlite.Stmt) error {
		out.WriteString(s.ColumnText(0) + "\n")
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return out.String()
}

// The line of the crontab, as cron reads it: settings above, then five times, the user and the command.
func TestRecipeForCron(t *testing.T) {
	geopackagetest.Program(t, "flock", "util-linux")
	content, err := os.ReadFile(filepath.Join(recipes, "nightly.cron"))
	if err != nil {
		t.Fatal(err)
	}
	mapping := makeRegister(t, 1)
	folder := filepath.Dir(mapping)
	here := map[string]string{"LEAT": binary(t, folder), "MAPPING": mapping, "LOCK": filepath.Join(folder, "lock"), "LOG": filepath.Join(folder, "log"), "PGPASSFILE": ""}
	var environment []string
	command := ""
	for _, line := range strings.Split(string(content), "\n") {
		if line == "" || strings.HasPrefix(line, "#") {
			continue
		}
		if name, _, setting := strings.Cut(line, "="); setting && !strings.Contains(name, " ") {
			value, known := here[name]
			if !known {
				t.Fatalf("the crontab sets %s, which this test does not know", name)
			}
			environment = append(environment, name+"="+value)
			continue
		}
		fields := strings.SplitN(line, " ", 7)
		if len(fields) != 7 || fields[5] != "leat" {
			t.Fatalf("the crontab's line %q is not five times, a user and a command", line)
		}
		command = fields[6]
	}
	if strings.Contains(command, "%") {
		t.Error("cron takes a % for the end of the line")
	}
	if said := do(t, folder, environment, "sh", "-c", command); said != "" {
		t.Errorf("a night in which all went well sends a mail: %s", said)
	}
	golden(t, "verdicts.txt", []byte(verdicts(t, mapping)))

	do(t, folder, environment, "sh", "-c", command)
	log, err := os.ReadFile(here["LOG"])
	if err != nil || !strings.Contains(string(log), " 0 computed") || !strings.Contains(string(log), "1130 computed") {
		t.Errorf("the log of two nights is\n%s", log)
	}

	// While another run holds the lock, nothing is begun; where the run fails, its log is printed, and cron sends it.
	if said := do(t, folder, environment, "flock", here["LOCK"], "sh", "-c", command); said != "" {
		t.Errorf("beside another run: %s", said)
	}
	c := exec.CommandContext(t.Context(), "sh", "-c", command)
	c.Env = append([]string{"PATH=" + os.Getenv("PATH")}, append(environment, "MAPPING=/nowhere.yaml")...)
	if said, err := c.CombinedOutput(); err == nil || !strings.Contains(string(said), "nowhere.yaml") {
		t.Errorf("a mapping that is not there: %v\n%s", err, said)
	}
}

// The CronJob names what the binary understands: its arguments are run as they stand, but for the mapping file's place.
func TestRecipeForKubernetes(t *testing.T) {
	content, err := os.ReadFile(filepath.Join(recipes, "nightly_cronjob.yaml"))
	if err != nil {
		t.Fatal(err)
	}
	var job struct {
		APIVersion string `yaml:"apiVersion"`
		Kind       string
		Spec       struct {
			Schedule          string
			ConcurrencyPolicy string `yaml:"concurrencyPolicy"`
			JobTemplate       struct {
				Spec struct {
					BackoffLimit     int `yaml:"backoffLimit"`
					PodFailurePolicy struct {
						Rules []struct {
							Action      string
							OnExitCodes struct {
								ContainerName string `yaml:"containerName"`
								Operator      string
								Values        []int
							} `yaml:"onExitCodes"`
						}
					} `yaml:"podFailurePolicy"`
					Template struct {
						Spec struct {
							RestartPolicy string `yaml:"restartPolicy"`
							Containers    []struct {
								Name         string
								Args         []string
								VolumeMounts []struct {
									Name      string
									MountPath string `yaml:"mountPath"`
								} `yaml:"volumeMounts"`
							}
							Volumes []struct{ Name string }
						}
					}
				}
			} `yaml:"jobTemplate"`
		}
	}
	if err := yaml.Unmarshal(content, &job); err != nil {
		t.Fatal(err)
	}
	spec := job.Spec.JobTemplate.Spec
	pod := spec.Template.Spec
	if job.APIVersion != "batch/v1" || job.Kind != "CronJob" || len(strings.Fields(job.Spec.Schedule)) != 5 || job.Spec.ConcurrencyPolicy != "Forbid" || len(pod.Containers) != 1 {
		t.Fatalf("%+v", job)
	}
	// A policy on exit codes asks restartPolicy Never (Kubernetes, Job: pod failure policy).
	rules := spec.PodFailurePolicy.Rules
	if pod.RestartPolicy != "Never" || len(rules) != 1 || rules[0].Action != "FailJob" || rules[0].OnExitCodes.ContainerName != pod.Containers[0].Name || rules[0].OnExitCodes.Operator != "In" {
		t.Errorf("%+v", spec)
	}
	mount := pod.Containers[0].VolumeMounts
	if len(mount) != 1 || len(pod.Volumes) != 1 || mount[0].Name != pod.Volumes[0].Name {
		t.Errorf("volumes: %+v %+v", mount, pod.Volumes)
	}
	mapping := makeRegister(t, 1)
	arguments := pod.Containers[0].Args
	last := len(arguments) - 1
	if !strings.HasPrefix(arguments[last], mount[0].MountPath+"/") {
		t.Fatalf("the mapping file %s is not in %s", arguments[last], mount[0].MountPath)
	}
	run := func(mapping string) int {
		c := command(t, nil, append(slices.Clone(arguments[:last]), mapping)...)
		c.Run()
		return c.ProcessState.ExitCode()
	}
	if code := run(mapping); code != exitProblems || !slices.Contains(rules[0].OnExitCodes.Values, code) {
		t.Errorf("exit code %d of a run with problems, and the job ends for good with %v", code, rules[0].OnExitCodes.Values)
	}
	if code := run("/nowhere.yaml"); slices.Contains(rules[0].OnExitCodes.Values, code) != (code == exitMisused) {
		t.Errorf("exit code %d without a mapping", code)
	}
	golden(t, "verdicts.txt", []byte(verdicts(t, mapping)))
}
