package gateway

import (
	"net/http"
	"net/url"
	"slices"
	"sort"
	"strconv"

	"google.golang.org/protobuf/reflect/protoreflect"

	"floatrail/service/internal/wire"
)

// query checks the query of a request, reports what the method does not take and returns the rest: a misspelt parameter is never ignored.
// A call with a body takes no parameters, another one the members of its request that are not part of the path.
func query(to route, raw string, path map[string]string, report *wire.Report) string {
	values, err := url.ParseQuery(raw)
	if err != nil {
		report.Add("query", "read a malformed query, expected name=value pairs with percent encoding")
		return ""
	}
	var names []string
	fields := to.call.Input().Fields()
	if to.method == http.MethodGet {
		for i := range fields.Len() {
			if name := fields.Get(i).JSONName(); path[name] == "" {
				names = append(names, name)
			}
		}
	}
	given := make([]string, 0, len(values))
	for name := range values {
		given = append(given, name)
	}
	sort.Strings(given)
	for _, name := range given {
		switch {
		case !slices.Contains(names, name):
			report.Add(name, unknownParameter(name, names))
			values.Del(name)
		case len(values[name]) > 1 && fields.ByJSONName(name).Cardinality() != protoreflect.Repeated:
			report.Add(name, "read the parameter "+strconv.Itoa(len(values[name]))+" times, expected it once")
			values.Del(name)
		}
	}
	return values.Encode()
}

func unknownParameter(name string, names []string) string {
	text := "read an unknown parameter, expected none"
	if len(names) > 0 {
		text = "read an unknown parameter, expected " + names[0]
		for _, other := range names[1:] {
			text += ", " + other
		}
	}
	if near := wire.Nearest(name, names); near != "" {
		text += "; the nearest is " + near
	}
	return text
}
