package check

import (
	_ "testing"

	_ "k8s.io/api/apps/v1"
	_ "k8s.io/api/autoscaling/v2"
	_ "k8s.io/api/batch/v1"
	_ "k8s.io/api/core/v1"
	_ "k8s.io/api/networking/v1"
	_ "k8s.io/api/policy/v1"
	_ "k8s.io/apimachinery/pkg/runtime/serializer"
	_ "k8s.io/pod-security-admission/policy"
	_ "sigs.k8s.io/yaml"
)
