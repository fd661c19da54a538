package decode

import (
	"fmt"
	"strings"

	"busloom/bits"
	"busloom/diag"
	"busloom/schema"
	"busloom/unit"
)

// Options choose what a plan gives. Everything is resolved when the plan is
// built.
type Options struct {
	// Buses ties interface names to bus names. Without an entry an interface
	// is the bus of the same name; in a network of one bus every interface is
	// that bus unless Buses has entries.
	Buses map[string]string
	// Units shows units as others: km/h -> m/s.
	Units map[string]string
	// Only has patterns of what is wanted; empty: everything. See match.go.
	Only []string
}

// Plan is a network made ready for decoding. It is immutable but for Bind.
type Plan struct {
	Network  *schema.Network
	Messages []*Message
	// Signals are all wanted signals of all messages, Signal.Index their
	// position.
	Signals []*Signal

	opts   Options
	byBus  map[string]*lookup
	bound  []*lookup // by interface number; nil: unmapped
	busOf  []string  // by interface number
	names  []string  // of the interfaces
	widest int       // most values that a frame can have
	// meanings has the tables of signals with words; its first entry is the
	// meaning of all numbers.
	meanings []meaning
}

// Message is a message of the plan.
type Message struct {
	Model *schema.Message
	Bus   string
	Index int
	// Signals are the wanted ones, in text order; id fields come last.
	Signals []*Signal
	// Wanted is false if Only leaves nothing of the message.
	Wanted bool

	program  []step
	checksum *checksum
	counter  *bits.Extractor
	rule     *schema.CounterRule
	size     int
	atLeast  bool
	ids      []*Signal // open id fields that are wanted
}

// NewPlan builds a plan. Its errors name what the options have wrong, with the
// nearest known name.
func NewPlan(network *schema.Network, opts Options) (*Plan, error) {
	p := &Plan{Network: network, opts: opts, byBus: map[string]*lookup{}, meanings: []meaning{mean(Number, 0)}}
	if err := p.checkBuses(); err != nil {
		return nil, err
	}
	only, err := parsePatterns(opts.Only)
	if err != nil {
		return nil, err
	}
	units, err := newConversions(network, opts.Units)
	if err != nil {
		return nil, err
	}
	for _, bus := range network.Buses {
		p.byBus[bus.Name] = newLookup()
	}
	tables := apartTables{}
	for _, model := range network.Messages {
		m := &Message{Model: model, Bus: model.Bus.Name, Index: len(p.Messages), size: model.Size, atLeast: model.AtLeast}
		b := &builder{plan: p, message: m, only: only, units: units, tables: tables}
		if err := b.build(); err != nil {
			return nil, fmt.Errorf("message %s: %w", model.Name, err)
		}
		p.Messages = append(p.Messages, m)
		p.byBus[m.Bus].add(m)
		p.widest = max(p.widest, len(m.Signals))
	}
	for _, l := range p.byBus {
		l.finish()
	}
	if err := only.unused(network); err != nil {
		return nil, err
	}
	if err := units.unused(); err != nil {
		return nil, err
	}
	return p, nil
}

func (p *Plan) checkBuses() error {
	var names []string
	for _, b := range p.Network.Buses {
		names = append(names, b.Name)
	}
	for iface, bus := range p.opts.Buses {
		found := false
		for _, n := range names {
			found = found || n == bus
		}
		if !found {
			return fmt.Errorf("interface %s: there is no bus %s%s", iface, bus, didYouMean(bus, names))
		}
	}
	return nil
}

func didYouMean(name string, known []string) string {
	if near := diag.Nearest(name, known); near != "" {
		return " (did you mean " + near + "?)"
	}
	if len(known) > 0 && len(known) <= 8 {
		return " (there is " + strings.Join(known, ", ") + ")"
	}
	return ""
}

// Bind ties the interfaces of a source to buses, by their numbers. It is
// called again when a source finds further interfaces, never while Decode
// runs.
func (p *Plan) Bind(interfaces []string) {
	p.bound, p.busOf, p.names = nil, nil, append([]string(nil), interfaces...)
	for _, name := range interfaces {
		bus, ok := p.opts.Buses[name]
		switch {
		case ok:
		case p.byBus[name] != nil:
			bus = name
		case len(p.opts.Buses) == 0 && len(p.Network.Buses) == 1:
			bus = p.Network.Buses[0].Name
		}
		p.bound = append(p.bound, p.byBus[bus])
		p.busOf = append(p.busOf, bus)
	}
}

// Interface is the name of an interface by its number.
func (p *Plan) Interface(number uint16) string {
	if int(number) < len(p.names) {
		return p.names[number]
	}
	return ""
}

// BusOf is the bus that an interface is tied to, "" for none.
func (p *Plan) BusOf(number uint16) string {
	if int(number) < len(p.busOf) {
		return p.busOf[number]
	}
	return ""
}

// conversions are the units that are shown as others.
type conversions struct {
	to   map[string]unit.Unit
	used map[string]bool
}

func newConversions(network *schema.Network, wanted map[string]string) (*conversions, error) {
	c := &conversions{to: map[string]unit.Unit{}, used: map[string]bool{}}
	table := unit.NewTable()
	for _, d := range network.Units {
		if err := table.Define(d.Name, d.Value, d.Of); err != nil {
			return nil, fmt.Errorf("unit %s: %w", d.Name, err)
		}
	}
	for from, to := range wanted {
		a, err := table.Lookup(from)
		if err != nil {
			return nil, fmt.Errorf("%w%s", err, didYouMean(from, table.Symbols()))
		}
		b, err := table.Lookup(to)
		if err != nil {
			return nil, fmt.Errorf("%w%s", err, didYouMean(to, table.Symbols()))
		}
		if _, _, _, err := unit.Convert(a, b); err != nil {
			return nil, fmt.Errorf("%s can't be shown as %s: %w", from, to, err)
		}
		c.to[from] = b
	}
	return c, nil
}

func (c *conversions) of(u unit.Unit) (unit.Unit, bool) {
	to, ok := c.to[u.Symbol]
	if ok {
		c.used[u.Symbol] = true
	}
	return to, ok
}

func (c *conversions) unused() error {
	for from := range c.to {
		if !c.used[from] {
			return fmt.Errorf("no wanted signal has the unit %s", from)
		}
	}
	return nil
}
