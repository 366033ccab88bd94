// Package rule defines what a rule is and runs rules over a stage. A rule is a value: it says what it needs, when it applies and how value,
// limit and guard follow from a circuit. The runner does the rest: worst cases, outcomes, messages, counts. Rules never solve, they compare.
package rule

import (
	"fmt"
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/source"
	"floatrail/calc/stage"
)

// Sense tells on which side of its limit a value must stay.
type Sense uint8

// Senses.
const (
	AtMost  Sense = iota + 1 // the value must not exceed the limit
	AtLeast                  // the value must not fall below the limit
)

// Check is value, limit and guard at one draw. Numbers that cannot be had are NaN.
type Check struct {
	Value, Limit, Guard float64
	// Floor is the mildest outcome that the draw allows, whatever the numbers say.
	Floor finding.Outcome
}

// Rule is one rule of the catalogue.
type Rule struct {
	ID       string // family/name
	Title    string
	Since    string // rule set in which it appeared
	Equation string
	Limit    string // in words
	Guard    string // in words
	Applies  string // in words
	Needs    []string
	Sources  []string // keys of the bibliography

	// Severities of the outcomes. Fail, and where Never says so Marginal, may be unset.
	Fail, Marginal, Open stage.Severity
	// Never, where set, tells why the rule cannot fail.
	Never string

	Quantity  string // what the value is, in words
	Against   string // what the limit is, in words
	Dimension quantity.Dimension
	Sense     Sense
	Roles     []string // paths of the parts judged, relative to the stage; none: the stage itself
	Events    bool     // asks about switching events
	// Simulated tells for which roles the rule judges simulated events where a review asks for them; nil: for none.
	Simulated func(role string) bool
	// Bounds asks for break-evens of simulated events where the rule passes, too: how far the board may still be changed.
	Bounds bool
	// OnlySimulated rules judge nothing where no event is simulated.
	OnlySimulated bool
	Stagewide     bool // does not depend on the kind of mode: one finding for all operating points

	// Inapplicable tells why the rule has nothing to judge; empty where it applies. The operating point may be nil.
	Inapplicable func(s *stage.Stage, op *stage.OperatingPoint, role string) string
	// Check gives value, limit and guard at one draw.
	Check func(c *circuit.Circuit, role string) Check
	// Explain, where set, tells what a reader must know beside the numbers of a check.
	Explain func(c *circuit.Circuit, role string, k Check) []string
	// Proxy, where set, stands in for the margin in the search for the worst draw: a cheaper number of the same sign and direction.
	Proxy func(c *circuit.Circuit, role string) float64
	// Alternatives, where set, are margins of which Check's is the smallest, or numbers with their signs. The worst draw of each is searched
	// for: at the typical draw the smallest hides what the others read. One that does not exist at a draw is +Inf.
	Alternatives []func(c *circuit.Circuit, role string) float64
	// EventOf is, where each alternative is about one event, which; NoEvent for one that is about none. Where evaluations are dear the check at the worst
	// draw of an alternative looks at its event alone.
	EventOf []circuit.Event
	// ProxyDimension is the dimension of Proxy.
	ProxyDimension quantity.Dimension
	// Tally, where set, stands in the place of Check: the rule judges the assumptions that the rules before it made, and how many of them are
	// open. A value that is not a number leaves it open; what it says beside the check explains it. Such rules are the last of a catalogue.
	Tally func(assumed []stage.Assumption, open int) (Check, []string)
	// FailSeverity, where set, replaces Fail for a stage.
	FailSeverity func(s *stage.Stage, role string) stage.Severity
}

// Family is the first part of the id.
func (r *Rule) Family() string { return FamilyOf(r.ID) }

// FamilyOf is the first part of an id.
func FamilyOf(id string) string {
	family, _, _ := strings.Cut(id, "/")
	return family
}

// GuardsDestruction tells whether a failure can destroy hardware, latch the driver or shoot through.
func (r *Rule) GuardsDestruction() bool { return r.Fail == stage.Critical }

