package unit

import (
	"fmt"
	"math/big"
	"sort"
	"strconv"
	"strings"
)

// Table knows unit symbols. It is not safe for writing from several
// goroutines.
type Table struct {
	units    map[string]entry
	prefixes []prefix
}

type entry struct {
	unit     Unit
	prefixed bool // takes SI prefixes
}

type prefix struct {
	symbol string
	factor *big.Rat
}

// UnknownUnit is the error of Lookup for a symbol that nothing defines.
type UnknownUnit struct {
	Text    string // the unknown part
	Nearest string // a known symbol that differs in letter case only, or ""
}

func (e *UnknownUnit) Error() string { return fmt.Sprintf("there is no unit %s", e.Text) }

// builtin are the units of the trade. Values: SI Brochure, 9th edition (2019),
// tables 2, 4 and 8; rpm is a turn of 360 deg each minute.
var builtin = []struct {
	symbol   string
	dim      Dimension
	factor   string
	piPower  int
	prefixed bool
}{
	{"m", "m", "1", 0, true},
	{"g", "kg", "1/1000", 0, true},
	{"t", "kg", "1000", 0, false},
	{"s", "s", "1", 0, true},
	{"min", "s", "60", 0, false},
	{"h", "s", "3600", 0, false},
	{"d", "s", "86400", 0, false},
	{"A", "A", "1", 0, true},
	{"K", "K", "1", 0, true},
	{"mol", "mol", "1", 0, true},
	{"cd", "cd", "1", 0, false},
	{"lx", "cd m^-2", "1", 0, true},
	{"deg", "deg", "1", 0, false},
	{"rad", "deg", "180", -1, true},
	{"turn", "deg", "360", 0, false},
	{"rpm", "deg s^-1", "6", 0, false},
	{"Hz", "s^-1", "1", 0, true},
	{"N", "kg m s^-2", "1", 0, true},
	{"Nm", "kg m^2 s^-2", "1", 0, true},
	{"Pa", "kg m^-1 s^-2", "1", 0, true},
	{"bar", "kg m^-1 s^-2", "100000", 0, true},
	{"J", "kg m^2 s^-2", "1", 0, true},
	{"W", "kg m^2 s^-3", "1", 0, true},
	{"Wh", "kg m^2 s^-2", "3600", 0, true},
	{"V", "A^-1 kg m^2 s^-3", "1", 0, true},
	{"ohm", "A^-2 kg m^2 s^-3", "1", 0, true},
	{"F", "A^2 kg^-1 m^-2 s^4", "1", 0, true},
	{"H", "A^-2 kg m^2 s^-2", "1", 0, true},
	{"C", "A s", "1", 0, true},
	{"Ah", "A s", "3600", 0, true},
	{"T", "A^-1 kg s^-2", "1", 0, true},
	{"L", "m^3", "1/1000", 0, true},
	{"bit", "bit", "1", 0, true},
	{"byte", "bit", "8", 0, false},
	{"%", "", "1/100", 0, false},
	{"permille", "", "1/1000", 0, false},
	{"ppm", "", "1/1000000", 0, false},
}

var siPrefixes = []struct{ symbol, factor string }{
	{"n", "1/1000000000"}, {"u", "1/1000000"}, {"m", "1/1000"}, {"c", "1/100"}, {"d", "1/10"},
	{"h", "100"}, {"k", "1000"}, {"M", "1000000"}, {"G", "1000000000"},
}

func rat(text string) *big.Rat {
	r, ok := new(big.Rat).SetString(text)
	if !ok {
		panic("unit: bad number " + text)
	}
	return r
}

// NewTable has the built-in units.
func NewTable() *Table {
	t := &Table{units: map[string]entry{}}
	for _, b := range builtin {
		t.units[b.symbol] = entry{Unit{Symbol: b.symbol, Dim: b.dim, Factor: rat(b.factor), PiPower: b.piPower}, b.prefixed}
	}
	t.units["degC"] = entry{unit: Unit{Symbol: "degC", Dim: "K", Factor: rat("1"), Zero: rat("273.15"), Point: true}}
	for _, p := range siPrefixes {
		t.prefixes = append(t.prefixes, prefix{p.symbol, rat(p.factor)})
	}
	return t
}

