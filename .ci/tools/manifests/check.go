package main

import (
	"fmt"
	"slices"

	appsv1 "k8s.io/api/apps/v1"
	corev1 "k8s.io/api/core/v1"
	metav1 "k8s.io/apimachinery/pkg/apis/meta/v1"
	"k8s.io/apimachinery/pkg/labels"
	"k8s.io/apimachinery/pkg/util/intstr"
)

// opsPort is the name of the port that serves /livez, /readyz and /metrics.
const opsPort = "ops"

// ports are the container's ports by name, as the Dockerfile exposes them.
var ports = []corev1.ContainerPort{
	{Name: "http", ContainerPort: 8080},
	{Name: "grpc", ContainerPort: 50051},
	{Name: opsPort, ContainerPort: 9464},
}

// check holds the manifests against what decoding cannot see and returns one
// line per fault.
func check(set manifests) []string {
	var faults []string
	if len(set.deployments) == 0 {
		faults = append(faults, "no Deployment")
	}
	if len(set.services) == 0 {
		faults = append(faults, "no Service")
	}
	for _, deployment := range set.deployments {
		for _, fault := range slices.Concat(checkSelector(deployment), checkPod(&deployment.Spec.Template.Spec)) {
			faults = append(faults, fmt.Sprintf("Deployment %s: %s", deployment.Name, fault))
		}
	}
	for _, service := range set.services {
		for _, fault := range checkService(service, set.deployments) {
			faults = append(faults, fmt.Sprintf("Service %s: %s", service.Name, fault))
		}
	}
	return faults
}

func checkSelector(deployment *appsv1.Deployment) []string {
	selector, err := metav1.LabelSelectorAsSelector(deployment.Spec.Selector)
	if err != nil {
		return []string{"selector: " + err.Error()}
	}
	var faults []string
	pod := labels.Set(deployment.Spec.Template.Labels)
	if selector.Empty() || !selector.Matches(pod) {
		faults = append(faults, fmt.Sprintf("selector %q does not select the pod's labels %q", selector, pod))
	}
	for _, spread := range deployment.Spec.Template.Spec.TopologySpreadConstraints {
		selector, err := metav1.LabelSelectorAsSelector(spread.LabelSelector)
		if err != nil || selector.Empty() || !selector.Matches(pod) {
			faults = append(faults, fmt.Sprintf("topologySpreadConstraints over %s does not select the pod's labels", spread.TopologyKey))
		}
	}
	return faults
}

// assertion is one thing that must hold, with the words for when it does not.
type assertion struct {
	holds bool
	fault string
}

func failures(assertions []assertion) []string {
	var faults []string
	for _, a := range assertions {
		if !a.holds {
			faults = append(faults, a.fault)
		}
	}
	return faults
}

func checkPod(pod *corev1.PodSpec) []string {
	security := pod.SecurityContext
	if security == nil {
		security = &corev1.PodSecurityContext{}
	}
	faults := failures([]assertion{
		{isFalse(pod.AutomountServiceAccountToken), "the service account token is mounted"},
		{isFalse(pod.EnableServiceLinks), "service links would set FLOATRAIL_ variables"},
		{isTrue(security.RunAsNonRoot), "runAsNonRoot is not set"},
		{security.RunAsUser != nil && *security.RunAsUser == 65532, "runAsUser is not 65532, the image's user"},
		{security.SeccompProfile != nil && security.SeccompProfile.Type == corev1.SeccompProfileTypeRuntimeDefault, "seccompProfile is not RuntimeDefault"},
		{pod.TerminationGracePeriodSeconds != nil && *pod.TerminationGracePeriodSeconds > 30, "terminationGracePeriodSeconds leaves no room beyond a drain of 30 s"},
		{len(pod.Containers) == 1, fmt.Sprintf("%d containers, not one", len(pod.Containers))},
	})
	for i := range pod.Containers {
		faults = append(faults, checkContainer(&pod.Containers[i])...)
	}
	return faults
}

