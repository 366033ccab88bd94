package main

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"

	appsv1 "k8s.io/api/apps/v1"
	corev1 "k8s.io/api/core/v1"
	"k8s.io/apimachinery/pkg/runtime"
	"k8s.io/apimachinery/pkg/runtime/serializer"
	"k8s.io/apimachinery/pkg/util/yaml"
)

// manifests is what a folder holds, in the order of its file names.
type manifests struct {
	deployments []*appsv1.Deployment
	services    []*corev1.Service
}

// load decodes every *.yaml file strictly. All files are read before it
// answers, so that its error names every fault.
func load(folder fs.FS) (manifests, error) {
	scheme := runtime.NewScheme()
	if err := errors.Join(appsv1.AddToScheme(scheme), corev1.AddToScheme(scheme)); err != nil {
		return manifests{}, err
	}
	decoder := serializer.NewCodecFactory(scheme, serializer.EnableStrict).UniversalDeserializer()

	names, err := fs.Glob(folder, "*.yaml")
	if err != nil {
		return manifests{}, err
	}
	var set manifests
	var faults []error
	for _, name := range names {
		text, err := fs.ReadFile(folder, name)
		if err != nil {
			faults = append(faults, err)
			continue
		}
		if err := set.add(decoder, text); err != nil {
			faults = append(faults, fmt.Errorf("%s: %w", name, err))
		}
	}
	return set, errors.Join(faults...)
}

// add decodes the documents of one file.
func (set *manifests) add(decoder runtime.Decoder, text []byte) error {
	documents := yaml.NewYAMLReader(bufio.NewReader(bytes.NewReader(text)))
	for {
		document, err := documents.Read()
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return err
		}
		object, kind, err := decoder.Decode(document, nil, nil)
		if err != nil {
			return err
		}
		switch object := object.(type) {
		case *appsv1.Deployment:
			set.deployments = append(set.deployments, object)
		case *corev1.Service:
			set.services = append(set.services, object)
		default:
			return fmt.Errorf("no assertions for %s", kind)
		}
	}
}
