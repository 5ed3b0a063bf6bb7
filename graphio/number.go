package graphio

import (
	"strconv"
)

// A numeral is what a field holds where a number is wanted.
type numeral int

const (
	aNumber  numeral = iota
	noNumber         // something else
	missing          // nothing, or a word that stands for it
)

// tens are the powers of ten that a float64 holds exactly.
var tens = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10,
	1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// parseNumber reads a decimal number with an optional sign, point and exponent,
// rounded to the nearest float64; ±Inf past its range. Nothing else is a
// number: no hexadecimal, no underscores, no decimal comma, no "Inf".
//
// Up to 2^53 and 22 places the digits and the power of ten are exact, so that
// one division rounds as it should (Clinger 1990); the rest goes to strconv.
func parseNumber(b []byte) (float64, numeral) {
	i, n := 0, len(b)
	negative := false
	if n > 0 && (b[0] == '-' || b[0] == '+') {
		negative = b[0] == '-'
		i = 1
	}
	var digits uint64
	count, places := 0, 0
	begin := i
	for ; i < n && b[i]-'0' <= 9; i++ {
		digits = digits*10 + uint64(b[i]-'0')
	}
	count = i - begin
	if i < n && b[i] == '.' {
		i++
		point := i
		for ; i < n && b[i]-'0' <= 9; i++ {
			digits = digits*10 + uint64(b[i]-'0')
		}
		places = i - point
		count += places
	}
	if count == 0 {
		return 0, notNumber(b)
	}
	if i < n || count > 18 || digits > 1<<53 || places > 22 { // 18 digits cannot overflow
		return parseLong(b, i)
	}
	x := float64(digits)
	if places > 0 {
		x /= tens[places]
	}
	if negative {
		x = -x
	}
	return x, aNumber
}

// parseLong reads what the short way does not: i bytes have been seen to be
// sign, digits and point.
func parseLong(b []byte, i int) (float64, numeral) {
	if i < len(b) {
		if b[i]|0x20 != 'e' {
			return 0, notNumber(b)
		}
		i++
		if i < len(b) && (b[i] == '-' || b[i] == '+') {
			i++
		}
		if i == len(b) {
			return 0, noNumber
		}
		for ; i < len(b); i++ {
			if b[i]-'0' > 9 {
				return 0, noNumber
			}
		}
	}
	x, err := strconv.ParseFloat(string(b), 64)
	if err != nil && x == 0 { // out of range is ±Inf with an error: the caller's to refuse
		return 0, noNumber
	}
	return x, aNumber
}

// notNumber tells missing values from other text.
func notNumber(b []byte) numeral {
	switch len(b) {
	case 0:
		return missing
	case 2, 3, 4:
		switch lower(string(b)) {
		case "na", "nan", "n/a", "null":
			return missing
		}
	}
	return noNumber
}

// formatNumber appends the shortest decimal that reads back as x.
func formatNumber(dst []byte, x float64) []byte { return strconv.AppendFloat(dst, x, 'g', -1, 64) }
