// Package check holds the files of deploy against the types of Kubernetes, the restricted profile of its pod security standards as its own admission judges it, the
// schema of compose files, and the types of CycloneDX. It is a module of its own, so that none of these is a dependency of Leat.
package check

import (
	"bytes"
	"errors"
	"io"
	"os"
	"path/filepath"
	"testing"
	"time"

	apps "k8s.io/api/apps/v1"
	autoscaling "k8s.io/api/autoscaling/v2"
	batch "k8s.io/api/batch/v1"
	core "k8s.io/api/core/v1"
	networking "k8s.io/api/networking/v1"
	disruption "k8s.io/api/policy/v1"
	meta "k8s.io/apimachinery/pkg/apis/meta/v1"
	"k8s.io/apimachinery/pkg/labels"
	"k8s.io/apimachinery/pkg/runtime"
	"k8s.io/apimachinery/pkg/runtime/serializer"
	"k8s.io/apimachinery/pkg/util/validation"
	yamlutil "k8s.io/apimachinery/pkg/util/yaml"
	admission "k8s.io/pod-security-admission/api"
	"k8s.io/pod-security-admission/policy"
)

const (
	serviceFile = "../kubernetes/leat.yaml"
	jobFile     = "../recipes/nightly_cronjob.yaml"
)

// decode reads the objects of a file; an unknown field, one given twice and an unknown kind are errors.
func decode(document []byte) ([]runtime.Object, error) {
	scheme := runtime.NewScheme()
	for _, add := range []func(*runtime.Scheme) error{apps.AddToScheme, autoscaling.AddToScheme, batch.AddToScheme, core.AddToScheme, networking.AddToScheme, disruption.AddToScheme} {
		if err := add(scheme); err != nil {
			return nil, err
		}
	}
	decoder := serializer.NewCodecFactory(scheme, serializer.EnableStrict).UniversalDeserializer()
	reader := yamlutil.NewDocumentDecoder(io.NopCloser(bytes.NewReader(document)))
	defer reader.Close()
	var objects []runtime.Object
	buffer := make([]byte, 1<<20)
	for {
		n, err := reader.Read(buffer)
		if errors.Is(err, io.EOF) {
			return objects, nil
		}
		if err != nil {
			return nil, err
		}
		object, _, err := decoder.Decode(buffer[:n], nil, nil)
		if err != nil {
			return nil, err
		}
		objects = append(objects, object)
	}
}

func objectsOf(t *testing.T, name string) []runtime.Object {
	t.Helper()
	document, err := os.ReadFile(filepath.FromSlash(name))
	if err != nil {
		t.Fatal(err)
	}
	objects, err := decode(document)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	if len(objects) == 0 {
		t.Fatalf("%s holds nothing", name)
	}
	return objects
}

// find returns the only object of a type.
func find[T runtime.Object](t *testing.T, objects []runtime.Object) T {
	t.Helper()
	var found []T
	for _, object := range objects {
		if o, is := object.(T); is {
			found = append(found, o)
		}
	}
	if len(found) != 1 {
		t.Fatalf("%d objects of type %T, want one", len(found), *new(T))
	}
	return found[0]
}

func TestStrictness(t *testing.T) {
	for name, document := range map[string]string{
		"unknown field": "apiVersion: v1\nkind: Service\nmetadata: {name: a}\nspec: {selektor: {a: b}}\n",
		"given twice":   "apiVersion: v1\nkind: Service\nmetadata: {name: a}\nmetadata: {name: b}\n",
		"unknown kind":  "apiVersion: v1\nkind: Servant\nmetadata: {name: a}\n",
	} {
		if _, err := decode([]byte(document)); err == nil {
			t.Errorf("%s: taken", name)
		}
	}
}

func TestNames(t *testing.T) {
	for _, file := range []string{serviceFile, jobFile} {
		for _, object := range objectsOf(t, file) {
			m := object.(meta.Object)
			for _, wrong := range validation.IsDNS1123Subdomain(m.GetName()) {
				t.Errorf("%s: name %q: %s", file, m.GetName(), wrong)
			}
		}
	}
}

func templates(t *testing.T) map[string]core.PodTemplateSpec {
	return map[string]core.PodTemplateSpec{
		"service": find[*apps.Deployment](t, objectsOf(t, serviceFile)).Spec.Template,
		"job":     find[*batch.CronJob](t, objectsOf(t, jobFile)).Spec.JobTemplate.Spec.Template,
	}
}

// TestRestricted has the pods judged by the code that Kubernetes judges them with.
func TestRestricted(t *testing.T) {
	judge, err := policy.NewEvaluator(policy.DefaultChecks())
	if err != nil {
		t.Fatal(err)
	}
	level := admission.LevelVersion{Level: admission.LevelRestricted, Version: admission.LatestVersion()}
	results := func(pod core.PodTemplateSpec) (forbidden []string) {
		for _, result := range judge.EvaluatePod(level, &pod.ObjectMeta, &pod.Spec) {
			if !result.Allowed {
				forbidden = append(forbidden, result.ForbiddenReason+": "+result.ForbiddenDetail)
			}
		}
		return forbidden
	}
	for name, pod := range templates(t) {
		if found := results(pod); len(found) > 0 {
			t.Errorf("%s: %v", name, found)
		}
		root := pod.DeepCopy()
		root.Spec.SecurityContext, root.Spec.Containers[0].SecurityContext = nil, nil
		if len(results(*root)) == 0 {
			t.Errorf("%s: the standard forbids nothing", name)
		}
	}
}

