package finding_test

import (
	"crypto/sha256"
	"encoding/hex"
	"math"
	"regexp"
	"testing"

	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

// volts is a measure in volts.
func volts(v float64) finding.Measure { return finding.Measure{Value: v, Dimension: quantity.Voltage} }

// sample is a finding of which everything is filled.
func sample() finding.Finding {
	return finding.Finding{
		Rule: "charge/droop", Role: "highSide", Mode: "fixedDuty", Outcome: finding.Fail, Severity: stage.Major, Title: "Ripple",
		Message: "Ripple 1 V", Subjects: []string{"Q1"}, OperatingPoint: "full load",
		Corner: finding.Corner{Name: "hot", Settings: []finding.Setting{
			{Field: "stage.highSide.gateCharge", Bound: finding.AtMax, Value: finding.Measure{Value: 80e-9, Dimension: quantity.Charge}},
			{Field: "stage.bootstrap.capacitor.capacitance", Bound: finding.AtMin, Value: finding.Measure{Value: 90e-9, Dimension: quantity.Capacitance}},
		}},
		Value: volts(1.002), Limit: volts(0.5), Guard: volts(0.45), Typical: volts(0.8),
		Margin: finding.Margin{Absolute: volts(-0.502), Relative: -1.004}, Equation: "Q/C", Missing: []string{"stage.driver.offsetLeakage"},
		Notes: []string{"a note"},
	}
}

// stamped is the finding after a change, with its identity and evidence in a stage.
func stamped(stageID string, change func(*finding.Finding)) finding.Finding {
	f := sample()
	if change != nil {
		change(&f)
	}
	finding.Stamp(&f, stageID)
	return f
}

// joined is the first 16 bytes of SHA-256 over parts with U+001F between them, byte by byte from the definition [design 6.5].
func joined(parts ...string) string {
	h := sha256.New()
	for i, p := range parts {
		if i > 0 {
			h.Write([]byte{0x1f})
		}
		h.Write([]byte(p))
	}
	return hex.EncodeToString(h.Sum(nil)[:16])
}

func TestIdentity(t *testing.T) {
	hexadecimal := regexp.MustCompile(`^[0-9a-f]{32}$`)
	cases := []struct {
		name, rule, stage, role, mode string
		want                          string // by sha256sum of GNU coreutils over the bytes; empty: joined alone
	}{
		{"all parts", "charge/droop", "drive-A", "highSide", "fixedDuty", "95181684464ee99c448fe5620a0b4f0f"},
		{"nothing but the rule", "duty/longest-on-time", "", "", "", "5a0b3791a541fe81229a8d9820da28b1"},
		{"letters beyond ASCII", "gate/overvoltage", "Brücke Ω", "driver", "heldOn", ""},
		{"a blank beside a part", "gate/overvoltage", " a ", "driver", "heldOn", ""},
	}
	for _, c := range cases {
		got := stamped(c.stage, func(f *finding.Finding) { f.Rule, f.Role, f.Mode = c.rule, c.role, c.mode })
		if want := joined(c.rule, c.stage, c.role, c.mode); got.Identity != want {
			t.Errorf("%s: identity %s, want %s", c.name, got.Identity, want)
		}
		if c.want != "" && got.Identity != c.want {
			t.Errorf("%s: identity %s, want %s", c.name, got.Identity, c.want)
		}
		if !hexadecimal.MatchString(got.Identity) || !hexadecimal.MatchString(got.Evidence) {
			t.Errorf("%s: identity %q, evidence %q: want 32 hexadecimal digits", c.name, got.Identity, got.Evidence)
		}
	}
}

// What identifies a finding changes its identity; what it says does not.
func TestIdentityParts(t *testing.T) {
	base := stamped("a", nil)
	cases := []struct {
		name   string
		stage  string
		change func(*finding.Finding)
		same   bool
	}{
		{"rule", "a", func(f *finding.Finding) { f.Rule = "charge/oversize" }, false},
		{"stage", "b", nil, false},
		{"role", "a", func(f *finding.Finding) { f.Role = "lowSide" }, false},
		{"mode", "a", func(f *finding.Finding) { f.Mode = "heldOn" }, false},
		{"parts moved across the separator", "ah", func(f *finding.Finding) { f.Role = "ighSide" }, false},
		{"values", "a", func(f *finding.Finding) {
			f.Value, f.Limit, f.Guard, f.Typical = volts(2), volts(3), volts(4), volts(5)
			f.Margin = finding.Margin{Absolute: volts(1), Relative: 0.5}
		}, true},
		{"outcome and severity", "a", func(f *finding.Finding) { f.Outcome, f.Severity = finding.Pass, stage.NoSeverity }, true},
		{"reference designator", "a", func(f *finding.Finding) { f.Subjects = []string{"Q7"} }, true},
		{"wording", "a", func(f *finding.Finding) {
			f.Title, f.Message, f.Equation, f.Notes = "T", "M", "E", nil
		}, true},
		{"operating point and corner", "a", func(f *finding.Finding) {
			f.OperatingPoint, f.Corner = "light load", finding.Corner{Name: "cold"}
		}, true},
	}
	for _, c := range cases {
		got := stamped(c.stage, c.change)
		if (got.Identity == base.Identity) != c.same {
			t.Errorf("%s: identity %s beside %s, want equal: %v", c.name, got.Identity, base.Identity, c.same)
		}
	}
}

// Evidence is over outcome, corner and numbers at three digits.
func TestEvidence(t *testing.T) {
	base := stamped("a", nil)
	cases := []struct {
		name   string
		change func(*finding.Finding)
		same   bool
	}{
		{"value within three digits", func(f *finding.Finding) { f.Value = volts(1.0049) }, true},
		{"value beyond three digits", func(f *finding.Finding) { f.Value = volts(1.0051) }, false},
		{"limit within three digits", func(f *finding.Finding) { f.Limit = volts(0.50049) }, true},
		{"limit beyond three digits", func(f *finding.Finding) { f.Limit = volts(0.50051) }, false},
		{"guard within three digits", func(f *finding.Finding) { f.Guard = volts(0.45049) }, true},
		{"guard beyond three digits", func(f *finding.Finding) { f.Guard = volts(0.45051) }, false},
		{"guard unset", func(f *finding.Finding) { f.Guard = volts(math.NaN()) }, false},
		{"sign", func(f *finding.Finding) { f.Value = volts(-f.Value.Value) }, false},
		{"magnitude", func(f *finding.Finding) { f.Value = volts(1000 * f.Value.Value) }, false},
		{"value and limit exchanged", func(f *finding.Finding) { f.Value, f.Limit = f.Limit, f.Value }, false},
		{"outcome", func(f *finding.Finding) { f.Outcome = finding.Marginal }, false},
		{"operating point", func(f *finding.Finding) { f.OperatingPoint = "light load" }, false},
		{"set", func(f *finding.Finding) { f.Corner.Name = "cold" }, false},
		{"end of an input", func(f *finding.Finding) { f.Corner.Settings[1].Bound = finding.AtMax }, false},
		{"input", func(f *finding.Finding) { f.Corner.Settings[1].Field = "stage.driver.offsetLeakage" }, false},
		{"what is missing", func(f *finding.Finding) { f.Missing = nil }, false},
		{"wording and subject", func(f *finding.Finding) { f.Message, f.Notes, f.Subjects = "M", nil, []string{"Q7"} }, true},
		{"severity", func(f *finding.Finding) { f.Severity = stage.Minor }, true},
	}
	for _, c := range cases {
		got := stamped("a", c.change)
		if (got.Evidence == base.Evidence) != c.same {
			t.Errorf("%s: evidence %s beside %s, want equal: %v", c.name, got.Evidence, base.Evidence, c.same)
		}
	}
	if got := stamped("another", nil); got.Evidence != base.Evidence {
		t.Error("evidence depends on the stage")
	}
}

// The names are those of the contract.
func TestNames(t *testing.T) {
	for i, want := range []string{"UNSPECIFIED", "NOT_APPLICABLE", "PASS", "MARGINAL", "OPEN", "FAIL"} {
		if got := finding.Outcome(i).String(); got != want {
			t.Errorf("outcome %d: %s, want %s", i, got, want)
		}
	}
	for i, want := range []string{"UNSPECIFIED", "PASS", "FAIL", "INCOMPLETE"} {
		if got := finding.Verdict(i).String(); got != want {
			t.Errorf("verdict %d: %s, want %s", i, got, want)
		}
	}
	for i, want := range []string{"UNSPECIFIED", "MIN", "TYP", "MAX", "INTERIOR"} {
		if got := finding.Bound(i).String(); got != want {
			t.Errorf("bound %d: %s, want %s", i, got, want)
		}
	}
}
