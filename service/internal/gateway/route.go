package gateway

import (
	"net/http"
	"slices"
	"strings"

	"google.golang.org/genproto/googleapis/api/annotations"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"
)

// route is one method of the contract as the REST interface offers it.
type route struct {
	method   string // of HTTP
	template string // of the path, as the contract writes it
	call     protoreflect.MethodDescriptor
}

// unmatched labels responses to paths that the contract does not have.
const unmatched = "none"

// routes reads the routes from the contract.
func routes(service protoreflect.ServiceDescriptor) []route {
	var all []route
	for i := range service.Methods().Len() {
		call := service.Methods().Get(i)
		rule, ok := proto.GetExtension(call.Options(), annotations.E_Http).(*annotations.HttpRule)
		if !ok || rule == nil {
			continue
		}
		switch {
		case rule.GetPost() != "":
			all = append(all, route{http.MethodPost, rule.GetPost(), call})
		case rule.GetGet() != "":
			all = append(all, route{http.MethodGet, rule.GetGet(), call})
		}
	}
	return all
}

// match finds the template of a path and the methods that it takes; none where the contract does not have the path.
func match(all []route, path string) (template string, methods []string) {
	template = unmatched
	for _, r := range all {
		if !fits(r.template, path) {
			continue
		}
		template = r.template
		methods = append(methods, r.method)
		if r.method == http.MethodGet {
			methods = append(methods, http.MethodHead)
		}
	}
	if len(methods) > 0 {
		methods = append(methods, http.MethodOptions)
	}
	return template, methods
}

// fits tells whether a path is one of the template's: the same segments, any for `*`, the pattern of a variable in its place.
func fits(template, path string) bool {
	if before, rest, ok := strings.Cut(template, "{"); ok {
		variable, after, _ := strings.Cut(rest, "}")
		_, pattern, given := strings.Cut(variable, "=")
		if !given {
			pattern = "*"
		}
		template = before + pattern + after
	}
	return slices.EqualFunc(strings.Split(template, "/"), strings.Split(path, "/"), func(t, p string) bool { return t == p || t == "*" && p != "" })
}

// find is the route of a template.
func find(all []route, template string) (route, bool) {
	for _, r := range all {
		if r.template == template {
			return r, true
		}
	}
	return route{}, false
}
