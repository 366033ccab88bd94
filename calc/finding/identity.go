package finding

import (
	"crypto/sha256"
	"encoding/hex"
	"strconv"
	"strings"
)

// separator between the parts of an identity.
const separator = "\x1f"

// Stamp gives a finding its identity and evidence [design 6.5]. The identity is the first 16 bytes of SHA-256 over rule, stage, role and
// kind of mode; the evidence is the same over outcome, corner and numbers at three digits.
func Stamp(f *Finding, stageID string) {
	f.Identity = digest(f.Rule, stageID, f.Role, f.Mode)
	parts := []string{f.Outcome.String(), f.OperatingPoint, f.Corner.Name}
	for _, s := range f.Corner.Settings {
		parts = append(parts, s.Field, s.Bound.String())
	}
	for _, v := range []float64{f.Value.Value, f.Limit.Value, f.Guard.Value} {
		parts = append(parts, strconv.FormatFloat(v, 'e', 2, 64))
	}
	f.Evidence = digest(append(parts, f.Missing...)...)
}

func digest(parts ...string) string {
	sum := sha256.Sum256([]byte(strings.Join(parts, separator)))
	return hex.EncodeToString(sum[:16])
}
