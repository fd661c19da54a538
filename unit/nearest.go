package unit

import (
	"fmt"
	"strings"
)

// UnknownUnit is the error of Lookup for a symbol that nothing defines.
type UnknownUnit struct {
	Text    string // the unknown part
	Nearest string // the unit it surely means (KM: km, kph: km/h), or ""
}

func (e *UnknownUnit) Error() string { return fmt.Sprintf("there is no unit %s", e.Text) }

// nearest finds what a wrong symbol means: other letter case, commonest first,
// or a known slip. Slips of the keyboard are for the caller, who knows more
// names than units.
func (t *Table) nearest(name string) string {
	for _, s := range t.Symbols() {
		if strings.EqualFold(s, name) {
			return s
		}
	}
	if s, ok := slips[strings.ToLower(name)]; ok {
		return s
	}
	// The prefix as it is written goes first: MOHM means Mohm, not mohm.
	folded := ""
	for _, b := range builtin {
		for _, p := range b.prefixes {
			switch s := string(p) + b.symbol; {
			case !strings.EqualFold(s, name):
			case s[0] == name[0]:
				return s
			case folded == "":
				folded = s
			}
		}
	}
	return folded
}
