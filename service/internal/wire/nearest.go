package wire

// Nearest is the candidate that a misspelt name most likely means: the one fewest edits away, the earlier one among equals; empty where
// none is near.
func Nearest(name string, candidates []string) string {
	best, nearest := len(name)/3+1, ""
	if len(name) > maxText {
		return ""
	}
	for _, c := range candidates {
		if d := distance(fold(name), fold(c), best+1); d <= best && (nearest == "" || d < best) {
			best, nearest = d, c
		}
	}
	return nearest
}

// fold drops what two spellings of a name commonly differ in: case and separators.
func fold(name string) string {
	folded := make([]byte, 0, len(name))
	for i := 0; i < len(name); i++ {
		switch c := name[i]; {
		case c == '_' || c == '-' || c == ' ':
		case c >= 'A' && c <= 'Z':
			folded = append(folded, c+'a'-'A')
		default:
			folded = append(folded, c)
		}
	}
	return string(folded)
}

// distance counts the insertions, deletions, substitutions and swaps of neighbours (optimal string alignment) that turn a into b, or
// returns limit where there are at least as many.
func distance(a, b string, limit int) int {
	if len(a)-len(b) >= limit || len(b)-len(a) >= limit {
		return limit
	}
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return min(last[len(b)], limit)
}