// TestPods holds what the standard does not ask for and we do.
func TestPods(t *testing.T) {
	for name, pod := range templates(t) {
		if on := pod.Spec.EnableServiceLinks; on == nil || *on {
			t.Errorf("%s: enableServiceLinks must be false", name)
		}
		if on := pod.Spec.AutomountServiceAccountToken; on == nil || *on {
			t.Errorf("%s: automountServiceAccountToken must be false", name)
		}
		for _, c := range pod.Spec.Containers {
			if s := c.SecurityContext; s.ReadOnlyRootFilesystem == nil || !*s.ReadOnlyRootFilesystem {
				t.Errorf("%s: the root of %s can be written", name, c.Name)
			}
			if asked, limit := c.Resources.Requests.Memory(), c.Resources.Limits.Memory(); limit.IsZero() || asked.Cmp(*limit) != 0 {
				t.Errorf("%s: %s asks for %s of memory and may have %s; they must be equal", name, c.Name, asked, limit)
			}
			for _, mount := range c.VolumeMounts {
				found := false
				for _, v := range pod.Spec.Volumes {
					found = found || v.Name == mount.Name
				}
				if !found {
					t.Errorf("%s: no volume %s", name, mount.Name)
				}
			}
		}
	}
}

func TestService(t *testing.T) {
	objects := objectsOf(t, serviceFile)
	deployment := find[*apps.Deployment](t, objects)
	pod := deployment.Spec.Template
	container := pod.Spec.Containers[0]
	settings := map[string]string{}
	for _, e := range container.Env {
		settings[e.Name] = e.Value
	}
	times := map[string]time.Duration{}
	for _, name := range []string{"LEAT_DRAIN_DELAY", "LEAT_DRAIN_LIMIT"} {
		d, err := time.ParseDuration(settings[name])
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		times[name] = d
	}
	grace := time.Duration(*pod.Spec.TerminationGracePeriodSeconds) * time.Second
	if times["LEAT_DRAIN_DELAY"] < 5*time.Second || times["LEAT_DRAIN_LIMIT"] <= times["LEAT_DRAIN_DELAY"] || grace <= times["LEAT_DRAIN_LIMIT"] {
		t.Errorf("delay %s, limit %s and grace %s must follow each other, the first at least 5s", times["LEAT_DRAIN_DELAY"], times["LEAT_DRAIN_LIMIT"], grace)
	}

	var spool *core.EmptyDirVolumeSource
	for _, v := range pod.Spec.Volumes {
		if v.Name == "spool" {
			spool = v.EmptyDir
		}
	}
	if spool == nil || spool.SizeLimit == nil {
		t.Fatal("the spool is no emptyDir with a size")
	}
	total := mustBytes(t, settings["LEAT_SPOOL_TOTAL_BYTES"])
	if size := spool.SizeLimit.Value(); total >= size {
		t.Errorf("the spool may hold %d bytes and its volume %d", total, size)
	}
	if spool.SizeLimit.Cmp(*container.Resources.Limits.StorageEphemeral()) > 0 {
		t.Error("the volume of the spool is larger than the pod's ephemeral storage")
	}

	ports := map[string]bool{}
	for _, p := range container.Ports {
		ports[p.Name] = true
	}
	for _, probe := range []*core.Probe{container.StartupProbe, container.ReadinessProbe, container.LivenessProbe} {
		if probe == nil || !ports[probe.HTTPGet.Port.StrVal] {
			t.Errorf("a probe is missing or asks at no port of the container: %v", probe)
		}
	}
	has := labels.Set(pod.Labels)
	selects := func(what string, selector *meta.LabelSelector) {
		s, err := meta.LabelSelectorAsSelector(selector)
		if err != nil || s.Empty() || !s.Matches(has) {
			t.Errorf("%s does not select the pods (%v)", what, err)
		}
	}
	selects("the deployment", deployment.Spec.Selector)
	selects("the disruption budget", find[*disruption.PodDisruptionBudget](t, objects).Spec.Selector)
	network := find[*networking.NetworkPolicy](t, objects)
	selects("the network policy", &network.Spec.PodSelector)
	services := 0
	for _, object := range objects {
		if s, is := object.(*core.Service); is {
			services++
			selects("service "+s.Name, &meta.LabelSelector{MatchLabels: s.Spec.Selector})
			for _, p := range s.Spec.Ports {
				if !ports[p.TargetPort.StrVal] {
					t.Errorf("service %s leads to no port of the container", s.Name)
				}
			}
		}
	}
	if services != 2 {
		t.Errorf("%d services, want 2", services)
	}
	outward := false
	for _, kind := range network.Spec.PolicyTypes {
		outward = outward || kind == networking.PolicyTypeEgress
	}
	if !outward || len(network.Spec.Egress) != 0 {
		t.Error("the network policy lets something out")
	}
	scaler := find[*autoscaling.HorizontalPodAutoscaler](t, objects)
	if scaler.Spec.ScaleTargetRef.Name != deployment.Name || *scaler.Spec.MinReplicas < 2 || deployment.Spec.Replicas != nil {
		t.Error("the autoscaler must rule the deployment's replicas, two at least")
	}
}
