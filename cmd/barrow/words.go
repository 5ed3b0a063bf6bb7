package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// human is a number for a screen: four digits, commas between thousands. Files
// get every digit, see exactly.
func human(x float64) string {
	switch size := math.Abs(x); {
	case math.IsNaN(x):
		return "unknown"
	case size >= 1e9 || size < 1:
		return strconv.FormatFloat(x, 'g', 4, 64)
	case size >= 1000:
		return commas(strconv.FormatFloat(x, 'f', 0, 64))
	case size >= 100:
		return strconv.FormatFloat(x, 'f', 1, 64)
	case size >= 10:
		return strconv.FormatFloat(x, 'f', 2, 64)
	}
	return strconv.FormatFloat(x, 'f', 3, 64)
}

// count is a whole number with commas between thousands.
func count(n int) string { return commas(strconv.Itoa(n)) }

// amount is human for a total, without decimals where it is whole.
func amount(x float64) string {
	if x == math.Trunc(x) && math.Abs(x) < 1e15 {
		return commas(strconv.FormatFloat(x, 'f', 0, 64))
	}
	return human(x)
}

func commas(digits string) string {
	sign := ""
	if strings.HasPrefix(digits, "-") {
		sign, digits = "-", digits[1:]
	}
	for at := len(digits) - 3; at > 0; at -= 3 {
		digits = digits[:at] + "," + digits[at:]
	}
	return sign + digits
}

// several is "1 sample" or "3 samples".
func several(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return count(n) + " " + what + "s"
}

func percent(x float64) string {
	if math.IsNaN(x) {
		return "unknown"
	}
	return strconv.FormatFloat(100*x, 'f', 1, 64) + " %"
}

// exactly is a number for a file: the shortest text that reads back as the same
// number.
func exactly(dst []byte, x float64) []byte { return strconv.AppendFloat(dst, x, 'g', -1, 64) }

// didYouMean suggests the nearest of the words, if one is near.
func didYouMean(word string, words []string) string {
	best, least := "", 3
	for _, w := range words {
		if d := edits(word, w); d < least {
			best, least = w, d
		}
	}
	if best == "" {
		return ""
	}
	return fmt.Sprintf(" (did you mean %s?)", best)
}

// edits is how many letters must change between two words (Levenshtein 1966).
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		corner := row[0]
		row[0] = i + 1
		for j := range len(b) {
			change := corner
			if a[i] != b[j] {
				change++
			}
			corner = row[j+1]
			row[j+1] = min(change, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}

// median is the middle of ascending numbers, between the two middle ones where
// there are two.
func median(sorted []float64) float64 {
	half := len(sorted) / 2
	if len(sorted)%2 == 1 {
		return sorted[half]
	}
	return (sorted[half-1] + sorted[half]) / 2
}