func checkContainer(container *corev1.Container) []string {
	security := container.SecurityContext
	if security == nil {
		security = &corev1.SecurityContext{}
	}
	faults := failures([]assertion{
		{container.Image == "floatrail:latest", fmt.Sprintf("image %q is not floatrail:latest", container.Image)},
		{isFalse(security.AllowPrivilegeEscalation), "privilege escalation is allowed"},
		{isTrue(security.ReadOnlyRootFilesystem), "the root file system can be written"},
		{security.Capabilities != nil && slices.Equal(security.Capabilities.Drop, []corev1.Capability{"ALL"}) && len(security.Capabilities.Add) == 0, "capabilities are not all dropped"},
		{slices.EqualFunc(container.Ports, ports, samePort), "ports are not http 8080, grpc 50051, ops 9464"},
		{!container.Resources.Requests.Cpu().IsZero() && !container.Resources.Requests.Memory().IsZero(), "requests lack cpu or memory"},
		{!container.Resources.Limits.Memory().IsZero(), "limits lack memory"},
		{container.Resources.Requests.Memory().Cmp(*container.Resources.Limits.Memory()) <= 0, "memory requested exceeds its limit"},
		{container.Resources.Limits.Cpu().IsZero() || container.Resources.Requests.Cpu().Cmp(*container.Resources.Limits.Cpu()) <= 0, "cpu requested exceeds its limit"},
	})
	for _, p := range []struct {
		name, path string
		probe      *corev1.Probe
	}{
		{"startupProbe", "/livez", container.StartupProbe},
		{"livenessProbe", "/livez", container.LivenessProbe},
		{"readinessProbe", "/readyz", container.ReadinessProbe},
	} {
		if p.probe == nil || p.probe.HTTPGet == nil || p.probe.HTTPGet.Path != p.path || p.probe.HTTPGet.Port != intstr.FromString(opsPort) {
			faults = append(faults, fmt.Sprintf("%s does not ask %s of the port %s", p.name, p.path, opsPort))
		}
	}
	return faults
}

// checkService wants one Deployment that the selector selects and that has
// every target port.
func checkService(service *corev1.Service, deployments []*appsv1.Deployment) []string {
	selector := labels.SelectorFromSet(service.Spec.Selector)
	selected := slices.DeleteFunc(slices.Clone(deployments), func(d *appsv1.Deployment) bool {
		return selector.Empty() || d.Namespace != service.Namespace || !selector.Matches(labels.Set(d.Spec.Template.Labels))
	})
	if len(selected) != 1 {
		return []string{fmt.Sprintf("selector %q selects %d Deployments, not one", selector, len(selected))}
	}
	var faults []string
	for _, want := range ports {
		if !slices.ContainsFunc(service.Spec.Ports, func(p corev1.ServicePort) bool { return p.Name == want.Name }) {
			faults = append(faults, "no port "+want.Name)
		}
	}
	for _, port := range service.Spec.Ports {
		if !hasTarget(selected[0], port) {
			faults = append(faults, fmt.Sprintf("port %s: no container port %s", port.Name, port.TargetPort.String()))
		}
	}
	return faults
}

// hasTarget reports whether a container has the port's target, by the same
// name and number.
func hasTarget(deployment *appsv1.Deployment, port corev1.ServicePort) bool {
	for _, container := range deployment.Spec.Template.Spec.Containers {
		for _, have := range container.Ports {
			if port.TargetPort == intstr.FromString(have.Name) && port.Name == have.Name && port.Port == have.ContainerPort {
				return true
			}
		}
	}
	return false
}

func samePort(a, b corev1.ContainerPort) bool {
	return a.Name == b.Name && a.ContainerPort == b.ContainerPort
}

func isTrue(b *bool) bool { return b != nil && *b }

func isFalse(b *bool) bool { return b != nil && !*b }
