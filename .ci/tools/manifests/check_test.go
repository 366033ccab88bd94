package main

import (
	"bytes"
	"os"
	"strings"
	"testing"
	"testing/fstest"
)

const folder = "../../../deploy/kubernetes"

func TestDeployedManifests(t *testing.T) {
	set, err := load(os.DirFS(folder))
	if err != nil {
		t.Fatal(err)
	}
	for _, fault := range check(set) {
		t.Error(fault)
	}
}

// Each case damages the deployed manifests in one place and names the fault
// that must be found.
func TestFaultsAreFound(t *testing.T) {
	for _, c := range []struct {
		name, file, old, new, fault string
	}{
		{"misspelt field", "deployment.yaml", "readOnlyRootFilesystem:", "readOnlyRootFileSystem:", "unknown field"},
		{"field twice", "deployment.yaml", "  replicas: 2\n", "  replicas: 2\n  replicas: 3\n", "already set"},
		{"unknown kind", "service.yaml", "kind: Service", "kind: Sevrice", "no kind"},
		{"mistyped value", "deployment.yaml", "replicas: 2", "replicas: two", "replicas"},
		{"other kind", "service.yaml", "kind: Service", "kind: Namespace", "unknown field"},
		{"no service", "service.yaml", "", "", "no Service"},
		{"no deployment", "deployment.yaml", "", "", "no Deployment"},
		{"selector", "deployment.yaml", "    matchLabels:\n      app.kubernetes.io/name: floatrail\n", "    matchLabels:\n      app.kubernetes.io/name: other\n", "does not select the pod's labels"},
		{"spread", "deployment.yaml", "            matchLabels:\n              app.kubernetes.io/name: floatrail\n", "            matchLabels:\n              app.kubernetes.io/name: other\n", "topologySpreadConstraints"},
		{"service selector", "service.yaml", "  selector:\n    app.kubernetes.io/name: floatrail\n", "  selector:\n    app.kubernetes.io/name: other\n", "selects 0 Deployments"},
		{"target port", "service.yaml", "targetPort: grpc", "targetPort: gprc", "no container port gprc"},
		{"swapped target", "service.yaml", "targetPort: ops", "targetPort: http", "port ops: no container port http"},
		{"service port", "service.yaml", "port: 8080", "port: 8081", "port http: no container port http"},
		{"missing service port", "service.yaml", "    - name: ops\n      port: 9464\n      targetPort: ops\n      appProtocol: http\n", "", "no port ops"},
		{"container port", "deployment.yaml", "containerPort: 9464", "containerPort: 9465", "ports are not"},
		{"liveness port", "deployment.yaml", "port: ops\n            periodSeconds: 10", "port: http\n            periodSeconds: 10", "livenessProbe does not ask /livez"},
		{"readiness path", "deployment.yaml", "path: /readyz", "path: /livez", "readinessProbe does not ask /readyz"},
		{"token", "deployment.yaml", "automountServiceAccountToken: false", "automountServiceAccountToken: true", "token is mounted"},
		{"service links", "deployment.yaml", "      enableServiceLinks: false\n", "", "service links"},
		{"root", "deployment.yaml", "runAsNonRoot: true", "runAsNonRoot: false", "runAsNonRoot"},
		{"user", "deployment.yaml", "runAsUser: 65532", "runAsUser: 1000", "runAsUser"},
		{"seccomp", "deployment.yaml", "type: RuntimeDefault", "type: Unconfined", "seccompProfile"},
		{"grace", "deployment.yaml", "terminationGracePeriodSeconds: 60", "terminationGracePeriodSeconds: 5", "terminationGracePeriodSeconds"},
		{"image", "deployment.yaml", "image: floatrail:latest", "image: floatrails:latest", "image"},
		{"escalation", "deployment.yaml", "allowPrivilegeEscalation: false", "allowPrivilegeEscalation: true", "privilege escalation"},
		{"file system", "deployment.yaml", "readOnlyRootFilesystem: true", "readOnlyRootFilesystem: false", "root file system"},
		{"capabilities", "deployment.yaml", "- ALL", "- NET_RAW", "capabilities"},
		{"memory", "deployment.yaml", "memory: 128Mi", "memory: 1Gi", "memory requested exceeds"},
		{"cpu", "deployment.yaml", "cpu: 500m", "cpu: 3", "cpu requested exceeds"},
		{"no memory limit", "deployment.yaml", "              memory: 512Mi\n", "", "limits lack memory"},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := faultsOf(t, c.file, c.old, c.new)
			if !strings.Contains(got, c.fault) {
				t.Errorf("want a fault with %q, got %q", c.fault, got)
			}
		})
	}
}

// faultsOf replaces old by new once in one of the deployed manifests, or
// leaves the file out where old is empty, and returns every fault.
func faultsOf(t *testing.T, file, old, new string) string {
	t.Helper()
	damaged := fstest.MapFS{}
	for _, name := range []string{"deployment.yaml", "service.yaml"} {
		text, err := os.ReadFile(folder + "/" + name)
		if err != nil {
			t.Fatal(err)
		}
		if name == file {
			if old == "" {
				continue
			}
			if !bytes.Contains(text, []byte(old)) {
				t.Fatalf("%s has no %q", name, old)
			}
			text = bytes.Replace(text, []byte(old), []byte(new), 1)
		}
		damaged[name] = &fstest.MapFile{Data: text}
	}
	set, err := load(damaged)
	if err != nil {
		return err.Error()
	}
	return strings.Join(check(set), "\n")
}
