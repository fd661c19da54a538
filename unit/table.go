package unit

import (
	"fmt"
	"math/big"
	"slices"
	"strconv"
	"strings"
)

// Table knows unit symbols. It is not safe for writing from several
// goroutines.
type Table struct {
	units    map[string]entry
	prefixes map[byte]*big.Rat
}

type entry struct {
	unit     Unit
	prefixes string // the SI prefixes it takes
}

// maxSymbol is the most characters of a unit, which bounds the work of Lookup.
const maxSymbol = 64

// rat reads a number that is written in this package.
func rat(text string) *big.Rat {
	r, ok := new(big.Rat).SetString(text)
	if !ok {
		panic("unit: bad number " + text)
	}
	return r
}

// NewTable has the built-in units.
func NewTable() *Table {
	t := &Table{units: map[string]entry{}, prefixes: map[byte]*big.Rat{}}
	for _, b := range builtin {
		t.units[b.symbol] = entry{Unit{Symbol: b.symbol, Dim: b.dim, Factor: rat(b.factor), PiPower: b.piPower}, b.prefixes}
	}
	// 0 degC is 273.15 K: SI Brochure, 9th edition, section 2.3.1.
	t.units["degC"] = entry{unit: Unit{Symbol: "degC", Dim: "K", Factor: rat("1"), Zero: rat("273.15"), Point: true}}
	for p, factor := range siPrefixes {
		t.prefixes[p] = rat(factor)
	}
	return t
}

// Define adds a unit: value times of, or a new base unit if value is nil. It
// takes no SI prefixes. The name is a word of ASCII letters, digits and
// underscores that means no unit yet.
func (t *Table) Define(name string, value *big.Rat, of Unit) error {
	if !isWord(name) {
		return fmt.Errorf("%q can't name a unit: a name has letters, digits and underscores, a letter first", name)
	}
	if have, err := t.Lookup(name); err == nil {
		return fmt.Errorf("the unit %s exists already", have.Symbol)
	}
	if value == nil {
		t.units[name] = entry{unit: Unit{Symbol: name, Dim: Dimension(name + "'"), Factor: rat("1")}}
		return nil
	}
	if of.Point {
		return ErrPoint
	}
	if value.Sign() <= 0 {
		return fmt.Errorf("a unit must be above zero")
	}
	t.units[name] = entry{unit: Unit{Symbol: name, Dim: of.Dim, Factor: new(big.Rat).Mul(value, of.factor()), PiPower: of.PiPower}}
	return nil
}

func isWord(name string) bool {
	for i, c := range []byte(name) {
		letter := c == '_' || c|0x20 >= 'a' && c|0x20 <= 'z'
		if !letter && (i == 0 || c < '0' || c > '9') {
			return false
		}
	}
	return name != "" && name != strings.Repeat("_", len(name))
}

// ascii turns the letters of a unit that aren't ASCII into those of its
// symbol. Micro and ohm have two code points each.
var ascii = strings.NewReplacer("°C", "degC", "°", "deg", "\u00b5", "u", "\u03bc", "u", "\u03a9", "ohm", "\u2126", "ohm")

// Lookup reads a unit such as km/h, m/s^2, kg*m^2 or 1/s. One slash may stand
// in it; all that follows the slash divides. µ is read as u, ° as deg, Ω as
// ohm: the symbol of the unit is ASCII. The error is an *UnknownUnit if a part
// of the text is no unit.
func (t *Table) Lookup(text string) (Unit, error) {
	if len(text) > maxSymbol {
		return Unit{}, fmt.Errorf("the unit is longer than %d characters", maxSymbol)
	}
	text = ascii.Replace(text)
	over, under, divided := strings.Cut(text, "/")
	if strings.Contains(under, "/") {
		return Unit{}, fmt.Errorf("%s has two slashes: write what divides behind one, joined by *", text)
	}
	var out Unit
	var err error
	if !divided || over != "1" {
		if out, err = t.product(text, over); err != nil {
			return Unit{}, err
		}
	}
	if divided {
		below, err := t.product(text, under)
		if err != nil {
			return Unit{}, err
		}
		if out, err = Div(out, below); err != nil {
			return Unit{}, pointError(text)
		}
	}
	out.Symbol = text
	return out, nil
}

func pointError(text string) error {
	return fmt.Errorf("degC is a point on a scale: write K in %s", text)
}

// product reads the part of text above or below its slash.
func (t *Table) product(text, part string) (Unit, error) {
	var out Unit
	for i, factor := range strings.Split(part, "*") {
		name, powerText, hasPower := strings.Cut(factor, "^")
		if name == "" {
			return Unit{}, fmt.Errorf("a unit is missing in %q", text)
		}
		u, err := t.single(name)
		if err != nil {
			return Unit{}, err
		}
		power := 1
		if hasPower {
			if power, err = strconv.Atoi(powerText); err != nil || len(powerText) != 1 || power < 2 {
				return Unit{}, fmt.Errorf("%s: a power is a digit from 2 to 9", factor)
			}
		}
		if i == 0 && power == 1 {
			out = u
			continue
		}
		for range power {
			if out, err = Mul(out, u); err != nil {
				return Unit{}, pointError(text)
			}
		}
	}
	return out, nil
}

// single reads a symbol with its prefix. A symbol of the table goes before a
// prefixed one: min is a minute.
func (t *Table) single(name string) (Unit, error) {
	if e, ok := t.units[name]; ok {
		return e.unit, nil
	}
	if e, ok := t.units[name[1:]]; ok && strings.IndexByte(e.prefixes, name[0]) >= 0 {
		u := e.unit
		u.Symbol = name
		u.Factor = new(big.Rat).Mul(u.Factor, t.prefixes[name[0]])
		return u, nil
	}
	return Unit{}, &UnknownUnit{Text: name, Nearest: t.nearest(name)}
}

// Symbols lists the known symbols, sorted, with the prefixed and composite
// ones of common use.
func (t *Table) Symbols() []string {
	out := slices.Clone(common)
	for s := range t.units {
		out = append(out, s)
	}
	slices.Sort(out)
	return out
}
