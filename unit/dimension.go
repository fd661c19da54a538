package unit

import (
	"fmt"
	"sort"
	"strconv"
	"strings"
)

// Dimension is what a unit measures, in canonical form: base names with their
// exponents, sorted, such as "m s^-2". The empty Dimension is a plain number.
type Dimension string

// SameDimension reports whether values of u and v can be converted and added:
// V*A and W, but not rpm and Hz.
func SameDimension(u, v Unit) bool { return u.Dim == v.Dim }

// exponents splits a dimension into its base names and their powers.
func (d Dimension) exponents() map[string]int {
	out := map[string]int{}
	for part := range strings.FieldsSeq(string(d)) {
		name, power, ok := strings.Cut(part, "^")
		n := 1
		if ok {
			n, _ = strconv.Atoi(power)
		}
		out[name] += n
	}
	return out
}

func (d Dimension) times(other Dimension, sign int) Dimension {
	e := d.exponents()
	for name, n := range other.exponents() {
		e[name] += sign * n
	}
	var parts []string
	for name, n := range e {
		switch n {
		case 0:
		case 1:
			parts = append(parts, name)
		default:
			parts = append(parts, fmt.Sprintf("%s^%d", name, n))
		}
	}
	sort.Strings(parts)
	return Dimension(strings.Join(parts, " "))
}
