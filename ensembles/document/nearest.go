package document

// maxDistance is how many letters may differ for one word to be suggested in
// place of another: two cover a slip and a swap.
const maxDistance = 2

// nearest returns the candidate with the least edit distance from the word,
// the first of several, or "" if all are farther than maxDistance or than
// half the word.
func nearest(word string, candidates []string) string {
	best, least := "", min(maxDistance, len(word)/2)+1
	for _, c := range candidates {
		if distance := editDistance(word, c); distance < least {
			best, least = c, distance
		}
	}
	return best
}

// editDistance is the least number of insertions, deletions and
// substitutions that turn a into b (Levenshtein, Soviet Physics Doklady
// 10(8), 1966), by the usual row-by-row recursion.
func editDistance(a, b string) int {
	if len(a) > len(b)+maxDistance || len(b) > len(a)+maxDistance {
		return maxDistance + 1
	}
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := 1
			if a[i] == b[j] {
				cost = 0
			}
			diagonal, row[j+1] = row[j+1], min(row[j+1]+1, row[j]+1, diagonal+cost)
		}
	}
	return row[len(b)]
}