// Define adds a unit: value times of, or a new base unit if value is nil. It
// takes no SI prefixes.
func (t *Table) Define(name string, value *big.Rat, of Unit) error {
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

// Lookup reads a unit such as km/h, m/s^2 or kg*m^2. One slash may stand in
// it; all that follows the slash divides. µ is read as u, ° as deg.
func (t *Table) Lookup(text string) (Unit, error) {
	text = strings.NewReplacer("°C", "degC", "°", "deg", "µ", "u", "μ", "u", "Ω", "ohm", "Ω", "ohm").Replace(text)
	if len(text) > 64 {
		return Unit{}, fmt.Errorf("the unit is longer than 64 characters")
	}
	over, under, divided := strings.Cut(text, "/")
	if strings.Contains(under, "/") {
		return Unit{}, fmt.Errorf("%s has two slashes: write what divides behind one, joined by *", text)
	}
	out, err := t.product(over)
	if err != nil {
		return Unit{}, err
	}
	if divided {
		below, err := t.product(under)
		if err != nil {
			return Unit{}, err
		}
		if out, err = Div(out, below); err != nil {
			return Unit{}, fmt.Errorf("degC is a point on a scale: write K in %s", text)
		}
	}
	if out.Point && text != "degC" {
		return Unit{}, fmt.Errorf("degC is a point on a scale: write K in %s", text)
	}
	out.Symbol = text
	return out, nil
}

func (t *Table) product(text string) (Unit, error) {
	var out Unit
	for i, part := range strings.Split(text, "*") {
		name, powerText, hasPower := strings.Cut(part, "^")
		power := 1
		if hasPower {
			n, err := strconv.Atoi(powerText)
			if err != nil || n < 2 || n > 9 || powerText[0] == '+' {
				return Unit{}, fmt.Errorf("%s: a power is a digit from 2 to 9", part)
			}
			power = n
		}
		u, err := t.single(name)
		if err != nil {
			return Unit{}, err
		}
		for j := range power {
			if i == 0 && j == 0 {
				out = u
				continue
			}
			if out, err = Mul(out, u); err != nil {
				return Unit{}, fmt.Errorf("degC is a point on a scale: write K in %s", text)
			}
		}
	}
	return out, nil
}

func (t *Table) single(name string) (Unit, error) {
	if name == "1" {
		return Unit{}, nil
	}
	if e, ok := t.units[name]; ok {
		return e.unit, nil
	}
	for _, p := range t.prefixes {
		rest, ok := strings.CutPrefix(name, p.symbol)
		if e, known := t.units[rest]; ok && known && e.prefixed {
			u := e.unit
			u.Symbol = name
			u.Factor = new(big.Rat).Mul(u.Factor, p.factor)
			return u, nil
		}
	}
	err := &UnknownUnit{Text: name}
	for _, s := range t.Symbols() {
		if strings.EqualFold(s, name) {
			err.Nearest = s
		}
	}
	return Unit{}, err
}

// Symbols lists the known symbols, sorted, with the prefixed ones of common
// use.
func (t *Table) Symbols() []string {
	out := []string{"km", "mm", "cm", "um", "kg", "mg", "ms", "us", "ns", "mA", "kHz", "MHz", "kN", "kPa", "MPa", "hPa",
		"mbar", "kJ", "kW", "kWh", "mV", "kV", "kohm", "uF", "nF", "mAh", "mL", "kbit", "Mbit", "km/h", "m/s", "m/s^2",
		"g/s", "kg/h", "L/h", "rad/s", "deg/s"}
	for s := range t.units {
		out = append(out, s)
	}
	sort.Strings(out)
	return out
}
