package diag

import "strings"

// Nearest returns the name most like the wanted one, or "" if none is close
// enough to be a slip of the keyboard. Letter case counts for little.
func Nearest(wanted string, names []string) string {
	best, bestCost := "", len(wanted)/3+2
	for _, name := range names {
		if cost := editDistance(strings.ToLower(wanted), strings.ToLower(name), bestCost); cost < bestCost {
			best, bestCost = name, cost
		}
	}
	return best
}

// editDistance counts insertions, deletions, replacements and swaps of
// neighbours (optimal string alignment), giving up at limit.
func editDistance(a, b string, limit int) int {
	if len(a)-len(b) >= limit || len(b)-len(a) >= limit {
		return limit
	}
	before, last := make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row := make([]int, len(b)+1)
		row[0] = i
		least := i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
			least = min(least, row[j])
		}
		if least >= limit {
			return limit
		}
		before, last = last, row
	}
	return last[len(b)]
}
