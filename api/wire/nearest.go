package wire

import "strings"

// longestMisspelt is the length of the longest name that is compared with known ones, which are shorter.
const longestMisspelt = 64

// nearest returns the known name that a misspelt one most likely stands for: the one that is written alike but for case
// and separators, or the one that the fewest changes of a letter lead to, or the one that begins like it, or the only one
// that has it as a word.
func nearest(name string, known []string) (string, bool) {
	if name == "" || len(name) > longestMisspelt {
		return "", false
	}
	plain := plainName(name)
	best, fewest := "", 1+max(1, len(plain)/3)
	for _, k := range known {
		other := plainName(k)
		if len(other)-len(plain) >= fewest || len(plain)-len(other) >= fewest {
			continue
		}
		if d := distance(plain, other); d < fewest {
			best, fewest = k, d
		}
	}
	if best != "" {
		return best, true
	}
	longest := 3
	for _, k := range known {
		switch n := commonPrefix(plain, plainName(k)); {
		case n > longest:
			best, longest = k, n
		case n == longest:
			best = "" // not the only one
		}
	}
	if best != "" {
		return best, true
	}
	word := "_" + strings.ToLower(name) + "_"
	for _, k := range known {
		if strings.Contains("_"+k+"_", word) {
			if best != "" {
				return "", false
			}
			best = k
		}
	}
	return best, best != ""
}

func commonPrefix(a, b string) int {
	n := 0
	for n < len(a) && n < len(b) && a[n] == b[n] {
		n++
	}
	return n
}

// plainName is a name without what people vary: case, hyphens, underscores, spaces.
func plainName(name string) string {
	plain := make([]byte, 0, len(name))
	for i := range len(name) {
		switch c := name[i]; {
		case c == '_', c == '-', c == ' ':
		case 'A' <= c && c <= 'Z':
			plain = append(plain, c+'a'-'A')
		default:
			plain = append(plain, c)
		}
	}
	return string(plain)
}

// distance is the number of bytes to insert, delete, replace or exchange with their neighbour that leads from a to b
// (F. J. Damerau 1964, restricted to one change a place). Neither is longer than longestMisspelt.
func distance(a, b string) int {
	var rows [3][longestMisspelt + 1]int
	before, last, row := &rows[0], &rows[1], &rows[2]
	for j := range len(b) + 1 {
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
	return last[len(b)]
}
