package gateway

import (
	"slices"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

func TestRoutesCoverTheContract(t *testing.T) {
	service := pb.File_floatrail_v1_service_proto.Services().ByName("FloatRail")
	all := routes(service)
	if len(all) != service.Methods().Len() {
		t.Fatalf("%d routes for %d methods", len(all), service.Methods().Len())
	}
	for path, want := range map[string]struct {
		template string
		methods  []string
	}{
		"/v1/sizing":               {"/v1/sizing", []string{"POST", "OPTIONS"}},
		"/v1/rules":                {"/v1/rules", []string{"GET", "HEAD", "OPTIONS"}},
		"/v1/rules/charge/droop":   {"/v1/rules/{id=*/*}", []string{"GET", "HEAD", "OPTIONS"}},
		"/v1/rules/charge":         {unmatched, nil},
		"/v1/rules/charge/droop/x": {unmatched, nil},
		"/v1/rules//droop":         {unmatched, nil},
		"/v1/sizing/":              {unmatched, nil},
		"":                         {unmatched, nil},
	} {
		template, methods := match(all, path)
		if template != want.template || !slices.Equal(methods, want.methods) {
			t.Errorf("%s: %s %v", path, template, methods)
		}
	}
}
