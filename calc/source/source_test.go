package source_test

import (
	"regexp"
	"slices"
	"testing"

	"floatrail/calc/source"
)

func TestEveryEntryIsComplete(t *testing.T) {
	keyForm := regexp.MustCompile(`^[a-z0-9]+(-[a-z0-9]+)*$`)
	yearForm := regexp.MustCompile(`^(19|20)[0-9]{2}$`)
	provenances := []string{source.Read, source.Memory, source.Derived, source.CommonPractice}
	for _, s := range source.All() {
		if !keyForm.MatchString(s.Key) {
			t.Errorf("key %q is not lower case words joined by hyphens", s.Key)
		}
		if s.Title == "" || s.Publisher == "" {
			t.Errorf("%s: title %q, publisher %q: neither may be empty", s.Key, s.Title, s.Publisher)
		}
		if s.Year != "" && !yearForm.MatchString(s.Year) {
			t.Errorf("%s: year %q", s.Key, s.Year)
		}
		if !slices.Contains(provenances, s.Provenance) {
			t.Errorf("%s: provenance %q is none of %q", s.Key, s.Provenance, provenances)
		}
		if found, ok := source.Lookup(s.Key); !ok || found != s {
			t.Errorf("Lookup(%q) = %+v, %v; a key must be unique and resolve to its own entry", s.Key, found, ok)
		}
	}
}

// The keys that the models and rules cite, with the provenance of the check
// values taken from each.
func TestCitedKeys(t *testing.T) {
	for key, provenance := range map[string]string{
		"an6076": source.Memory, "ir2114": source.Read, "dt98-2a": source.Derived, "l6386e": source.Read,
		"l6388e": source.Read, "l6392": source.Read, "a3946": source.Read, "hip4086": source.Read,
		"slus486b": source.Read, "sluscj9": source.Memory, "slua887a": source.Read, "im393": source.Read,
		"lmg1210": source.Read, "snvaa94": source.Read, "snosdg7a": source.Read, "ucc27523": source.Read,
		"slusaq3f": source.Read, "slup169": source.Memory, "2ed2109": source.Read, "lm5104": source.Read,
		"recom": source.Read, "johnson-graham": source.Read, "eia-198": source.Read, "iec-60384-22": source.Memory,
		"iec-60062": source.Memory, "iec-60063": source.Memory, "iec-60747-2": source.Memory,
		"kemet-c1002": source.Read, "slaa701b": source.Read, "nasa-eee-inst-002": source.Memory,
		"ecss-q-st-30-11": source.Memory, "src-derating": source.Read, "lauritzen-ma-1991": source.Memory,
		"common-practice": source.CommonPractice, "textbook": source.CommonPractice,
		"codata": source.Memory, "si": source.Memory, "slusce9b": source.Read, "holy-stone": source.Read,
		"aluminium-makers": source.Read, "mil-prf-55365": source.Memory, "microchip-buck": source.Read,
	} {
		s, ok := source.Lookup(key)
		if !ok {
			t.Errorf("Lookup(%q) found nothing", key)
			continue
		}
		if s.Provenance != provenance {
			t.Errorf("%s: provenance %q, want %q", key, s.Provenance, provenance)
		}
	}
}

func TestLookupOfUnknownKey(t *testing.T) {
	for _, key := range []string{"", "AN6076", "an6076 ", "no-such-document"} {
		if s, ok := source.Lookup(key); ok || s != (source.Source{}) {
			t.Errorf("Lookup(%q) = %+v, %v; want nothing", key, s, ok)
		}
	}
}

func TestAllIsASortedCopy(t *testing.T) {
	first := source.All()
	for i := 1; i < len(first); i++ {
		if first[i-1].Key >= first[i].Key {
			t.Errorf("%q stands before %q", first[i-1].Key, first[i].Key)
		}
	}
	want := first[0]
	first[0] = source.Source{Key: "overwritten"}
	if got := source.All()[0]; got != want {
		t.Errorf("writing to the result of All changed the bibliography: %+v", got)
	}
}