// severity of an outcome.
func (r *Rule) severity(o finding.Outcome, s *stage.Stage, role string, p *stage.Policy) stage.Severity {
	switch o {
	case finding.Fail:
		for _, v := range p.Severities {
			if v.Rule == r.ID {
				return v.Severity
			}
		}
		if r.FailSeverity != nil {
			return r.FailSeverity(s, role)
		}
		return r.Fail
	case finding.Marginal:
		return r.Marginal
	case finding.Open:
		return r.Open
	}
	return stage.NoSeverity
}

// Validate finds what is wrong with a catalogue: ids, documentation, sources, severities.
func Validate(rules []*Rule) []error {
	var out []error
	seen := map[string]bool{}
	for _, r := range rules {
		bad := func(format string, a ...any) {
			out = append(out, fmt.Errorf("rule %s: "+format, append([]any{r.ID}, a...)...))
		}
		family, name, ok := strings.Cut(r.ID, "/")
		if !ok || family == "" || name == "" || strings.ToLower(r.ID) != r.ID {
			bad("id is not family/name in lower case")
		}
		if seen[r.ID] {
			bad("id is used twice")
		}
		seen[r.ID] = true
		for _, t := range []struct{ what, text string }{{"title", r.Title}, {"since", r.Since}, {"equation", r.Equation}, {"limit", r.Limit},
			{"guard", r.Guard}, {"applies", r.Applies}, {"quantity", r.Quantity}, {"against", r.Against}} {
			if t.text == "" {
				bad("no %s", t.what)
			}
		}
		if len(r.Needs) == 0 {
			bad("no needed fields")
		}
		if len(r.Sources) == 0 {
			bad("no source")
		}
		for _, k := range r.Sources {
			if _, ok := source.Lookup(k); !ok {
				bad("source %q is not in the bibliography", k)
			}
		}
		if r.Open == stage.NoSeverity || r.Never == "" && (r.Fail == stage.NoSeverity || r.Marginal == stage.NoSeverity) {
			bad("a severity is unset")
		}
		if r.Never != "" && r.Fail != stage.NoSeverity {
			bad("has a severity of an outcome that it never has")
		}
		if r.GuardsDestruction() && r.Open < stage.Major {
			bad("guards against destruction and is open below MAJOR")
		}
		if r.Sense == 0 || (r.Check == nil) == (r.Tally == nil) || r.Inapplicable == nil {
			bad("no sense, check or applicability")
		}
	}
	return out
}

// Searches are the functions among whose worst draws is the rule's.
func (r *Rule) Searches(role string) []corner.Function {
	if len(r.Alternatives) == 0 {
		return []corner.Function{r.function(role)}
	}
	out := make([]corner.Function, len(r.Alternatives))
	for i, f := range r.Alternatives {
		out[i] = func(d *corner.Draw) float64 { return f(circuit.Of(d), role) }
	}
	return out
}

// about is the rule of one alternative, which looks at its event alone.
func (r *Rule) about(alternative int) *Rule {
	one, e := *r, r.EventOf[alternative]
	one.Check = func(c *circuit.Circuit, role string) (k Check) {
		c.Focused(e, func() { k = r.Check(c, role) })
		return k
	}
	if r.Explain != nil {
		one.Explain = func(c *circuit.Circuit, role string, k Check) (notes []string) {
			c.Focused(e, func() { notes = r.Explain(c, role, k) })
			return notes
		}
	}
	return &one
}

// Worst is the function whose smallest value is the rule's worst draw.
func (r *Rule) Worst(role string) corner.Function { return r.function(role) }

// Holds tells whether a circuit keeps the rule's guard.
func (r *Rule) Holds(c *circuit.Circuit, role string) bool {
	k := r.Check(c, role)
	return r.margin(k) >= 0 && r.guardSlack(k) >= 0 && k.Floor < finding.Marginal
}
